package limits

import (
	"math"
	"math/rand/v2"
	"slices"
	"testing"

	"wavetally/harmonics"
)

// A week of 10 min values and a day of 3 s values: IEEE 519 and EN 50160 let 5 % and 1 % of them lie above; ranks by
// the definition of the nearest-rank percentile (common practice; the documents fix no rule).
func TestNearestRank(t *testing.T) {
	for _, c := range []struct {
		n    int
		p    float64
		want int
	}{
		{1008, 95, 958}, // 50 may lie above
		{1008, 99, 998}, // 10 may lie above
		{144, 95, 137},  // 7 may lie above
		{28800, 99, 28512},
		{28800, 95, 27360},
		{20, 95, 19}, // a whole product is its own rank
		{100, 95, 95},
		{1000, 99.9, 999}, // 99.9 has no exact binary form
		{1, 95, 1}, {2, 50, 1}, {3, 50, 2}, {7, 100, 7}, {0, 95, 0}, {5, 0.001, 1},
	} {
		if got := harmonics.NearestRank(c.n, c.p); got != c.want {
			t.Errorf("harmonics.NearestRank(%d, %v) = %d, want %d", c.n, c.p, got, c.want)
		}
	}
}

// The slow definition: the smallest rank that at least p per cent of the values do not exceed, in whole numbers.
func TestNearestRankIsItsDefinition(t *testing.T) {
	for n := 1; n <= 1200; n++ {
		for _, p := range []int{1, 5, 50, 90, 95, 99, 100} {
			want := 1
			for want*100 < p*n {
				want++
			}
			if got := harmonics.NearestRank(n, float64(p)); got != want {
				t.Fatalf("harmonics.NearestRank(%d, %d) = %d, want %d", n, p, got, want)
			}
		}
	}
}

// Ranks of the 95 % confidence interval of a median, as tabulated in textbooks of nonparametric statistics (from memory:
// n = 6: 1 and 6; 10: 2 and 9; 20: 6 and 15; 50: 18 and 33), and a 95th percentile whose upper side needs more values.
func TestConfidenceRanks(t *testing.T) {
	for _, c := range []struct {
		n         int
		p         float64
		low, high int
	}{
		{6, 50, 1, 6}, {10, 50, 2, 9}, {20, 50, 6, 15}, {50, 50, 18, 33},
		{5, 50, 0, 6},    // five values give no 95 % interval of the median
		{36, 95, 31, 37}, // (0.95)^36 = 0.158: no upper bound
		{8, 100, 0, 9}, {0, 95, 0, 1},
	} {
		if low, high := harmonics.PercentileRanks(c.n, c.p); low != c.low || high != c.high {
			t.Errorf("harmonics.PercentileRanks(%d, %v) = %d, %d; want %d, %d", c.n, c.p, low, high, c.low, c.high)
		}
	}
}

// By simulation: of independent values of a known distribution, the bounds hold the true percentile at least 95 % of the
// time, and not much more.
func TestConfidenceRanksCover(t *testing.T) {
	const runs, n, p = 4000, 1008, 95
	low, high := harmonics.PercentileRanks(n, p)
	random := rand.New(rand.NewPCG(1, 2))
	held := 0
	for range runs {
		values := make([]float64, n)
		for i := range values {
			values[i] = random.ExpFloat64()
		}
		slices.Sort(values)
		truth := -math.Log(1 - p/100.0)
		if values[low-1] <= truth && truth <= values[high-1] {
			held++
		}
	}
	// Of 4000 runs at 95 %, the standard deviation of the share is 0.34 points.
	if share := 100 * float64(held) / runs; share < 94 || share > 97.5 {
		t.Errorf("the bounds held the percentile in %.2f %% of the runs", share)
	}
}

func TestRanked(t *testing.T) {
	r := rank([]float64{3, math.NaN(), 1, 2, 2})
	if !slices.Equal(r, ranked{1, 2, 2, 3}) {
		t.Errorf("rank gives %v", r)
	}
	if r.above(2) != 1 || r.above(1.5) != 3 || r.above(3) != 0 || !math.IsNaN(r.at(0)) || !math.IsNaN(r.at(5)) || r.at(4) != 3 {
		t.Error("counts above a limit, or ranks, are wrong")
	}
}
