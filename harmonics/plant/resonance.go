package plant

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// ResonanceOrder is the order at which a capacitor bank of kvar is in parallel resonance with a supply of the given
// short-circuit power in kVA: sqrt(Ssc/Q), taking the supply as inductive (textbooks; IEEE 519's annexes).
func ResonanceOrder(faultKVA, kvar float64) float64 { return DetunedResonanceOrder(faultKVA, kvar, 0) }

// DetunedResonanceOrder is the same for a bank with reactor share p, whose kvar are those drawn from the supply. It lies
// below the tuned order.
func DetunedResonanceOrder(faultKVA, kvar, p float64) float64 {
	return 1 / math.Sqrt(p+kvar*(1-p)/faultKVA)
}

// near is how far a resonance may be from an order to be warned of.
const near = 0.5

// Characteristic orders of three-phase converters, which a resonance should keep away from.
var characteristic = []int{5, 7, 11, 13}

// An order is strong when a line current has this much of it, or a voltage that much, in per cent of the fundamental.
const (
	strongCurrent = 3
	strongVoltage = 1
)

// strongOrders lists the orders above the fundamental that stand out in the recording.
func (s *screening) strongOrders() []int {
	var out []int
	for h := 2; h <= 50; h++ {
		found := false
		for _, c := range s.currents() {
			found = found || h <= len(c.Harmonics) && 100*c.H(h).RMS/c.Fundamental >= strongCurrent
		}
		for _, c := range s.voltages() {
			found = found || h <= len(c.Harmonics) && 100*c.H(h).RMS/c.Fundamental >= strongVoltage
		}
		if found {
			out = append(out, h)
		}
	}
	return out
}

// mostSums bounds the combinations of steps that are looked at.
const mostSums = 512

// StepSums returns the distinct sums of kvar that steps can make, each step in or out, in ascending order. Where there
// are too many, whole is false and only the sums of the steps switched on one after the other are returned.
func StepSums(steps []float64) (sums []float64, whole bool) {
	all := []float64{0}
	for _, step := range steps {
		grown := slices.Clone(all)
		for _, s := range all {
			grown = append(grown, s+step)
		}
		slices.Sort(grown)
		all = slices.CompactFunc(grown, func(a, b float64) bool { return math.Abs(a-b) <= 1e-9*math.Max(a, b) })
		if len(all) > mostSums {
			return runningSums(steps), false
		}
	}
	return all[1:], true
}

func runningSums(steps []float64) []float64 {
	var out []float64
	total := 0.0
	for _, s := range steps {
		total += s
		out = append(out, total)
	}
	if len(out) > mostSums {
		out = out[len(out)-mostSums:]
	}
	return out
}

// A faultLevel is the supply's short-circuit power in one state.
type faultLevel struct {
	name string
	kva  float64
}

func (s *screening) faultLevels() []faultLevel {
	volts := systemVoltage(s.supply)
	if volts == 0 {
		return nil
	}
	power := func(amps float64) float64 {
		if s.supply.ThreePhase() {
			amps *= math.Sqrt(3)
		}
		return amps * volts / 1000
	}
	var out []faultLevel
	if isc := s.supply.ShortCircuitCurrent; isc > 0 {
		out = append(out, faultLevel{"maximum fault level", power(isc)})
	}
	if isc := s.supply.ShortCircuitCurrentMin; isc > 0 {
		out = append(out, faultLevel{"minimum fault level", power(isc)})
	}
	if len(out) == 0 && s.supply.TransformerKVA > 0 && s.supply.TransformerImpedance > 0 {
		out = append(out, faultLevel{"transformer alone", 100 * s.supply.TransformerKVA / s.supply.TransformerImpedance})
	}
	return out
}

// mostShown is how many combinations of steps get a figure each; of more, only those with a warning do.
const mostShown = 12

func (s *screening) resonance() {
	levels := s.faultLevels()
	sums, whole := StepSums(s.supply.CapacitorKvar)
	if len(levels) == 0 || len(sums) == 0 {
		return
	}
	watched := s.strongOrders()
	for _, h := range characteristic {
		if !slices.Contains(watched, h) {
			watched = append(watched, h)
		}
	}
	slices.Sort(watched)
	for _, level := range levels {
		var low, high, warned = math.Inf(1), 0.0, 0
		for _, kvar := range sums {
			f, warns := s.resonanceAt(level, kvar, watched)
			low, high = math.Min(low, f.Value), math.Max(high, f.Value)
			if warns {
				warned++
			}
			if len(sums) <= mostShown || warns && warned <= mostShown {
				s.add(f)
			}
		}
		if len(sums) > mostShown {
			s.add(rangeFigure(level, len(sums), low, high, warned, whole))
		}
	}
}

func (s *screening) resonanceAt(level faultLevel, kvar float64, watched []int) (f Figure, warns bool) {
	p := s.supply.CapacitorDetuning / 100
	order := DetunedResonanceOrder(level.kva, kvar, p)
	text := fmt.Sprintf("%s kvar on %s MVA resonate at order %s", num(kvar), num(level.kva/1000), num(order))
	if s.supply.NominalFrequency > 0 {
		text += fmt.Sprintf(" (%s Hz)", num(order*s.supply.NominalFrequency))
	}
	text += ", the supply taken as inductive."
	var hit []string
	for _, h := range watched {
		if math.Abs(order-float64(h)) <= near {
			hit = append(hit, s.nameOrder(h))
		}
	}
	if len(hit) > 0 {
		text += " Too near to " + strings.Join(hit, " and ") + ": such a harmonic would be amplified; a study is due before these steps are used."
	}
	return Figure{Resonance, fmt.Sprintf("Parallel resonance, %s kvar, %s", num(kvar), level.name), order, "", text}, len(hit) > 0
}

// nameOrder says why an order is watched.
func (s *screening) nameOrder(h int) string {
	if slices.Contains(s.strongOrders(), h) {
		return fmt.Sprintf("order %d, which is strong here", h)
	}
	return fmt.Sprintf("order %d, which converters make", h)
}

func rangeFigure(level faultLevel, n int, low, high float64, warned int, whole bool) Figure {
	what := "every combination of steps"
	if !whole {
		what = "the steps switched on one after the other (there are too many combinations to look at all)"
	}
	return Figure{Resonance, "Lowest parallel resonance, " + level.name, low, "",
		fmt.Sprintf("Over %s, %d amounts of kvar, the resonance lies between orders %s and %s; %d of them lie within %g of an order that is strong or that converters make.",
			what, n, num(low), num(high), warned, near)}
}
