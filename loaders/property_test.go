package loaders_test

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strconv"
	"testing"
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders"
)

// TestTheSameSignalInEveryForm measures the known signal from every form, and must find in each what it finds in the
// signal itself, to the form's own resolution.
//
// The tolerances follow from the form's step alone. Writing a sample down moves it by at most e, half a step, so the
// change of a whole record has an rms of at most e. By Parseval's theorem no group of spectral lines then changes by
// more than e, by the triangle inequality no level does; an angle turns by at most asin(e/level), and order h besides
// by h times what the reference turns. (V1 places the windows of all channels: no form holds it more coarsely than the
// others.)
func TestTheSameSignalInEveryForm(t *testing.T) {
	want := survey(t, known(nil), nil)
	if w := want.Windows; w.Used != 15 || w.Flagged != 0 || want.Channels[0].THD3s.N != 1 {
		t.Fatalf("the signal itself gives windows %+v, %d of 3 s; want 15 used, 1", w, want.Channels[0].THD3s.N)
	}
	for _, f := range slices.Concat(textForms(), sessionForms(), comtradeForms(), wavForms()) {
		t.Run(f.name, func(t *testing.T) {
			t.Parallel()
			dir := t.TempDir()
			f.write(t, dir)
			paths, err := loaders.Expand([]string{dir})
			if err != nil {
				t.Fatal(err)
			}
			src, err := loaders.Open(paths, f.opt)
			if err != nil {
				t.Fatal(err)
			}
			if got := src.Header().Files[0].Format; f.format != "" && got != f.format {
				t.Errorf("read as %q, want %q", got, f.format)
			}
			compare(t, f, survey(t, src, f.scale), want)
		})
	}
}

// survey measures a recording whose channels are V1 to I3, in this order, times scale.
func survey(t *testing.T, src wave.Source, scale []float64) *harmonics.Summary {
	t.Helper()
	sheet := site.Sheet{Supply: site.Supply{Connection: site.Wye4, NominalVoltage: 400, NominalFrequency: 50}}
	for c, role := range []string{"V1", "V2", "V3", "I1", "I2", "I3"} {
		ch := site.Channel{Source: strconv.Itoa(c + 1), Measures: role}
		if scale != nil {
			ch.Scale = scale[c]
		}
		sheet.Channels = append(sheet.Channels, ch)
	}
	sum, err := harmonics.Measure(context.Background(), src, sheet, harmonics.Options{Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	return sum
}

// compare holds a survey against that of the signal itself.
func compare(t *testing.T, f form, got, want *harmonics.Summary) {
	t.Helper()
	start := want.Start
	if !f.dated {
		start = time.Time{}
	}
	if !got.Start.Equal(start) || got.Samples != want.Samples || got.Windows != want.Windows || len(got.Events) > 0 || len(got.Gaps) > 0 || len(got.Threes) != len(want.Threes) {
		t.Errorf("start %v, %d samples, windows %+v, events %v, gaps %v, %d intervals; want %v, %d, %+v, none, none, %d",
			got.Start, got.Samples, got.Windows, got.Events, got.Gaps, len(got.Threes), start, want.Samples, want.Windows, len(want.Threes))
	}
	if len(got.Channels) != len(want.Channels) {
		t.Fatalf("%d channels, want %d", len(got.Channels), len(want.Channels))
	}
	a, b := figures(f, got), figures(f, want)
	for i, w := range b {
		if g := a[i]; math.IsNaN(g.value) != math.IsNaN(w.value) || math.Abs(g.value-w.value) > w.tolerance {
			t.Errorf("%s is %v, want %v within %.2g", w.name, g.value, w.value, w.tolerance)
		}
	}
}

// A figure is one number of a survey, and how far the form's step may move it.
type figure struct {
	name             string
	value, tolerance float64
}

func figures(f form, s *harmonics.Summary) []figure {
	half := func(c int) float64 {
		_, peak := span(c)
		return f.step(c)/2 + 1e-10*peak // the tracking of the frequency stops there
	}
	turn := func(c int, level float64) float64 { return math.Asin(min(1, half(c)/level)) } // rad
	// Both ends of a window of 0.2 s may turn.
	all := []figure{{"frequency", s.Frequency.Mean, 2 * turn(0, s.Channels[0].Fundamental) / (2 * math.Pi * 0.2)}}
	for c := range s.Channels {
		ch := &s.Channels[c]
		e := half(c)
		of := func(share float64) float64 { return 100 * e * (1 + share/100) / (ch.Fundamental - e) } // per cent of the fundamental
		add := func(name string, value, tolerance float64) {
			all = append(all, figure{fmt.Sprintf("%s %s", ch.Role, name), value, tolerance})
		}
		add("rms", ch.RMS, e)
		add("dc", ch.DC, e)
		add("peak", ch.Peak, e)
		add("fundamental", ch.Fundamental, e)
		add("THD", ch.THDPct, of(ch.THDPct))
		add("THD of 3 s", ch.THD3s.Max, of(ch.THDPct))
		for h := 1; h <= harmonics.MaxOrder; h++ {
			x := ch.H(h)
			order := fmt.Sprintf("order %d ", h)
			add(order+"rms", x.RMS, e)
			add(order+"share", x.Pct, of(x.Pct))
			add(order+"rms of 3 s", x.Level3s.Max, e)
			if x.RMS > 10*e { // below, the angle is that of the rounding
				add(order+"angle", x.Angle, 180/math.Pi*(turn(c, x.RMS)+float64(h)*turn(0, s.Channels[0].Fundamental)))
			}
			add(order+"to the next", ch.Inter[h], e)
		}
	}
	return append(all, powers(s, half)...)
}

// powers are the figures that two or three channels make together.
func powers(s *harmonics.Summary, half func(int) float64) []figure {
	v, i := max(half(0), half(1), half(2)), max(half(3), half(4), half(5))
	share := func(pct, e float64, last int) float64 {
		return 100 * e * (1 + pct/100) / (s.Channels[last].Fundamental - e)
	}
	var all []figure
	for n, p := range s.Power.Phases {
		volts, amperes := s.Channels[n].RMS, s.Channels[3+n].RMS
		product := volts*half(3+n) + amperes*half(n) + half(n)*half(3+n) // Cauchy and Schwarz
		name := fmt.Sprintf("phase %d ", p.Phase)
		all = append(all, figure{name + "P", p.P, product}, figure{name + "Q1", p.Q1, product}, figure{name + "S", p.S, product})
	}
	u := s.Power.Unbalance
	return append(all,
		figure{"u2", u.U2, share(u.U2, v, 2)}, figure{"u0", u.U0, share(u.U0, v, 2)},
		figure{"i2", u.I2, share(u.I2, i, 5)}, figure{"i0", u.I0, share(u.I0, i, 5)})
}
