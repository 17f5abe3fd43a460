// Package stat holds the trend statistics of monthly values: is there a change, how large, since when. No input, no output.
//
// Sources: H. B. Mann, Econometrica 13 (1945); M. G. Kendall, Rank Correlation Methods (1975); P. K. Sen, J. Am. Stat.
// Assoc. 63 (1968); A. N. Pettitt, Appl. Stat. 28 (1979); R. M. Hirsch, J. R. Slack and R. A. Smith, Water Resour. Res. 18
// (1982); Y. Benjamini and Y. Hochberg, J. R. Stat. Soc. B 57 (1995).
package stat

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

// Kendall is the outcome of a Mann–Kendall test.
type Kendall struct {
	N     int
	S     int     // pairs that rise minus pairs that fall
	Var   float64 // of S if nothing changes, corrected for ties
	Z     float64 // normal score with continuity correction
	P     float64 // two-sided: how often chance alone gives an S as far from 0
	Exact bool    // P is from the exact distribution, not the normal one
}

// ExactUpTo is the number of values up to which P is exact.
const ExactUpTo = 14

// MannKendall tests whether y, in the order of time, tends to rise or fall. Fewer than two values give P = 1.
//
// With ties the exact distribution is that over all orders of the very values seen.
func MannKendall(y []float64) Kendall {
	k := Kendall{N: len(y), S: score(y), Var: variance(y), P: 1}
	if k.Var <= 0 {
		return k
	}
	k.Z = zScore(k.S, k.Var)
	if k.Exact = len(y) <= ExactUpTo; k.Exact {
		k.P = exactTwoSided(tieGroups(y), k.S)
	} else {
		k.P = twoSided(k.Z)
	}
	return k
}

func score(y []float64) int {
	s := 0
	for i := range y {
		for j := range i {
			s += sign(y[i] - y[j])
		}
	}
	return s
}

func sign(d float64) int {
	switch {
	case d > 0:
		return 1
	case d < 0:
		return -1
	}
	return 0
}

// variance is n(n-1)(2n+5)/18 less t(t-1)(2t+5)/18 for each group of t equal values (Kendall, 1975).
func variance(y []float64) float64 {
	term := func(n int) float64 { return float64(n) * float64(n-1) * float64(2*n+5) / 18 }
	v := term(len(y))
	for _, t := range tieGroups(y) {
		v -= term(t)
	}
	return v
}

// tieGroups returns how often each distinct value occurs.
func tieGroups(y []float64) []int {
	sorted := slices.Clone(y)
	slices.Sort(sorted)
	var groups []int
	for i, v := range sorted {
		if i == 0 || v != sorted[i-1] {
			groups = append(groups, 0)
		}
		groups[len(groups)-1]++
	}
	return groups
}

func zScore(s int, variance float64) float64 {
	switch d := float64(s); {
	case s > 0:
		return (d - 1) / math.Sqrt(variance)
	case s < 0:
		return (d + 1) / math.Sqrt(variance)
	}
	return 0
}

func twoSided(z float64) float64 { return math.Min(1, 2*distuv.UnitNormal.Survival(math.Abs(z))) }

// exactTwoSided returns the share of all orders of a multiset whose |S| is at least |s|.
func exactTwoSided(groups []int, s int) float64 {
	counts := inversions(groups)
	var pairs, hit, all float64
	n := 0
	for _, g := range groups {
		pairs -= float64(g * (g - 1) / 2)
		n += g
	}
	pairs += float64(n * (n - 1) / 2) // pairs of unequal values; S = pairs - 2 × inversions
	for inv, c := range counts {
		all += c
		if math.Abs(pairs-2*float64(inv)) >= math.Abs(float64(s)) {
			hit += c
		}
	}
	return hit / all
}

// inversions returns how many orders of a multiset have 0, 1, 2 … inversions: the coefficients of the q-multinomial
// [n]! / ([t1]!·[t2]!·…), built up as a product of q-binomials (P. A. MacMahon, 1916).
func inversions(groups []int) []float64 {
	out := []float64{1}
	n := 0
	for _, t := range groups {
		n += t
		out = convolve(out, qBinomial(n, t))
	}
	return out
}

// qBinomial returns the coefficients of the Gaussian binomial (n over k), by its Pascal rule
// [n,k] = [n-1,k-1] + q^k [n-1,k].
func qBinomial(n, k int) []float64 {
	rows := make([][]float64, k+1)
	rows[0] = []float64{1}
	for i := 1; i <= n; i++ {
		for j := min(i, k); j >= 1; j-- {
			row := make([]float64, j*(i-j)+1)
			copy(row, rows[j-1])
			if j < i {
				for d, c := range rows[j] {
					row[d+j] += c
				}
			}
			rows[j] = row
		}
	}
	return rows[k]
}

func convolve(a, b []float64) []float64 {
	out := make([]float64, len(a)+len(b)-1)
	for i, x := range a {
		for j, y := range b {
			out[i+j] += x * y
		}
	}
	return out
}

// SmallestS returns the smallest |S| among n untied values that has a two-sided exact P of alpha or less; 0 when there
// is none.
func SmallestS(n int, alpha float64) int {
	groups := slices.Repeat([]int{1}, n)
	for s := n * (n - 1) / 2 % 2; s <= n*(n-1)/2; s += 2 {
		if exactTwoSided(groups, s) <= alpha {
			return s
		}
	}
	return 0
}

// SeasonalKendall tests for a trend with the seasons kept apart: values are only compared with those of the same season.
// season[i] is that of y[i], 0 to 11 for months. Seasons are taken as independent of each other; with more than ten years
// of them that can be corrected for, which is not done here.
func SeasonalKendall(season []int, y []float64) Kendall {
	by := map[int][]float64{}
	for i, s := range season {
		by[s] = append(by[s], y[i])
	}
	k := Kendall{N: len(y), P: 1}
	for _, v := range by {
		k.S += score(v)
		k.Var += variance(v)
	}
	if k.Var > 0 {
		k.Z = zScore(k.S, k.Var)
		k.P = twoSided(k.Z)
	}
	return k
}
