package limits

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// A quantity is what one limit is held against: an order of a channel, or a total over orders, on a basis.
type quantity struct {
	channel int // index in Summary.Channels
	role    site.Role
	order   int // 0 for the total
	top     int // highest order of the total
	basis   string
	size    float64 // of the basis in the channel's unit; NaN for the fundamental, or when it is not known
}

// level is the quantity in the channel's unit.
func (q quantity) level(l *harmonics.Levels) float64 {
	switch {
	case q.order > 0:
		return l.H[q.order]
	case q.top == topOrder:
		return l.THC
	}
	return rssKnown(l.H[2 : q.top+1])
}

// pct is the quantity in per cent of its basis.
func (q quantity) pct(l *harmonics.Levels) float64 {
	if q.basis == basisFundamental {
		return 100 * q.level(l) / l.H[1]
	}
	return q.share(q.level(l))
}

// share turns a level into per cent of a fixed basis.
func (q quantity) share(level float64) float64 { return 100 * level / q.size }

// stats are those of 3 s values over the recording, in per cent of the basis; ok is false where there are none.
func (q quantity) stats(ch *harmonics.ChannelSummary) (s harmonics.Stats, ok bool) {
	relative := q.basis == basisFundamental
	switch {
	case q.order > 0 && relative:
		s = ch.H(q.order).Share3s
	case q.order > 0:
		s = ch.H(q.order).Level3s
	case relative:
		s = ch.THD3s
	default:
		s = ch.THC3s
	}
	if s.N == 0 {
		return s, false
	}
	if !relative {
		for _, v := range []*float64{&s.Mean, &s.P50, &s.P95, &s.P99, &s.Max, &s.P95Low, &s.P95High} {
			*v = q.share(*v)
		}
	}
	return s, true
}

// daily is the 99th percentile of a day's 3 s values, in per cent of the basis and in the channel's unit (NaN for a
// share of the fundamental, which is another in each interval).
func (q quantity) daily(d *harmonics.DayLevels) (pct, level float64) {
	switch {
	case q.order == 0 && q.top != topOrder:
		return math.NaN(), math.NaN() // days keep the total over all orders only
	case q.order == 0 && q.basis == basisFundamental:
		return d.THD, math.NaN()
	case q.order == 0:
		return q.share(d.THC), d.THC
	case q.basis == basisFundamental:
		return d.Share[q.order], math.NaN()
	}
	return q.share(d.Level[q.order]), d.Level[q.order]
}

// whole is the rms over the whole recording.
func (q quantity) whole(ch *harmonics.ChannelSummary) (pct, level float64) {
	if q.order > 0 {
		level = ch.H(q.order).RMS
	} else {
		levels := make([]float64, 0, q.top)
		for h := 2; h <= q.top; h++ {
			levels = append(levels, ch.H(h).RMS)
		}
		level = rssKnown(levels)
	}
	if q.basis == basisFundamental {
		return 100 * level / ch.Fundamental, level
	}
	return q.share(level), level
}

// floor is what noise alone puts into the quantity, in per cent of the basis; NaN when unknown.
func (q quantity) floor(ch *harmonics.ChannelSummary) float64 {
	var level float64
	if q.order > 0 {
		level = ch.H(q.order).Floor
	} else {
		floors := make([]float64, 0, q.top)
		for h := 2; h <= q.top; h++ {
			floors = append(floors, ch.H(h).Floor)
		}
		level = rssKnown(floors)
	}
	if q.basis == basisFundamental {
		return 100 * level / ch.Fundamental
	}
	return q.share(level)
}

// basisText says what the percentages are of.
func (q quantity) basisText() string {
	switch {
	case q.basis == basisFundamental:
		return "fundamental"
	case q.basis == basisNominal && math.IsNaN(q.size):
		return "nominal voltage, not declared"
	case q.basis == basisNominal:
		return fmt.Sprintf("nominal voltage %s V", sig(q.size, 4))
	case math.IsNaN(q.size):
		return "demand current, not declared"
	}
	return fmt.Sprintf("demand current %s A", sig(q.size, 4))
}

// name is the finding's Quantity.
func (q quantity) name() string {
	switch {
	case q.order > 0:
		return "harmonic"
	case q.basis == basisDemand:
		return "tdd"
	}
	return "thd"
}

// rssKnown is the root of the sum of squares of the values that are known; NaN when none is.
func rssKnown(values []float64) float64 {
	var sum float64
	n := 0
	for _, v := range values {
		if !math.IsNaN(v) {
			sum += v * v
			n++
		}
	}
	if n == 0 {
		return math.NaN()
	}
	return math.Sqrt(sum)
}
