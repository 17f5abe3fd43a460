package harmonics

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

// The worked event of standards.md 5.7 (own example on the rules of IEC 61000-4-30): Udin 230 V, dip threshold 207 V,
// hysteresis 4.6 V, a value each 10 ms. It starts at the third value and ends at the eighth: 50 ms, residual 150 V.
func TestWorkedDip(t *testing.T) {
	e := newEvents([]channel{{role: "V1", nominal: 230}})
	for i, u := range []float64{230, 229, 205, 150, 150, 206, 209, 212, 230} {
		e.step([]float64{u / 230}, 0.01*float64(i+1))
	}
	if len(e.done) != 1 {
		t.Fatalf("%d events, want 1", len(e.done))
	}
	got := e.done[0]
	if got.Kind != Dip || math.Abs(got.At-0.03) > 1e-9 || math.Abs(got.Length-0.05) > 1e-9 || math.Abs(got.Extreme-150) > 1e-9 {
		t.Errorf("%+v, want a dip at 0.03 s of 0.05 s down to 150 V", got)
	}
}

// A polyphase interruption needs all channels down; one phase lost is a dip.
func TestInterruptionNeedsAllPhases(t *testing.T) {
	roles := []channel{{role: "V1", nominal: 230}, {role: "V2", nominal: 230}}
	e := newEvents(roles)
	e.step([]float64{1, 1}, 0.01)
	if f := e.step([]float64{0.01, 1}, 0.02); f != Dip {
		t.Errorf("one phase down: %v", f.Strings())
	}
	if f := e.step([]float64{0.01, 0.02}, 0.03); f != Dip|Interruption {
		t.Errorf("both phases down: %v", f.Strings())
	}
	if f := e.step([]float64{1, 0.02}, 0.04); f != Dip {
		t.Errorf("one phase back: %v", f.Strings())
	}
	if f := e.step([]float64{1, 1}, 0.05); f != 0 {
		t.Errorf("both back: %v", f.Strings())
	}
}

// Nearest-rank: of 1008 values, rank 958 is the 95th percentile and 50 may be over; of 144, rank 137; of 28 800, the 99th
// is rank 28 512 and 288 are over (practice.md 1.5 and 6.C, recomputed).
func TestNearestRank(t *testing.T) {
	for _, c := range []struct {
		n    int
		p    float64
		want int
	}{{1008, 95, 958}, {144, 95, 137}, {1008, 99, 998}, {28800, 99, 28512}, {1, 95, 1}, {20, 95, 19}, {21, 95, 20}, {100, 99, 99}, {101, 99, 100}, {1000000, 95, 950000}} {
		if got := NearestRank(c.n, c.p); got != c.want {
			t.Errorf("rank of the %gth percentile of %d values: %d, want %d", c.p, c.n, got, c.want)
		}
	}
}

// Up to an hour of 3 s values percentiles are exact; beyond they are at most 0.1 % high and never low.
func TestSamplePercentiles(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 1))
	for _, n := range []int{1, 7, keep, keep + 1, 30000} {
		var s sample
		values := make([]float64, n)
		for i := range values {
			values[i] = math.Exp(r.NormFloat64()) * 3
			if i%50 == 49 {
				values[i] = 0
			}
			s.add(values[i], float64(i))
		}
		s.add(math.NaN(), 0)
		got := s.stats()
		at := slices.Index(values, slices.Max(values))
		slices.Sort(values)
		for _, c := range []struct{ p, got float64 }{{50, got.P50}, {95, got.P95}, {99, got.P99}} {
			want := values[NearestRank(n, c.p)-1]
			high := 1.0
			if n > keep {
				high = 1.0011
			}
			if c.got < want || c.got > want*high {
				t.Errorf("%d values: %gth percentile %g, want %g", n, c.p, c.got, want)
			}
		}
		if got.N != n || got.Max != values[n-1] || got.MaxAt != float64(at) {
			t.Errorf("%d values: n %d, max %g at %g", n, got.N, got.Max, got.MaxAt)
		}
	}
}

func TestSampleMemoryIsBounded(t *testing.T) {
	var s sample
	r := rand.New(rand.NewPCG(2, 2))
	for range 400000 {
		s.add(math.Exp(3*r.Float64()), 0)
	}
	if s.exact != nil || len(s.classes) > 3100 {
		t.Errorf("400 000 values over a factor of e³ take %d classes, want about 3000", len(s.classes))
	}
}

// The distribution-free bounds cover the true percentile at least 95 % of the time, on any distribution; here a skewed one.
func TestPercentileBoundsCover(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 3))
	truth := -math.Log(0.05) // of the exponential distribution
	const trials = 2000
	covered := 0
	for range trials {
		at := make([]float64, 300)
		v := make([]float64, 300)
		for i := range v {
			v[i] = r.ExpFloat64()
		}
		if s := statsOf(v, at); s.P95Low <= truth && truth <= s.P95High {
			covered++
		}
	}
	// 95 % nominal, three standard errors of 2000 trials below it.
	if share := float64(covered) / trials; share < 0.95-3*math.Sqrt(0.05*0.95/trials) {
		t.Errorf("the bounds cover in %.3f of the trials", share)
	}
	if low, high := PercentileRanks(20, 95); high <= 20 || low < 1 {
		t.Errorf("20 values bound the 95th percentile from above at rank %d", high)
	}
	// Ranks of a textbook table cannot be cited here; for n = 1008 the normal approximation gives 957.6 ± 13.6.
	if low, high := PercentileRanks(1008, 95); low < 943 || low > 946 || high < 970 || high > 973 {
		t.Errorf("1008 values: ranks %d to %d, want about 944 to 971", low, high)
	}
}

func TestHighestKeepsExactPercentiles(t *testing.T) {
	r := rand.New(rand.NewPCG(4, 4))
	top := highest{k: dayKept}
	var values []float64
	for range threesADay {
		v := r.Float64()
		values = append(values, v)
		top.add(v)
	}
	slices.Sort(values)
	if got, want := top.percentile(99), values[28512-1]; got != want {
		t.Errorf("99th percentile of a day %v, want %v", got, want)
	}
}

// IEC 61000-4-7 groups at 50 Hz, line rms 1.0 at the harmonic, 0.1 at -5 Hz, 0.2 at +5 Hz, 0.3 at -25 Hz, 0.4 at +25 Hz:
// subgroup 1.024695 (standards.md 5.2).
func TestWorkedSubgroup(t *testing.T) {
	f := frame{cycles: 10, perCycle: 128, top: 6, lines: 71}
	c := make([]complex128, f.lines)
	c[50], c[49], c[51], c[45], c[55] = 1i, 0.1, -0.2, 0.3, 0.4i
	var w windowChannel
	w.sum(c, f, false)
	if got := math.Sqrt(w.group[5]); math.Abs(got-1.024695) > 1e-6 {
		t.Errorf("subgroup %.6f, want 1.024695", got)
	}
	if got := [2]float64{math.Sqrt(w.inter[4]), math.Sqrt(w.inter[5])}; math.Abs(got[0]-0.3) > 1e-12 || math.Abs(got[1]-0.4) > 1e-12 {
		t.Errorf("centred interharmonic subgroups %v, want 0.3 and 0.4", got)
	}
	if !math.IsNaN(w.group[7]) {
		t.Error("an order above the top one is not NaN")
	}
	// At 60 Hz there are twelve lines an order: harmonic subgroups of 3 and centred subgroups of 9 share all lines.
	g := frame{cycles: 12, perCycle: 128, top: 4, lines: 61}
	all := make([]complex128, g.lines)
	for i := range all {
		all[i] = 1
	}
	w.sum(all, g, false)
	if w.group[3] != 3 || w.inter[3] != 9 {
		t.Errorf("60 Hz: %g lines in a subgroup and %g in a centred one, want 3 and 9", w.group[3], w.inter[3])
	}
}
