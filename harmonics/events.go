package harmonics

import (
	"math"

	"wavetally/harmonics/site"
)

// Thresholds of voltage events, shares of nominal: those in common use with IEC 61000-4-30, 5.4 and 5.5 (from memory).
const (
	dipBelow      = 0.90
	swellAbove    = 1.10
	interruptedAt = 0.05
	hysteresis    = 0.02
)

// events watches the rms voltage over one cycle, refreshed each half cycle, of every channel with a nominal value.
//
// IEC 61000-4-30 begins the cycle at a zero crossing of the fundamental. Here it begins at a fixed phase, that of the
// window: the rms over a whole cycle does not depend on it, and the time of an event does by less than half a cycle.
type events struct {
	roles    []site.Role
	channels []int     // measured channels watched
	nominal  []float64 // of each
	last     []float64 // mean square of the half cycle before; NaN after a break
	seen     []bool    // the channel was once within the dip and swell thresholds
	open     [3]*VoltageEvent
	done     []VoltageEvent
}

func newEvents(channels []channel) *events {
	e := &events{}
	for k, c := range channels {
		if c.role.Voltage() && c.nominal > 0 {
			e.channels = append(e.channels, k)
			e.roles = append(e.roles, c.role)
			e.nominal = append(e.nominal, c.nominal)
			e.last = append(e.last, math.NaN())
			e.seen = append(e.seen, false)
		}
	}
	return e
}

// window looks at one window and returns the flags of the events that touch it, and of those that touch the window
// before it, whose last half cycle belongs to this window's first value.
func (e *events) window(c cut, cycles int, r *windowResult) (now, before Flags) {
	if len(e.channels) == 0 {
		return 0, 0
	}
	if c.breaks {
		e.finish()
		for i := range e.last {
			e.last[i] = math.NaN()
		}
	}
	shares := make([]float64, len(e.channels))
	for half := range 2 * cycles {
		for i, k := range e.channels {
			m := r.channels[k].half[half]
			if r.channels[k].missing || c.flags&Missing != 0 {
				m = math.NaN()
			}
			shares[i] = math.Sqrt((m+e.last[i])/2) / e.nominal[i]
			e.last[i] = m
		}
		at := c.at + c.span*float64(half+1)/float64(2*cycles)
		f := e.step(shares, at)
		now |= f
		if half == 0 {
			before |= f
		}
	}
	return now, before
}

// step takes one value a channel, as shares of nominal, that ends at time at.
//
// A channel that was never near its nominal value has no events: it is dead, or wrongly scaled, which is another doubt.
func (e *events) step(shares []float64, at float64) Flags {
	lowest, highest := math.Inf(1), math.Inf(-1)
	for i, s := range shares {
		e.seen[i] = e.seen[i] || s >= dipBelow && s <= swellAbove
		if !e.seen[i] {
			shares[i] = math.NaN()
		} else if !math.IsNaN(s) {
			lowest, highest = min(lowest, s), max(highest, s)
		}
	}
	if math.IsInf(lowest, 1) {
		return 0
	}
	var flags Flags
	// A dip begins when any channel is below, and ends when all are back above; a swell the same upwards; a
	// polyphase interruption begins when all are below, and ends when any is back.
	flags |= e.turn(0, Dip, lowest < dipBelow, lowest >= dipBelow+hysteresis, shares, at)
	flags |= e.turn(1, Swell, highest > swellAbove, highest <= swellAbove-hysteresis, shares, at)
	flags |= e.turn(2, Interruption, highest < interruptedAt, highest >= interruptedAt+hysteresis, shares, at)
	return flags
}

func (e *events) turn(i int, kind Flags, begins, ends bool, shares []float64, at float64) Flags {
	ev := e.open[i]
	if ev == nil {
		if !begins {
			return 0
		}
		ev = &VoltageEvent{Kind: kind, At: at, Extreme: math.NaN()}
		e.open[i] = ev
	} else if ends {
		ev.Length = at - ev.At
		e.done = append(e.done, *ev)
		e.open[i] = nil
		return 0
	}
	ev.Length = at - ev.At
	for k, s := range shares {
		beyond := s < dipBelow
		worse := s*100 < ev.Share || math.IsNaN(ev.Extreme)
		if kind == Swell {
			beyond = s > swellAbove
			worse = s*100 > ev.Share || math.IsNaN(ev.Extreme)
		} else if kind == Interruption {
			beyond = s < interruptedAt
		} // a NaN share is not beyond anything
		if !beyond {
			continue
		}
		if worse {
			ev.Extreme, ev.Share = s*e.nominal[k], 100*s
		}
		if !has(ev.Channels, e.roles[k]) {
			ev.Channels = append(ev.Channels, e.roles[k])
		}
	}
	return kind
}

func has(roles []site.Role, r site.Role) bool {
	for _, x := range roles {
		if x == r {
			return true
		}
	}
	return false
}

// finish ends what is open where the recording breaks off.
func (e *events) finish() {
	for i, ev := range e.open {
		if ev != nil {
			e.done = append(e.done, *ev)
			e.open[i] = nil
		}
	}
}
