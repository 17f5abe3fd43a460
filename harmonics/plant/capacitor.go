package plant

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// Stress is what harmonics do to a capacitor, in per unit of its rated values.
type Stress struct {
	Voltage float64 // rms
	Peak    float64 // highest possible: all orders' peaks at once
	Current float64 // rms
	Kvar    float64
}

// Limits of a shunt capacitor in continuous service, per unit (IEEE 18, from memory; IEC 60831 allows 1.1 in voltage, 8 h a
// day, and 1.3 in current).
var capacitorLimits = Stress{Voltage: 1.10, Peak: 1.20, Current: 1.35, Kvar: 1.35}

// CapacitorStress returns the stress of a capacitor rated for the nominal voltage on a supply voltage v in per unit of
// it. detuning is the share p of the series reactor, XL/XC at the fundamental, 0 for none: with it the capacitor sees
// Vh/|1 - p·h²| of each order.
func CapacitorStress(v Spectrum, detuning float64) Stress {
	var s Stress
	for n := 1; n < len(v); n++ {
		h := float64(n)
		u := v[n] / math.Abs(1-detuning*h*h)
		s.Voltage += u * u
		s.Peak += u
		s.Current += h * h * u * u
		s.Kvar += h * u * u
	}
	s.Voltage, s.Current = math.Sqrt(s.Voltage), math.Sqrt(s.Current)
	return s
}

// TunedOrder is the order at which a bank with reactor share p is in series resonance: 1/√p.
func TunedOrder(p float64) float64 { return 1 / math.Sqrt(p) }

// DetunedVoltage is the fundamental voltage across the capacitor of a bank with reactor share p, in per unit of the
// supply's: 1/(1-p).
func DetunedVoltage(p float64) float64 { return 1 / (1 - p) }

func (s *screening) capacitor() {
	p := s.supply.CapacitorDetuning / 100
	if len(s.supply.CapacitorKvar) == 0 {
		return
	}
	if p > 0 {
		s.detuned(p)
	}
	if s.supply.NominalVoltage == 0 {
		return
	}
	of := func(c *harmonics.ChannelSummary) Stress {
		return CapacitorStress(spectrumOf(c).Per(s.supply.NominalOf(c.Role)), p)
	}
	c, _ := worst(s.acrossLines(), func(c *harmonics.ChannelSummary) float64 { return of(c).Current })
	if c == nil {
		return
	}
	stress := of(c)
	bank := "capacitors rated for the nominal voltage"
	if p > 0 {
		bank += fmt.Sprintf(" behind reactors of %s %%", num(100*p))
	}
	note := ""
	if !c.Role.LineToLine() && s.supply.ThreePhase() {
		note = " Recorded to neutral: orders 3, 9 and so on do not reach a bank between the lines, so this is on the safe side."
	}
	for _, f := range []struct {
		name, means  string
		value, limit float64
	}{
		{"Capacitor current", "the rms current", stress.Current, capacitorLimits.Current},
		{"Capacitor voltage, rms", "the rms voltage", stress.Voltage, capacitorLimits.Voltage},
		{"Capacitor voltage, peak", "the peak voltage, were all orders' peaks to meet,", stress.Peak, capacitorLimits.Peak},
		{"Capacitor kvar", "the reactive power", stress.Kvar, capacitorLimits.Kvar},
	} {
		verdict := "below"
		if f.value > f.limit {
			verdict = "above"
		}
		s.add(Figure{Capacitor, f.name, 100 * f.value, "%",
			fmt.Sprintf("%s: %s of %s is %s %% of rated, %s the %s %% of IEEE 18 (from memory).%s", c.Role, f.means, bank, num(100*f.value), verdict, num(100*f.limit), note)})
		note = ""
	}
}

func (s *screening) detuned(p float64) {
	order := TunedOrder(p)
	text := fmt.Sprintf("Reactors of %s %% tune the bank to order %s", num(100*p), num(order))
	if s.supply.NominalFrequency > 0 {
		text += fmt.Sprintf(" (%s Hz)", num(order*s.supply.NominalFrequency))
	}
	text += fmt.Sprintf(", and its capacitors see %s %% of the supply's voltage.", num(100*DetunedVoltage(p)))
	for _, h := range s.strongOrders() {
		if float64(h) < order {
			text += fmt.Sprintf(" Order %d is strong here and below that: the bank is capacitive there and can amplify it.", h)
			break
		}
	}
	s.add(Figure{Capacitor, "Tuned order of the detuned bank", order, "", text})
}
