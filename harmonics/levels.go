package harmonics

import "math"

// rss returns the root of the sum of squares of v[from..to].
func rss(v []float64, from, to int) float64 {
	var sum float64
	for _, x := range v[from : to+1] {
		sum += x * x
	}
	return math.Sqrt(sum)
}
