package harmonics

import (
	"math"
	"slices"
)

// rawFacts are facts on the samples as recorded, of one window of one channel, or merged over many.
type rawFacts struct {
	n             int64
	low, high     float64
	atLow, atHigh int64
	flats         int64 // runs of three or more equal samples at this stretch's low or high
	longest       int64 // of those runs
	step          float64
	clipped       int // stretches with such a run; merged: those at the channel's very end of range
}

// look goes over the samples. The smallest step is looked for only if asked: it takes as long as all the rest.
func (r *rawFacts) look(x []float64, steps bool) {
	*r = rawFacts{n: int64(len(x)), low: math.Inf(1), high: math.Inf(-1), step: math.Inf(1)}
	low, high := math.Inf(1), math.Inf(-1)
	var atLow, atHigh int64
	for _, v := range x {
		if v >= high {
			if v > high {
				high, atHigh = v, 0
			}
			atHigh++
		}
		if v <= low {
			if v < low {
				low, atLow = v, 0
			}
			atLow++
		}
	}
	r.low, r.high, r.atLow, r.atHigh = low, high, atLow, atHigh
	if atLow >= flat || atHigh >= flat {
		r.ends(x)
	}
	if steps {
		r.step = smallestStep(x)
	}
}

// smallestStep is the smallest difference between two unequal samples, wherever they are: neighbours alone would show the
// slope of a signal sampled a few times a cycle.
func smallestStep(x []float64) float64 {
	sorted := slices.Clone(x[:min(len(x), stepSamples)])
	if len(sorted) == 0 {
		return math.Inf(1)
	}
	slices.Sort(sorted)
	step := math.Inf(1)
	for i := 1; i < len(sorted); i++ {
		if d := sorted[i] - sorted[i-1]; d > 0 {
			step = min(step, d)
		}
	}
	// Differences of values scaled to V or A are not exact: what is a rounding error of them is no step.
	if span := sorted[len(sorted)-1] - sorted[0]; step < 1e-12*span {
		return math.Inf(1)
	}
	return step
}

// stepSamples is how many samples are looked at for the step.
const stepSamples = 4096

// flat is the number of equal samples that make a flat run.
const flat = 3

// ends looks for runs of equal samples at the extremes.
func (r *rawFacts) ends(x []float64) {
	var run int64
	var at float64
	finish := func() {
		if run >= flat {
			r.flats++
			r.longest = max(r.longest, run)
		}
		run = 0
	}
	for _, v := range x {
		if v != r.low && v != r.high {
			if run > 0 {
				finish()
			}
			continue
		}
		if run > 0 && v != at {
			finish()
		}
		at = v
		run++
	}
	finish()
	if r.flats > 0 {
		r.clipped = 1
	}
}

// merge adds the facts of a further stretch. Runs count only at the extremes of all.
func (r *rawFacts) merge(o rawFacts) {
	if o.n == 0 {
		return
	}
	if r.n == 0 {
		*r = o
		return
	}
	lower, higher := o.low < r.low, o.high > r.high
	atEnd := o.low <= r.low || o.high >= r.high
	if lower {
		r.low, r.atLow = o.low, 0
	}
	if higher {
		r.high, r.atHigh = o.high, 0
	}
	if lower && higher {
		r.flats, r.longest, r.clipped = 0, 0, 0
	}
	if o.low == r.low {
		r.atLow += o.atLow
	}
	if o.high == r.high {
		r.atHigh += o.atHigh
	}
	if atEnd {
		r.flats += o.flats
		r.longest = max(r.longest, o.longest)
		r.clipped += o.clipped
	}
	r.n += o.n
	r.step = min(r.step, o.step)
}
