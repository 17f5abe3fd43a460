package timebase

import "math"

// An Event is what a tracker found between one row and the next.
type Event uint8

// Events.
const (
	Follows Event = iota // the row follows on
	Gap                  // rows are missing before it
	Back                 // the clock went back; the row is placed right behind the one before
)

// A Tracker compares rows' stamps with the rows' number, and says where a row does not follow on.
//
// A clock that runs slightly off the found rate is followed: what counts is a sudden step, not the sum of a drift.
type Tracker struct {
	rate      float64
	tolerance float64 // s, beyond which a row does not follow on
	wraps     float64 // s, after which stamps start again (a day, for times of day); 0: never

	at    float64 // of the segment's first row, on the recording's axis
	n     int64   // rows of the segment so far
	shift float64 // from the stamps' axis to the recording's
	drift float64 // of the stamps from even steps, slowly followed
	begun bool
	off   float64
}

// NewTracker follows stamps at a rate in samples per second. wraps is 86400 for stamps without a date, else 0.
func NewTracker(f Fit, rate, wraps float64) *Tracker {
	return &Tracker{rate: rate, tolerance: 0.5/rate + 1.5*f.Jitter, wraps: wraps}
}

// Allow widens the tolerance to the resolution, in s, that the next stamps are written with.
func (k *Tracker) Allow(step float64) {
	k.tolerance = max(k.tolerance, 0.5/k.rate+step)
}

// Next takes the stamp of the next row, in s; NaN stands for a row without one. It returns the event before the row
// and the time at which the row lies on the recording's axis, which starts at 0 and never goes back.
func (k *Tracker) Next(t float64) (Event, float64) {
	if !k.begun {
		k.begun = true
		if !math.IsNaN(t) {
			k.shift = -t
		}
		k.n = 1
		return Follows, 0
	}
	expected := k.at + float64(k.n)/k.rate
	k.n++
	off := t + k.shift - expected - k.drift
	if math.Abs(off) <= k.tolerance {
		k.drift += off / 4096
		return Follows, expected
	}
	if math.IsNaN(t) {
		return Follows, expected
	}
	return k.step(t, expected, off)
}

func (k *Tracker) step(t, expected, off float64) (Event, float64) {
	if k.wraps > 0 && off < -k.wraps/2 {
		k.shift += k.wraps
		if off += k.wraps; math.Abs(off) <= k.tolerance {
			return Follows, expected
		}
	}
	k.n, k.off = 1, off
	if off < 0 {
		k.shift -= off
		k.at = expected
		return Back, expected
	}
	k.at = expected + off
	// Rows lost from a steady stream keep its grid, which is finer than the stamps.
	if rows := math.Round(off * k.rate); rows < 1e6 && math.Abs(off-rows/k.rate) < k.tolerance {
		k.at = expected + rows/k.rate
	}
	k.off = k.at - expected
	return Gap, k.at
}

// Off is how far the row of the last event that was not Follows lay from where it was expected, in s.
func (k *Tracker) Off() float64 { return k.off }

// Keeps reports whether stamps, one row after the other, keep the rate, going by the first few dozen. Too few stamps
// are taken to do so.
func (k *Tracker) Keeps(stamps []float64) bool {
	const few = 8
	stamps = stamps[:min(len(stamps), 64)]
	if len(stamps) < few {
		return true
	}
	off := 0
	for i := few / 2; i < len(stamps); i++ {
		span := stamps[i] - stamps[i-few/2]
		if math.Abs(span-few/2/k.rate) > k.tolerance {
			off++
		}
	}
	return off*2 < len(stamps)-few/2
}

// Restart changes the rate from the segment that has just begun on.
func (k *Tracker) Restart(f Fit, rate float64) {
	k.rate, k.drift = rate, 0
	k.tolerance = 0.5/rate + 1.5*f.Jitter
}

// Rate is the rate of the present segment.
func (k *Tracker) Rate() float64 { return k.rate }
