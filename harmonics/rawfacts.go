package harmonics

import "math"

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

// look goes once over the samples.
func (r *rawFacts) look(x []float64) {
	*r = rawFacts{n: int64(len(x)), low: math.Inf(1), high: math.Inf(-1), step: math.Inf(1)}
	if len(x) == 0 {
		return
	}
	low, high, step := x[0], x[0], math.Inf(1)
	previous := x[0]
	for _, v := range x[1:] {
		if v > high {
			high = v
		} else if v < low {
			low = v
		}
		d := math.Abs(v - previous)
		if d < step && d > 0 {
			step = d
		}
		previous = v
	}
	r.low, r.high, r.step = low, high, step
	r.ends(x)
}

// ends counts the samples at the extremes, and their runs.
func (r *rawFacts) ends(x []float64) {
	var run int64
	var at float64
	finish := func() {
		if run >= 3 {
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
		if v == r.low {
			r.atLow++
		} else {
			r.atHigh++
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
