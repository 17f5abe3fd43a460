package stat

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s: %.6g, want %.6g", what, got, want)
	}
}

// Smallest |S| with a two-sided P of 5 % or less, exact (practice.md 3.3, recomputed from Kendall's distribution; the same
// numbers stand in nonparametric textbooks' tables, from memory).
func TestSmallestSignificantS(t *testing.T) {
	want := map[int]int{5: 10, 6: 13, 7: 15, 8: 18, 9: 20, 10: 23, 11: 27, 12: 30, 13: 34, 14: 37}
	for n, s := range want {
		if got := SmallestS(n, 0.05); got != s {
			t.Errorf("n = %d: %d, want %d", n, got, s)
		}
	}
	if SmallestS(4, 0.05) != 0 || SmallestS(4, 0.10) != 6 {
		t.Error("four values can reach 10 % (S = 6) and not 5 %")
	}
}

// Vectors of practice.md 6.C, recomputed there.
func TestVectors(t *testing.T) {
	rising := []float64{2.1, 2.3, 2.2, 2.6, 2.5, 2.9, 3.0, 2.8, 3.3, 3.2, 3.5, 3.6}
	k := MannKendall(rising)
	if k.S != 56 {
		t.Errorf("S = %d, want 56", k.S)
	}
	near(t, "variance", k.Var, 212.667, 0.001)
	near(t, "z", k.Z, 3.7715, 1e-4)
	near(t, "p, normal", twoSided(k.Z), 1.623e-4, 1e-7)
	months := make([]float64, 12)
	for i := range months {
		months[i] = float64(i)
	}
	s := TheilSen(months, rising, 0.05)
	near(t, "slope", s.PerT, 0.13818, 1e-5)
	near(t, "intercept", s.Intercept, 2.1091, 1e-4)
	if !(s.Low > 0.1 && s.Low < s.PerT && s.High > s.PerT && s.High < 0.18) {
		t.Errorf("interval %g to %g", s.Low, s.High)
	}
	flat := MannKendall([]float64{3.1, 2.9, 3.0, 3.2, 2.8, 3.1, 3.0, 2.9, 3.2, 3.0, 3.1, 2.9})
	if flat.S != -2 {
		t.Errorf("S = %d, want -2", flat.S)
	}
	near(t, "variance with ties", flat.Var, 200.667, 0.001)
	near(t, "z", flat.Z, -0.0706, 1e-4)
}

// Z and P of the seasonal Kendall examples of USGS Scientific Investigations Report 2005-5275 (program output for three
// sites; S and Var implied, practice.md A13): the step from S to P.
func TestNormalScoresOfPublishedExamples(t *testing.T) {
	for _, c := range []struct {
		s         int
		v, z, p   float64
		tolerance float64
	}{{-12, 354.8, -0.584, 0.5592, 5e-4}, {-42, 514.2, -1.808, 0.0705, 2e-4}, {-189, 2107, -4.096, 0, 5e-5}} {
		z := zScore(c.s, c.v)
		near(t, "z", z, c.z, 5e-4)
		near(t, "p", twoSided(z), c.p, c.tolerance)
	}
}

// The exact distribution equals a count of all orders, ties included.
func TestExactEqualsCounting(t *testing.T) {
	for _, y := range [][]float64{{1, 2, 3, 4, 5}, {1, 1, 2, 3, 3, 3}, {2, 2, 2}, {1, 2, 2, 3, 4, 4, 5}} {
		counts := map[int]int{}
		all := 0
		permute(slices.Clone(y), 0, func(p []float64) {
			counts[score(p)]++
			all++
		})
		for s := range counts {
			hit := 0
			for other, c := range counts {
				if abs(other) >= abs(s) {
					hit += c
				}
			}
			near(t, "P by counting", exactTwoSided(tieGroups(y), s), float64(hit)/float64(all), 1e-12)
		}
	}
}

func permute(p []float64, k int, f func([]float64)) {
	if k == len(p) {
		f(p)
		return
	}
	for i := k; i < len(p); i++ {
		p[k], p[i] = p[i], p[k]
		permute(p, k+1, f)
		p[k], p[i] = p[i], p[k]
	}
}

// On trend-free noise the false-alarm rate at 5 % is 5 % or just below (the exact distribution is in steps), within
// sampling error.
func TestFalseAlarmRate(t *testing.T) {
	r := rand.New(rand.NewPCG(1, 2))
	for _, n := range []int{8, 12, 24, 36} {
		const trials = 4000
		hits, steps := 0, 0
		for range trials {
			y := make([]float64, n)
			for i := range y {
				y[i] = r.NormFloat64()
			}
			if MannKendall(y).P <= 0.05 {
				hits++
			}
			if RankSum(y[:n/2], y[n/2:]).P <= 0.05 {
				steps++
			}
		}
		error3 := 3 * math.Sqrt(0.05*0.95/trials)
		for what, got := range map[string]float64{"trend": float64(hits) / trials, "step": float64(steps) / trials} {
			if got > 0.05+error3 || got < 0.025 {
				t.Errorf("n = %d: %s found in %.4f of noise, want 0.05 or just below", n, what, got)
			}
		}
	}
}

// On a known slope the interval covers it at its stated rate, or a little more.
func TestSlopeIntervalCovers(t *testing.T) {
	r := rand.New(rand.NewPCG(3, 4))
	for _, n := range []int{8, 13, 24} {
		const trials = 3000
		covered := 0
		at := make([]float64, n)
		for i := range at {
			at[i] = float64(i)
		}
		for range trials {
			y := make([]float64, n)
			for i := range y {
				y[i] = 0.3*at[i] + r.NormFloat64()
			}
			if s := TheilSen(at, y, 0.05); s.Low <= 0.3 && 0.3 <= s.High {
				covered++
			}
		}
		if share := float64(covered) / trials; share < 0.95-3*math.Sqrt(0.05*0.95/trials) || share > 0.99 {
			t.Errorf("n = %d: covers in %.4f, want 0.95 or a little more", n, share)
		}
	}
}

// A season of twice the noise does not hide a slope from the seasonal test, and is none to it.
func TestSeasonalKendall(t *testing.T) {
	r := rand.New(rand.NewPCG(5, 6))
	const trials = 2000
	falseAlarms, found := 0, 0
	for range trials {
		var season []int
		var flat, rising []float64
		for i := range 48 {
			season = append(season, i%12)
			v := 3*math.Sin(2*math.Pi*float64(i)/12) + r.NormFloat64()
			flat, rising = append(flat, v), append(rising, v+0.05*float64(i))
		}
		if SeasonalKendall(season, flat).P <= 0.05 {
			falseAlarms++
		}
		if SeasonalKendall(season, rising).P <= 0.05 {
			found++
		}
	}
	if share := float64(falseAlarms) / trials; share > 0.05+3*math.Sqrt(0.05*0.95/trials) {
		t.Errorf("a season alone is called a trend in %.4f", share)
	}
	if share := float64(found) / trials; share < 0.9 {
		t.Errorf("a slope under a season is found in %.3f only", share)
	}
}

// Exact rank-sum tables (Wilcoxon, from memory): groups of 4 and 4 that do not overlap have a two-sided P of 2/70, of 5
// and 5 of 2/252.
func TestRankSumTables(t *testing.T) {
	near(t, "4 and 4", RankSum([]float64{1, 2, 3, 4}, []float64{5, 6, 7, 8}).P, 2.0/70, 1e-12)
	near(t, "5 and 5", RankSum([]float64{1, 2, 3, 4, 5}, []float64{6, 7, 8, 9, 10}).P, 2.0/252, 1e-12)
	near(t, "all the same", RankSum([]float64{1, 1}, []float64{1, 1}).P, 1, 1e-12)
	if s := RankSum([]float64{1, 2, 3}, []float64{11, 12, 13}); s.Change != 10 || s.At != 3 {
		t.Errorf("step %+v, want 10 at 3", s)
	}
}

func TestPettittFindsTheStep(t *testing.T) {
	r := rand.New(rand.NewPCG(7, 8))
	y := make([]float64, 24)
	for i := range y {
		y[i] = 0.3 * r.NormFloat64()
		if i >= 15 {
			y[i] += 2
		}
	}
	if s := Pettitt(y); s.At != 15 || s.P > 0.01 || math.Abs(s.Change-2) > 0.4 {
		t.Errorf("%+v, want a step of 2 at 15", s)
	}
	if s := Pettitt([]float64{1, 1, 1, 1, 1}); s.P != 1 {
		t.Errorf("equal values: %+v", s)
	}
}

// The worked example of Benjamini and Hochberg (1995), table 1 (fifteen p-values, from memory): at q = 0.05 the first four
// are rejected, where correcting for all at once rejects three.
func TestFalseDiscoveryExample(t *testing.T) {
	p := []float64{0.0001, 0.0004, 0.0019, 0.0095, 0.0201, 0.0278, 0.0298, 0.0344, 0.0459, 0.3240, 0.4262, 0.5719, 0.6528, 0.7590, 1.0000}
	rejected := 0
	for _, q := range FalseDiscovery(p) {
		if q <= 0.05 {
			rejected++
		}
	}
	if rejected != 4 {
		t.Errorf("%d rejected, want 4", rejected)
	}
	if got := FalseDiscovery([]float64{math.NaN(), 0.01}); !math.IsNaN(got[0]) || got[1] != 0.01 {
		t.Errorf("NaN is counted: %v", got)
	}
}

func TestTooFewValues(t *testing.T) {
	if k := MannKendall(nil); k.P != 1 {
		t.Error("no values give a trend")
	}
	if s := TheilSen([]float64{1}, []float64{2}, 0.05); !math.IsNaN(s.PerT) {
		t.Error("one value has a slope")
	}
	if s := TheilSen([]float64{0, 1, 2, 3}, []float64{1, 2, 3, 5}, 0.05); !math.IsNaN(s.Low) || s.PerT <= 0 {
		t.Errorf("four values bound the slope: %+v", s)
	}
	if RankSum(nil, []float64{1}).P != 1 || Pettitt([]float64{1, 2}).P != 1 {
		t.Error("too few values make a step")
	}
}
