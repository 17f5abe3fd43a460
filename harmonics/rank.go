package harmonics

import (
	"math"
	"sort"

	"gonum.org/v1/gonum/stat/distuv"
)

// NearestRank returns the rank, from 1 the smallest, of the p-th percentile (per cent) among n values: the smallest rank
// that at least p per cent of the values do not exceed. Of 1008 values, a week of 10 min, the 95th percentile is the
// 958th, and 50 may lie above it. It returns 0 for n = 0.
func NearestRank(n int, p float64) int {
	// 99.9 % of 1000 is 999 and a bit in binary: a product that is whole but for rounding must not be rounded up.
	r := int(math.Ceil(p*float64(n)/100 - 1e-9))
	return min(max(r, min(n, 1)), n)
}

// PercentileRanks returns the ranks between which the p-th percentile of the process behind n values lies with at least
// 95 % confidence, whatever its distribution (H. A. David and H. N. Nagaraja, Order Statistics, 3rd edition, section
// 7.1): the number of values at or below the percentile is binomial with n and p. Rank 0 or n+1 says that n values are
// too few for a bound on that side.
//
// It takes the values as independent. Neighbouring intervals of one load are not, so the true bounds are wider: these
// are the least that sampling leaves open.
func PercentileRanks(n int, p float64) (low, high int) {
	if p >= 100 || n == 0 {
		return 0, n + 1
	}
	const tail = 0.025
	count := distuv.Binomial{N: float64(n), P: p / 100}
	// The largest low with P(count < low) <= tail, and the smallest high with P(count < high) >= 1 - tail.
	low = sort.Search(n+1, func(k int) bool { return count.CDF(float64(k)) > tail })
	high = sort.Search(n, func(k int) bool { return count.CDF(float64(k)) >= 1-tail }) + 1
	return low, high
}
