package plant

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// VoltageFactor is the harmonic voltage factor HVF of NEMA MG 1, part 30: the root of the sum of Vh²/h over the odd
// orders from 5 that are no multiples of 3, v in per unit of rated voltage (from memory).
func VoltageFactor(v Spectrum) float64 {
	var sum float64
	for h := 5; h < len(v); h += 2 {
		if h%3 != 0 {
			sum += v[h] * v[h] / float64(h)
		}
	}
	return math.Sqrt(sum)
}

// Where motors are concerned: NEMA MG 1 derates above 0.03; IEC 60034-1 wants machines to bear 0.02, some designs 0.03
// (both from memory).
const (
	motorWatch  = 0.02
	motorDerate = 0.03
)

func (s *screening) motor() {
	if !s.supply.ThreePhase() || s.supply.NominalVoltage == 0 {
		return
	}
	c, hvf := worst(s.voltages(), func(c *harmonics.ChannelSummary) float64 {
		return VoltageFactor(spectrumOf(c).Per(s.supply.NominalOf(c.Role)))
	})
	if c == nil {
		return
	}
	text := fmt.Sprintf("%s: HVF %s. NEMA MG 1 derates motors above 0.03, IEC 60034-1 has them bear 0.02 to 0.03 by design (from memory): ", c.Role, num(hvf))
	switch {
	case hvf > motorDerate:
		text += "derate motors that run direct on line."
	case hvf > motorWatch:
		text += "ask the makers of motors near their rating."
	default:
		text += "no concern."
	}
	s.add(Figure{Motor, "HVF, harmonic voltage factor", hvf, "", text})
}
