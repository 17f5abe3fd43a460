package trend

import (
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
	"strings"
	"testing"
	"time"

	"wavetally/report"
)

// A course says how a quantity runs over the months: level i of month i, with noise on top.
type course func(i int) float64

// site makes monthly facts of one week each: order 5 of I1 and V1 follow the course, in A and V, against a limit of 10.
func siteFacts(months int, noise float64, seed uint64, orders map[int]course) []*Facts {
	r := rand.New(rand.NewPCG(seed, 1))
	var out []*Facts
	for i := range months {
		f := &Facts{Site: "a site", Start: time.Date(2024, time.Month(1+i), 5, 0, 0, 0, 0, time.UTC), Duration: 7 * 86400, Zone: "UTC",
			Files: []string{fmt.Sprint(i)}, Config: Config{NominalV: 400}, Coverage: report.Coverage{Intervals: 1008, Valid: 1008, Weekday: 720}}
		c := ChannelFacts{Name: "I1", Quantity: "current", Unit: "A", RMS: 100, K: 2}
		c.Rows = append(c.Rows, row(1, 100, math.NaN()))
		bin := report.LoadBin{Low: 64, High: 128, N: 500, Medians: make([]report.Number, 50)}
		for _, h := range []int{3, 5, 7, 11} {
			if level, ok := orders[h]; ok {
				v := level(i) + noise*r.NormFloat64()
				c.Rows = append(c.Rows, row(h, v, 10))
				bin.Medians[h-1] = report.Number(v)
			}
		}
		c.LoadBins = []report.LoadBin{bin}
		f.Channels = []ChannelFacts{c}
		out = append(out, f)
	}
	return out
}

func row(order int, p95, limit float64) Row {
	n := report.Number(p95)
	return Row{Quantity: "harmonic", Order: order, Unit: "A", RuleSet: "some-rules", Limit: report.Number(limit),
		Stats: &report.LevelStats{Interval: 600, N: 1008, P50: 0.8 * n, P95: n, P99: 1.1 * n, Max: 1.2 * n}}
}

func build(t testing.TB, facts []*Facts, events ...Event) *Report {
	t.Helper()
	r, err := Build(facts, events, Options{MadeAt: time.Date(2026, 12, 1, 0, 0, 0, 0, time.UTC)})
	if err != nil {
		t.Fatal(err)
	}
	return r
}

func series(t testing.TB, r *Report, order int) *Series {
	t.Helper()
	for i := range r.Series {
		if s := &r.Series[i]; s.Quantity == "harmonic" && s.Order == order {
			return s
		}
	}
	t.Fatalf("no series of order %d", order)
	return nil
}

func flat(level float64) course { return func(int) float64 { return level } }

func TestRiseIsShownAndDated(t *testing.T) {
	r := build(t, siteFacts(20, 0.1, 1, map[int]course{3: flat(3), 5: func(i int) float64 { return 4 + 0.2*float64(i) }, 7: flat(2)}))
	s := series(t, r, 5)
	if s.Answer != "rising" || s.Step != nil || !s.Material {
		t.Errorf("answer %q, step %v, material %v", s.Answer, s.Step, s.Material)
	}
	if got := float64(s.Sen.Slope); math.Abs(got-2.4) > 0.25 || !(s.Sen.Low < 2.4 && 2.4 < s.Sen.High) {
		t.Errorf("slope %g A a year, %g to %g; put in 2.4", got, s.Sen.Low, s.Sen.High)
	}
	// At 4 + 0.2·19 = 7.8 A in August 2025, the limit of 10 A is 11 months off: July 2026.
	if s.Reaches == nil || !(s.Reaches.Earliest <= "2026-07" && s.Reaches.Latest >= "2026-07") || s.Reaches.Earliest < "2026-04" {
		t.Errorf("reaches its limit %+v (%s), want a range around 2026-07", s.Reaches, s.NoDate)
	}
	if s.SameLoad == nil || s.SameLoad.Answer != "rising" {
		t.Errorf("at equal load: %+v", s.SameLoad)
	}
	for _, h := range []int{3, 7} {
		if f := series(t, r, h); f.Answer != "no change shown" || f.Reaches != nil || f.NoDate != "no rise is shown" {
			t.Errorf("flat order %d: %q, %+v, %q", h, f.Answer, f.Reaches, f.NoDate)
		}
	}
	if text := r.Answers[3].Text; !strings.Contains(text, "order 5 on I1 reaches 10 A between") {
		t.Errorf("how long: %q", text)
	}
	if text := r.Answers[1].Text; !strings.Contains(text, "Rising: order 5 on I1") {
		t.Errorf("is it worse: %q", text)
	}
}

// A step is a step, not a trend: dated by an event, or apparent without one.
func TestStepIsNoTrend(t *testing.T) {
	facts := siteFacts(20, 0.1, 2, map[int]course{5: func(i int) float64 { return 8 - 4*float64(i/10) }, 7: flat(2)})
	event := Event{Date: "2024-11-01", Text: "filter put into service"}
	s := series(t, build(t, facts, event), 5)
	if s.Step == nil || !s.Step.Dated || s.Step.Month != "2024-11" || math.Abs(float64(s.Step.Change)+4) > 0.2 || !s.Step.Shown || s.Answer != "no change shown" {
		t.Errorf("with its event: %+v, answer %q", s.Step, s.Answer)
	}
	r := build(t, facts, event)
	if text := r.Answers[2].Text; !strings.Contains(text, "filter put into service (2024-11-01): order 5 on I1 went from 7.98 A to 3.96 A") {
		t.Errorf("did it work: %q", text)
	}
	s = series(t, build(t, facts), 5)
	if s.Step == nil || s.Step.Dated || s.Step.Month != "2024-11" || s.Answer != "no change shown" {
		t.Errorf("without an event: %+v, answer %q", s.Step, s.Answer)
	}
	// An event in the middle of a month leaves that month on neither side.
	s = series(t, build(t, facts, Event{Date: "2024-10-17", Text: "filter"}), 5)
	if s.Step == nil || s.Step.Month != "2024-11" {
		t.Errorf("event inside October: %+v", s.Step)
	}
}

// A steady rise divides well in the middle too, and is no step.
func TestRiseIsNoStep(t *testing.T) {
	for seed := range uint64(20) {
		s := series(t, build(t, siteFacts(16, 0.15, seed+10, map[int]course{5: func(i int) float64 { return 2 + 0.3*float64(i) }})), 5)
		if s.Step != nil || s.Answer != "rising" {
			t.Errorf("seed %d: step %+v, answer %q", seed, s.Step, s.Answer)
		}
	}
}

// A season is no trend from two years on.
func TestSeasonIsNoTrend(t *testing.T) {
	s := series(t, build(t, siteFacts(30, 0.1, 3, map[int]course{5: func(i int) float64 { return 5 + 3*math.Sin(2*math.Pi*float64(i)/12) }})), 5)
	if !s.Seasonal || s.Answer != "no change shown" {
		t.Errorf("seasonal %v, answer %q", s.Seasonal, s.Answer)
	}
	s = series(t, build(t, siteFacts(36, 0.1, 3, map[int]course{5: func(i int) float64 { return 3 + 0.08*float64(i) + 3*math.Sin(2*math.Pi*float64(i)/12) }})), 5)
	if s.Answer != "rising" || !(s.Sen.Low < 0.96 && 0.96 < s.Sen.High) {
		t.Errorf("a rise under a season: %q, slope %v to %v a year, put in 0.96", s.Answer, s.Sen.Low, s.Sen.High)
	}
}

// Months with too little are shown hollow, never dropped, and not tested.
func TestHollowMonths(t *testing.T) {
	facts := siteFacts(12, 0.05, 4, map[int]course{5: flat(5)})
	facts[6].Coverage = report.Coverage{Intervals: 144, Valid: 144}
	facts[6].Channels[0].Rows[1] = row(5, 50, 10)
	r := build(t, facts)
	s := series(t, r, 5)
	if len(s.Months) != 12 || !s.Months[6].Hollow || !r.Months[6].Hollow || s.Answer != "no change shown" {
		t.Errorf("%d months, hollow %v, answer %q", len(s.Months), s.Months[6].Hollow, s.Answer)
	}
	if math.Abs(float64(s.Sen.Slope)) > 0.3 {
		t.Errorf("the hollow month takes part: slope %v", s.Sen.Slope)
	}
	few := series(t, build(t, facts[:4]), 5)
	if few.Answer != "too few months" || few.Kendall != nil || few.NoDate == "" {
		t.Errorf("four months: %q, %v", few.Answer, few.Kendall)
	}
}

// A changed configuration starts a new series.
func TestConfigurationBreaks(t *testing.T) {
	facts := siteFacts(12, 0.05, 5, map[int]course{5: flat(5)})
	for _, f := range facts[6:] {
		f.Config.DemandA = 250
	}
	r := build(t, facts)
	if len(r.Breaks) != 1 || r.Breaks[0].Month != "2024-07" || r.Breaks[0].What != "the demand current" {
		t.Errorf("breaks %+v", r.Breaks)
	}
	n := 0
	for _, s := range r.Series {
		if s.Order == 5 {
			n++
			if len(s.Months) != 6 {
				t.Errorf("a series of %d months", len(s.Months))
			}
		}
	}
	if n != 2 {
		t.Errorf("%d series of order 5, want 2", n)
	}
}

// On trend-free noise in many series at once, hardly a report calls anything rising or falling: the false-discovery rule
// holds over the family.
func TestFamilyOfNoise(t *testing.T) {
	calls, reports := 0, 200
	for seed := range uint64(reports) {
		r := build(t, siteFacts(14, 1, 1000+seed, map[int]course{3: flat(5), 5: flat(5), 7: flat(5), 11: flat(5)}))
		for _, s := range r.Series {
			if s.Answer == "rising" || s.Answer == "falling" {
				calls++
				break
			}
		}
	}
	// With every null true, the share of reports with any call is at most 5 %, three standard errors allowed.
	if share := float64(calls) / float64(reports); share > 0.05+3*math.Sqrt(0.05*0.95/float64(reports)) {
		t.Errorf("%.3f of trend-free reports call a trend", share)
	}
}

// At equal load, a harmonic that only follows the load does not rise.
func TestEqualLoad(t *testing.T) {
	facts := siteFacts(14, 0.02, 6, map[int]course{5: func(i int) float64 { return 4 + 0.2*float64(i) }})
	r := rand.New(rand.NewPCG(9, 9))
	for _, f := range facts {
		f.Channels[0].LoadBins[0].Medians[4] = report.Number(4 + 0.02*r.NormFloat64())
	}
	s := series(t, build(t, facts), 5)
	if s.Answer != "rising" || s.SameLoad == nil || s.SameLoad.Answer != "no change shown" {
		t.Errorf("answer %q, at equal load %+v", s.Answer, s.SameLoad)
	}
}

func TestSeveralSurveysOfAMonth(t *testing.T) {
	a := siteFacts(1, 0, 1, map[int]course{5: flat(4)})
	b := siteFacts(1, 0, 1, map[int]course{5: flat(8)})
	b[0].Start = b[0].Start.AddDate(0, 0, 14)
	m := series(t, build(t, append(a, b...)), 5).Months
	if len(m) != 1 || m[0].Merged != 2 || m[0].N != 2016 || math.Abs(float64(m[0].P95)-6) > 1e-9 || math.Abs(float64(m[0].Max)-9.6) > 1e-9 {
		t.Errorf("merged: %+v", m)
	}
}

// The same surveys in any order give the same report.
func TestOrderDoesNotMatter(t *testing.T) {
	facts := siteFacts(12, 0.3, 7, map[int]course{3: flat(2), 5: flat(5), 7: flat(3)})
	turned := make([]*Facts, len(facts))
	for i, f := range facts {
		turned[len(facts)-1-i] = f
	}
	a, b := build(t, facts), build(t, turned)
	var x, y strings.Builder
	if WriteJSON(&x, a) != nil || WriteJSON(&y, b) != nil || x.String() != y.String() {
		t.Error("the order of the surveys changes the report")
	}
	if !reflect.DeepEqual(a.Months, b.Months) {
		t.Error("months differ")
	}
}

func TestNothingToCompare(t *testing.T) {
	if _, err := Build(nil, nil, Options{}); err == nil || !strings.Contains(err.Error(), "wavetally logbook add") {
		t.Errorf("no surveys: %v", err)
	}
}
