package plant

import (
	"math"

	"wavetally/harmonics"
)

// A Spectrum holds rms values by order: Spectrum[5] is the fifth harmonic, Spectrum[1] the fundamental. [0] is not
// used. Ratios do not depend on its unit.
type Spectrum []float64

// spectrumOf takes the rms values of a channel over the recording; orders that were not measured count as 0.
func spectrumOf(c *harmonics.ChannelSummary) Spectrum {
	s := make(Spectrum, len(c.Harmonics)+1)
	for _, h := range c.Harmonics {
		if h.Order < len(s) && !math.IsNaN(h.RMS) {
			s[h.Order] = h.RMS
		}
	}
	return s
}

// clearOf returns the spectrum without the orders that do not stand clear of the noise, and whether there were any.
func (s Spectrum) clearOf(c *harmonics.ChannelSummary) (clear Spectrum, some bool) {
	clear = append(Spectrum(nil), s...)
	for _, h := range c.Harmonics {
		if h.Order > 1 && h.Order < len(s) && h.Floor > 0 && !h.Above && s[h.Order] > 0 {
			clear[h.Order], some = 0, true
		}
	}
	return clear, some
}

// weighted is the sum of w(h)·Ih² over the orders from 1.
func (s Spectrum) weighted(w func(h float64) float64) float64 {
	var sum float64
	for h := 1; h < len(s); h++ {
		sum += w(float64(h)) * s[h] * s[h]
	}
	return sum
}

func one(float64) float64 { return 1 }

// RMS is the root of the sum of squares of all orders from 1.
func (s Spectrum) RMS() float64 { return math.Sqrt(s.weighted(one)) }

// Per returns the spectrum divided by a value.
func (s Spectrum) Per(v float64) Spectrum {
	out := make(Spectrum, len(s))
	for h := range s {
		out[h] = s[h] / v
	}
	return out
}

// Triplen is the root of the sum of squares of orders 3, 9, 15 …
func (s Spectrum) Triplen() float64 {
	var sum float64
	for h := 3; h < len(s); h += 6 {
		sum += s[h] * s[h]
	}
	return math.Sqrt(sum)
}

// top is the highest order the spectrum holds anything of.
func (s Spectrum) top() int {
	for h := len(s) - 1; h > 0; h-- {
		if s[h] > 0 {
			return h
		}
	}
	return 0
}
