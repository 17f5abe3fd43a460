package plant

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// LossFactor is the harmonic loss factor F_HL of IEEE C57.110-2018 for winding eddy losses: the sum of h²·Ih² over that
// of Ih². It is also the K-factor of a load whose rms current is the transformer's rated current.
func LossFactor(i Spectrum) float64 {
	return i.weighted(func(h float64) float64 { return h * h }) / i.weighted(one)
}

// StrayLossFactor is F_HL-STR of IEEE C57.110-2018 for the other stray losses of liquid-filled transformers: the sum of
// h^0.8·Ih² over that of Ih² (from memory).
func StrayLossFactor(i Spectrum) float64 {
	return i.weighted(func(h float64) float64 { return math.Pow(h, 0.8) }) / i.weighted(one)
}

// KFactor is that of UL 1561: the sum of h²·(Ih/rated)², rated being the transformer's rated rms current in the unit of
// the spectrum.
func KFactor(i Spectrum, rated float64) float64 {
	return i.weighted(func(h float64) float64 { return h * h }) / (rated * rated)
}

// kRatings are the standard ones (UL 1561; one public source).
var kRatings = []float64{1, 4, 9, 13, 20, 30, 40, 50}

// NextKRating returns the smallest standard K rating that is not below k, 0 when k is above them all.
func NextKRating(k float64) float64 {
	for _, r := range kRatings {
		if k <= r {
			return r
		}
	}
	return 0
}

// Windings of the European factor K: its exponent q.
const (
	RoundWire = 1.7 // round or rectangular wire in both windings
	Foil      = 1.5 // foil in the low-voltage winding
)

// FactorK is the European factor K (EN 50464-3, HD 428.4 and HD 538.3, two public sources): the load is to be kept to 1/K
// of the rating. eddy is the eddy loss over the I²R loss, both at the fundamental, and q the winding's exponent. The sum
// runs from n = 2: worksheets in circulation begin at 1, which comes out too high.
func FactorK(i Spectrum, eddy, q float64) float64 {
	var sum float64
	for n := 2; n < len(i); n++ {
		r := i[n] / i[1]
		sum += math.Pow(float64(n), q) * r * r
	}
	share := i[1] / i.RMS()
	return math.Sqrt(1 + eddy/(1+eddy)*share*share*sum)
}

// DryCapability is the rms load current in per unit of rated that brings a dry-type transformer's winding losses to
// their rated value (IEEE C57.110-2018, from memory). eddy is the rated winding eddy loss in per unit of the I²R loss.
func DryCapability(lossFactor, eddy float64) float64 {
	return LiquidCapability(lossFactor, 1, eddy, 0)
}

// LiquidCapability is the same for a liquid-filled transformer, with stray the rated other stray loss in per unit of the
// I²R loss: load losses are brought to their rated value (IEEE C57.110-2018, simplified to losses alone; from memory).
func LiquidCapability(lossFactor, strayFactor, eddy, stray float64) float64 {
	return math.Sqrt((1 + eddy + stray) / (1 + lossFactor*eddy + strayFactor*stray))
}

// RatedCurrent is a transformer's rated current in A: kVA at volts between lines on three phases, else across one.
func RatedCurrent(kva, volts float64, threePhase bool) float64 {
	if threePhase {
		volts *= math.Sqrt(3)
	}
	return 1000 * kva / volts
}

// TransformerFaultCurrent is the short-circuit current in A behind a transformer of the given impedance in per cent, fed
// by a supply without impedance: an upper value.
func TransformerFaultCurrent(kva, impedance, volts float64, threePhase bool) float64 {
	return RatedCurrent(kva, volts, threePhase) * 100 / impedance
}

// rated returns the declared transformer's rated current, 0 when it is not declared.
func (s *screening) rated() float64 {
	if s.supply.TransformerKVA == 0 || s.supply.NominalVoltage == 0 {
		return 0
	}
	return RatedCurrent(s.supply.TransformerKVA, systemVoltage(s.supply), s.supply.ThreePhase())
}

// systemVoltage is the nominal voltage across the lines that a transformer or a bank is rated for.
func systemVoltage(s site.Supply) float64 {
	if s.Connection == site.SplitPhase {
		return 2 * s.NominalVoltage
	}
	return s.NominalVoltage
}

func (s *screening) transformer() {
	s.faultCurrent()
	c, k := worst(s.currents(), func(c *harmonics.ChannelSummary) float64 { return LossFactor(spectrumOf(c)) })
	if c == nil {
		return
	}
	i := spectrumOf(c)
	s.kFactor(c, i, k)
	s.add(Figure{Transformer, "F_HL, harmonic loss factor", k, "",
		fmt.Sprintf("%s: winding eddy losses are %s times those of a sinusoidal current of the same rms (IEEE C57.110, orders 1 to %d).", c.Role, num(k), i.top())})
	stray := StrayLossFactor(i)
	s.add(Figure{Transformer, "F_HL-STR, other stray losses", stray, "",
		fmt.Sprintf("%s: other stray losses of a liquid-filled transformer are %s times those of a sinusoidal current of the same rms (IEEE C57.110, from memory).", c.Role, num(stray))})
	if s.supply.TransformerEddyLoss > 0 {
		s.capability(c, i, k, stray)
		s.factorK(c, i)
	}
}

func (s *screening) kFactor(c *harmonics.ChannelSummary, i Spectrum, k float64) {
	text := fmt.Sprintf("%s: K-factor %s of the load at its own rms, orders 1 to %d (UL 1561; it grows with the top order).", c.Role, num(k), i.top())
	next := NextKRating(k)
	if next == 0 {
		text += " It is above the highest standard rating, 50."
	} else {
		text += fmt.Sprintf(" The next standard rating is %g.", next)
	}
	if rating := s.supply.TransformerKRating; rating > 0 && k > rating {
		text += fmt.Sprintf(" The declared transformer has %g: less, if loaded to its rated current.", rating)
	} else if rating > 0 {
		text += fmt.Sprintf(" The declared transformer has %g: enough.", rating)
	}
	if rated := s.rated(); rated > 0 {
		text += fmt.Sprintf(" Over the transformer's rated %s A, at the load recorded, it is %s.", num(rated), num(KFactor(i, rated)))
	}
	if clear, some := i.clearOf(c); some && LossFactor(clear) < k*0.95 {
		text += fmt.Sprintf(" Noise weighs in it: without the orders that do not stand clear of the noise it is %s.", num(LossFactor(clear)))
	}
	s.add(Figure{Transformer, "K-factor of the load", k, "", text})
}

func (s *screening) capability(c *harmonics.ChannelSummary, i Spectrum, lossFactor, strayFactor float64) {
	kind, part := "dry-type", fmt.Sprintf("eddy loss %g pu", s.supply.TransformerEddyLoss)
	permitted := DryCapability(lossFactor, s.supply.TransformerEddyLoss)
	if stray := s.supply.TransformerStrayLoss; stray > 0 {
		kind, part = "liquid-filled", part+fmt.Sprintf(", other stray loss %g pu", stray)
		permitted = LiquidCapability(lossFactor, strayFactor, s.supply.TransformerEddyLoss, stray)
	}
	text := fmt.Sprintf("%s: a %s transformer with %s may carry %s %% of its rated current with this spectrum (IEEE C57.110, from memory).", c.Role, kind, part, num(100*permitted))
	if rated := s.rated(); rated > 0 {
		text += fmt.Sprintf(" That is %s A; the record's mean load is %s A (%s %% of rated).", num(permitted*rated), num(i.RMS()), num(100*i.RMS()/rated))
	}
	s.add(Figure{Transformer, "Permissible load, IEEE C57.110", 100 * permitted, "%", text})
}

func (s *screening) factorK(c *harmonics.ChannelSummary, i Spectrum) {
	for _, w := range []struct {
		name string
		q    float64
	}{{"wire windings, q = 1.7", RoundWire}, {"foil winding, q = 1.5", Foil}} {
		k := FactorK(i, s.supply.TransformerEddyLoss, w.q)
		s.add(Figure{Transformer, "Factor K, " + w.name, k, "",
			fmt.Sprintf("%s: factor K is %s, so the load is to be kept to %s %% of the rating (EN 50464-3, orders from 2).", c.Role, num(k), num(100/k))})
	}
}

func (s *screening) faultCurrent() {
	if s.supply.TransformerKVA == 0 || s.supply.TransformerImpedance == 0 || s.supply.NominalVoltage == 0 {
		return
	}
	isc := TransformerFaultCurrent(s.supply.TransformerKVA, s.supply.TransformerImpedance, systemVoltage(s.supply), s.supply.ThreePhase())
	text := fmt.Sprintf("%s A behind the transformer alone, fed by a supply without impedance: an upper value, which would choose too loose a row of a limit table.", num(isc))
	if declared := s.supply.ShortCircuitCurrent; declared > isc*1.05 {
		text += fmt.Sprintf(" The declared %s A is above it: check which side of the transformer it is for.", num(declared))
	}
	s.add(Figure{Transformer, "Short-circuit current behind the transformer", isc, "A", text})
}
