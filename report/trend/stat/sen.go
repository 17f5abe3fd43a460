package stat

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/stat/distuv"
)

// A Slope is a Theil–Sen slope with its confidence interval, in units of y per unit of t.
type Slope struct {
	PerT      float64 // median of the slopes of all pairs
	Low, High float64 // NaN when there are too few values for the confidence asked
	Intercept float64 // median of y - PerT·t
}

// TheilSen fits a straight line to y over t, strictly increasing, with a confidence interval of the slope (1 - alpha) from
// the ranks of the pairs' slopes: exact for up to ExactUpTo values without ties, else by the normal approximation.
func TheilSen(t, y []float64, alpha float64) Slope {
	var slopes []float64
	for i := range y {
		for j := range i {
			slopes = append(slopes, (y[i]-y[j])/(t[i]-t[j]))
		}
	}
	return slopeOf(slopes, t, y, MannKendall(y).Var, alpha)
}

// SeasonalSlope is the same over pairs within a season only.
func SeasonalSlope(t []float64, season []int, y []float64, alpha float64) Slope {
	var slopes []float64
	for i := range y {
		for j := range i {
			if season[i] == season[j] {
				slopes = append(slopes, (y[i]-y[j])/(t[i]-t[j]))
			}
		}
	}
	k := SeasonalKendall(season, y)
	return slopeOf(slopes, t, y, k.Var, alpha)
}

func slopeOf(slopes, t, y []float64, variance, alpha float64) Slope {
	out := Slope{PerT: math.NaN(), Low: math.NaN(), High: math.NaN(), Intercept: math.NaN()}
	if len(slopes) == 0 {
		return out
	}
	slices.Sort(slopes)
	out.PerT = Median(slopes)
	rest := make([]float64, len(y))
	for i := range y {
		rest[i] = y[i] - out.PerT*t[i]
	}
	out.Intercept = Median(rest)
	n := len(slopes)
	c := distuv.UnitNormal.Quantile(1-alpha/2) * math.Sqrt(variance)
	if untied(y) && len(y) <= ExactUpTo && n == len(y)*(len(y)-1)/2 {
		s := SmallestS(len(y), alpha)
		if s == 0 {
			return out
		}
		c = float64(s - 2)
	}
	// Sen (1968): the bounds are the slopes of rank (N-C)/2 and (N+C)/2 + 1, C being the quantile of S.
	low, high := int(math.Floor((float64(n)-c)/2)), int(math.Ceil((float64(n)+c)/2))+1
	if low >= 1 && high <= n {
		out.Low, out.High = slopes[low-1], slopes[high-1]
	}
	return out
}

func untied(y []float64) bool { return len(tieGroups(y)) == len(y) }

// Median returns the middle value, the mean of the two middle ones for an even number, NaN for none. It leaves v alone.
func Median(v []float64) float64 {
	if len(v) == 0 {
		return math.NaN()
	}
	s := slices.Clone(v)
	slices.Sort(s)
	m := len(s) / 2
	if len(s)%2 == 1 {
		return s[m]
	}
	return (s[m-1] + s[m]) / 2
}
