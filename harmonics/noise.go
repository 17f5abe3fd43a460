package harmonics

import (
	"math"
	"slices"
)

// Noise is estimated from the lines that belong to no harmonic: for each order, those between the orders around it, by
// their median, so that an interharmonic among them does not count.

// clearFactor is by how many standard errors a harmonic must stand above the noise to be called above it.
const clearFactor = 4

// noiseFloor returns, for order h, the mean square that noise puts into one line, from the mean squares of all lines
// over n windows, and how many lines that rests on. NaN when there are too few.
func noiseFloor(lines []float64, f frame, n, h int) (perLine float64, count int) {
	var around []float64
	from, to := f.cycles*h-f.cycles*3/2, f.cycles*h+f.cycles*3/2
	for k := max(from, 2); k <= min(to, f.lines-1, len(lines)-1); k++ {
		// The lines next to a harmonic hold its modulation.
		if d := k % f.cycles; d >= 2 && d <= f.cycles-2 {
			around = append(around, lines[k]/float64(n))
		}
	}
	if len(around) < 4 {
		return math.NaN(), 0
	}
	slices.Sort(around)
	median := around[len(around)/2]
	if len(around)%2 == 0 {
		median = (median + around[len(around)/2-1]) / 2
	}
	// The mean of n squares of noise is a gamma variate; its median lies below its mean by this factor (Wilson and
	// Hilferty).
	bias := 1 - 1/(9*float64(n))
	perLine = median / (bias * bias * bias)
	// A strong interharmonic close by leaks into the harmonic's lines. Its skirt falls steadily across them, so what
	// the lines on either side hold on average is no less than what it puts into those between.
	if a, b := f.cycles*h-2, f.cycles*h+2; a > 1 && b < len(lines) {
		perLine = max(perLine, (lines[a]+lines[b])/2/float64(n))
	}
	return perLine, len(around)
}

// aboveNoise reports whether a subgroup (three lines) of mean square s over n windows stands clear of noise of
// perLine mean square a line, itself known from count lines.
func aboveNoise(s, perLine float64, n, count, lines int) bool {
	if math.IsNaN(perLine) {
		return s > 0
	}
	own := 1 / float64(lines*n)
	floor := 1.6 / float64(count*n) // a median is as good as 64 % of its values' mean
	return s > float64(lines)*perLine*(1+clearFactor*math.Sqrt(own+floor))
}
