package chart

import (
	"math"
	"strings"
	"testing"
	"time"

	"gonum.org/v1/plot/vg"
)

func labels(ticks []tick) string {
	var out []string
	for _, t := range ticks {
		out = append(out, t.label)
	}
	return strings.ReplaceAll(strings.Join(out, " "), "\n", "/")
}

func TestNiceTicks(t *testing.T) {
	for _, c := range []struct {
		low, high float64
		most      int
		want      string
	}{
		{0, 8.64, 5, "0 2 4 6 8"},
		{0, 1, 5, "0.0 0.2 0.4 0.6 0.8 1.0"},
		{-350, 350, 6, "−200 0 200"},
		{-0.035, 0.035, 3, "0.00"},
		{0, 0.0123, 4, "0.000 0.005 0.010"},
		{5, 5, 4, ""},
		{0, math.NaN(), 4, ""},
		{0, 10, 0, ""},
	} {
		if got := labels(niceTicks(c.low, c.high, c.most)); got != c.want {
			t.Errorf("ticks from %g to %g: %q, want %q", c.low, c.high, got, c.want)
		}
	}
}

func TestScaleHasAtLeastTwoTicks(t *testing.T) {
	for _, high := range []float64{1e-3, 0.035, 0.07, 0.99, 1.01, 4.9, 77, 1e6} {
		if n := len(scaleTicks(-high, high, 3)); n < 2 {
			t.Errorf("±%g has %d ticks", high, n)
		}
	}
}

func TestOrderTicksLabelOddOrders(t *testing.T) {
	if got, want := labels(orderTicks(2, 12, 20)), " 3  5  7  9  11 "; got != want {
		t.Errorf("%q, want %q", got, want)
	}
	if got, want := strings.Fields(labels(orderTicks(2, 50, 8))), "7 13 19 25 31 37 43 49"; strings.Join(got, " ") != want {
		t.Errorf("with room for eight: %q, want %q", got, want)
	}
}

// A day with a change of the clock has 23 hours; its midnights stay midnights. Central European Summer Time began on
// 2026-03-29 at 01:00 UTC (tz database).
func TestClockTicksFollowTheClock(t *testing.T) {
	zone, err := time.LoadLocation("Europe/Berlin")
	if err != nil {
		t.Skip("no time zone data here")
	}
	at := Place{Start: time.Date(2026, 3, 28, 0, 0, 0, 0, zone), Zone: zone}
	ticks := clockTicks(0, 3*86400, at, 4)
	if got, want := labels(ticks), "Sat/28 Mar Sun/29 Mar Mon/30 Mar Tue/31 Mar"; got != want {
		t.Errorf("labels %q, want %q", got, want)
	}
	if gap := ticks[2].at - ticks[1].at; gap != 23*3600 {
		t.Errorf("the short day spans %g s", gap)
	}
}

func TestClockTicksWithinADay(t *testing.T) {
	at := Place{Start: time.Date(2026, 3, 9, 23, 50, 0, 0, time.UTC)}
	if got, want := labels(clockTicks(0, 1500, at, 6)), "23:50/9 Mar 23:55 00:00/10 Mar 00:05 00:10 00:15"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}

func TestTicksWithoutAClock(t *testing.T) {
	if got, want := labels(clockTicks(0, 7200, Place{}, 5)), "0 min 50 min 100 min"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}

// Names that would touch are moved apart, keep their order, and stay inside while there is room.
func TestSpread(t *testing.T) {
	ys := []vg.Length{1, 1.5, 2, 60, 99}
	spread(ys, 8, 0, 100)
	for i, y := range ys {
		if y < 0 || y > 100 || i > 0 && y-ys[i-1] < 8-1e-9 {
			t.Errorf("positions %v", ys)
			break
		}
	}
	if ys[3] != 60 {
		t.Errorf("a name with room was moved to %v", ys[3])
	}
}

// A thinned line keeps every peak and its ends.
func TestThinnedKeepsPeaks(t *testing.T) {
	var pts []vg.Point
	for i := range 20000 {
		x := float64(i) / 200
		pts = append(pts, vg.Point{X: vg.Length(x), Y: vg.Length(math.Sin(x))})
	}
	pts[7777].Y, pts[12345].Y = 9, -9
	got := thinned(pts)
	if len(got) > 3000 {
		t.Errorf("%d points are left of %d", len(got), len(pts))
	}
	low, high := math.Inf(1), math.Inf(-1)
	for i, p := range got {
		low, high = math.Min(low, float64(p.Y)), math.Max(high, float64(p.Y))
		if i > 0 && p.X < got[i-1].X {
			t.Fatal("points out of order")
		}
	}
	if low != -9 || high != 9 || got[0] != pts[0] || got[len(got)-1] != pts[len(pts)-1] {
		t.Errorf("from %g to %g, ends %v and %v", low, high, got[0], got[len(got)-1])
	}
}
