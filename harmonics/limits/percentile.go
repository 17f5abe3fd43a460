package limits

import (
	"math"
	"slices"
	"sort"
)

// A ranked holds values in ascending order.
type ranked []float64

// rank sorts the values that are known.
func rank(values []float64) ranked {
	r := make(ranked, 0, len(values))
	for _, v := range values {
		if !math.IsNaN(v) {
			r = append(r, v)
		}
	}
	slices.Sort(r)
	return r
}

// at returns the value of a rank from 1, NaN for a rank that there is none of.
func (r ranked) at(rank int) float64 {
	if rank < 1 || rank > len(r) {
		return math.NaN()
	}
	return r[rank-1]
}

// above counts the values above a limit.
func (r ranked) above(limit float64) int {
	return len(r) - sort.Search(len(r), func(i int) bool { return r[i] > limit })
}
