package stat

import (
	"math"
	"slices"
)

// A Step is a change of level from one value to the next.
type Step struct {
	At     int     // index of the first value after it
	Change float64 // difference of the medians, after minus before
	P      float64 // two-sided
}

// Pettitt looks for one step at an unknown place (Pettitt, 1979). P is his approximation, good below 0.5; the date is only
// apparent. Fewer than four values give P = 1.
func Pettitt(y []float64) Step {
	n := len(y)
	best := Step{P: 1}
	if n < 4 {
		return best
	}
	largest := 0
	for t := 1; t < n; t++ {
		u := 0
		for i := range t {
			for j := t; j < n; j++ {
				u += sign(y[j] - y[i])
			}
		}
		if abs := max(u, -u); abs > largest {
			largest, best.At = abs, t
		}
	}
	if largest == 0 {
		return best
	}
	k, m := float64(largest), float64(n)
	best.P = math.Min(1, 2*math.Exp(-6*k*k/(m*m*m+m*m)))
	best.Change = Median(y[best.At:]) - Median(y[:best.At])
	return best
}

// exactRankSumUpTo is the number of values up to which the rank-sum test counts all divisions.
const exactRankSumUpTo = 24

// RankSum tests whether two groups differ in level (Wilcoxon, 1945; Mann and Whitney, 1947), two-sided: exact for small
// groups, ties included, else by the normal approximation with continuity and tie corrections. An empty group gives P = 1.
func RankSum(before, after []float64) Step {
	out := Step{At: len(before), P: 1}
	if len(before) == 0 || len(after) == 0 {
		return out
	}
	out.Change = Median(after) - Median(before)
	all := append(slices.Clone(before), after...)
	ranks := doubledRanks(all)
	sum := 0
	for _, r := range ranks[len(before):] {
		sum += r
	}
	// Twice the mean rank sum of the second group, as ranks are doubled.
	mean := len(after) * (len(all) + 1)
	if len(all) <= exactRankSumUpTo {
		out.P = exactRankSum(ranks, len(after), abs(sum-mean))
		return out
	}
	n, m := float64(len(all)), float64(len(before)*len(after))
	var ties float64
	for _, t := range tieGroups(all) {
		ties += float64(t*t*t - t)
	}
	variance := m / 12 * (n + 1 - ties/(n*(n-1)))
	if variance > 0 {
		z := (math.Abs(float64(sum-mean))/2 - 0.5) / math.Sqrt(variance)
		out.P = twoSided(math.Max(z, 0))
	}
	return out
}

func abs(i int) int { return max(i, -i) }

// doubledRanks returns twice the midrank of each value: whole numbers, ties or not.
func doubledRanks(v []float64) []int {
	out := make([]int, len(v))
	for i := range v {
		r := 1
		for j := range v {
			switch {
			case v[j] < v[i]:
				r += 2
			case v[j] == v[i] && j != i:
				r++
			}
		}
		out[i] = r + 1
	}
	return out
}

// exactRankSum returns the share of all choices of k ranks whose sum is at least off away from its mean.
func exactRankSum(ranks []int, k, off int) float64 {
	total := 0
	for _, r := range ranks {
		total += r
	}
	ways := make([][]float64, k+1) // [chosen][sum]
	for i := range ways {
		ways[i] = make([]float64, total+1)
	}
	ways[0][0] = 1
	for _, r := range ranks {
		for c := k; c >= 1; c-- {
			for s := total; s >= r; s-- {
				ways[c][s] += ways[c-1][s-r]
			}
		}
	}
	mean := k * (len(ranks) + 1)
	var hit, all float64
	for s, w := range ways[k] {
		all += w
		if abs(s-mean) >= off {
			hit += w
		}
	}
	return hit / all
}

// FalseDiscovery returns p-values adjusted for their number after Benjamini and Hochberg (1995): calling those of q or
// less changes makes at most a share q of such calls wrong on average. NaN stays NaN and is not counted.
func FalseDiscovery(p []float64) []float64 {
	var order []int
	for i, v := range p {
		if !math.IsNaN(v) {
			order = append(order, i)
		}
	}
	slices.SortStableFunc(order, func(a, b int) int { return sign(p[a] - p[b]) })
	out := slices.Clone(p)
	least := 1.0
	for k := len(order) - 1; k >= 0; k-- {
		least = math.Min(least, p[order[k]]*float64(len(order))/float64(k+1))
		out[order[k]] = least
	}
	return out
}
