package harmonics_test

import (
	"math"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
)

func near(t *testing.T, what string, got, want, tolerance float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s: %.6f, want %.6f", what, got, want)
	}
}

// The numeric example of IEEE 1459-2010, annex B (inputs from memory, results recomputed; standards.md 9.3), measured
// on waveforms rather than put into formulas.
func TestAnnexExampleOfIEEE1459(t *testing.T) {
	v := []synth.Harmonic{{Order: 1, RMS: 100}, {Order: 3, RMS: 8, Angle: -70}, {Order: 5, RMS: 15, Angle: 140}, {Order: 7, RMS: 5, Angle: 20}}
	i := []synth.Harmonic{{Order: 1, RMS: 100, Angle: -30}, {Order: 3, RMS: 20, Angle: -165}, {Order: 5, RMS: 15, Angle: 233}, {Order: 7, RMS: 10, Angle: 288}}
	r := synth.Recording{Rate: 12800, Seconds: 5, Frequency: synth.Frequency{Hz: 60.02}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: v}, {Name: "I1", Unit: "A", Harmonics: i}}}
	sheet := sheetFor(60, "V1", "I1")
	sheet.Supply.Connection = site.SinglePhase
	s := measure(t, r, sheet)
	if len(s.Power.Phases) != 1 {
		t.Fatalf("%d phases", len(s.Power.Phases))
	}
	p := s.Power.Phases[0]
	const tol = 0.05 // W, var, VA: 5 millionths of the apparent power
	near(t, "P", p.P, 8632.7886, tol)
	near(t, "P1", p.P1, 8660.2540, tol)
	near(t, "PH", p.PH, -27.4655, tol)
	near(t, "Q1", p.Q1, 5000, tol)
	near(t, "S", p.S, 10517.4926, tol)
	near(t, "S1", p.S1, 10000, tol)
	near(t, "SN", p.SN, 3258.4736, 0.2)
	near(t, "DI", p.DI, 2692.5824, 0.2)
	near(t, "DV", p.DV, 1772.0045, 0.2)
	near(t, "SH", p.SH, 477.1268, 0.2)
	near(t, "DH", p.DH, 476.3357, 0.2)
	near(t, "N", p.N, 6007.7127, 0.2)
	near(t, "PF", p.PF, 0.820803, 1e-5)
	near(t, "PF1", p.PF1, 0.866025, 1e-5)
	for h, want := range map[int][3]float64{1: {8660.2540, 5000, 30}, 3: {-13.9449, 159.3912, 95}, 5: {-11.7756, -224.6916, -93}, 7: {-1.7450, 49.9695, 92}} {
		near(t, "P of an order", p.Orders[h-1].P, want[0], tol)
		near(t, "Q of an order", p.Orders[h-1].Q, want[1], tol)
		near(t, "angle of an order", p.Orders[h-1].Theta, want[2], 0.01)
	}
}

// Effective voltage and current of IEEE 1459-2010, 3.2.2 (standards.md 9.2, recomputed).
func TestEffectiveQuantities(t *testing.T) {
	four := harmonics.EffectiveOf(harmonics.ThreePhase{FourWire: true, V: [3]float64{230, 225, 235}, Between: [3]float64{398, 394, 402},
		I: [3]float64{100, 80, 60}, In: 50})
	near(t, "four-wire Ve", four.Ve, 229.914718, 1e-6)
	near(t, "four-wire Ie", four.Ie, 86.602540, 1e-6)
	three := harmonics.EffectiveOf(harmonics.ThreePhase{Between: [3]float64{398, 394, 402}, I: [3]float64{100, 80, 60}})
	near(t, "three-wire Ve", three.Ve, 229.793144, 1e-6)
	near(t, "three-wire Ie", three.Ie, 81.649658, 1e-6)
}

// One phase loaded with 100 A at unity power factor on a balanced 230 V four-wire supply: Ie 81.649658 A,
// Se 56338.26 VA, PFe 0.408248, arithmetic and vector apparent power 23000 VA (standards.md 9.2).
func TestOnePhaseLoaded(t *testing.T) {
	one := func(rms, angle float64) []synth.Harmonic { return []synth.Harmonic{{Order: 1, RMS: rms, Angle: angle}} }
	r := synth.Recording{Rate: 6400, Seconds: 3, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: one(230, 0)}, {Name: "V2", Unit: "V", Harmonics: one(230, -120)}, {Name: "V3", Unit: "V", Harmonics: one(230, 120)},
		{Name: "I1", Unit: "A", Harmonics: one(100, 0)}, {Name: "I2", Unit: "A", Harmonics: one(0, 0)}, {Name: "I3", Unit: "A", Harmonics: one(0, 0)}}}
	sheet := sheetFor(50, "V1", "V2", "V3", "I1", "I2", "I3")
	sheet.Supply.Connection = site.Wye4
	p := measure(t, r, sheet).Power
	near(t, "Ie", p.Effective.Ie, 81.649658, 1e-4)
	near(t, "Se", p.Effective.Se, 56338.26, 0.1)
	near(t, "P", p.Effective.P, 23000, 0.05)
	near(t, "PFe", p.Effective.PFe, 0.408248, 1e-6)
	near(t, "arithmetic", p.Effective.Arithmetic, 23000, 0.05)
	near(t, "vector", p.Effective.Vector, 23000, 0.05)
	near(t, "neutral", p.Neutral.RMS, 100, 1e-3)
	if !p.Neutral.Computed {
		t.Error("a neutral current that was not measured is not marked as computed")
	}
	near(t, "i2", p.Unbalance.I2, 100, 1e-3) // of one loaded phase, all three components are equal
	near(t, "i0", p.Unbalance.I0, 100, 1e-3)
}

// The two routes to the negative-sequence unbalance agree (IEC 61000-4-30, 5.7; values of standards.md 5.8, recomputed).
func TestUnbalance(t *testing.T) {
	for _, c := range []struct{ a, b, c, want float64 }{
		{400, 400, 400, 0}, {400, 392, 396, 1.166448}, {230, 218, 224, 3.094522}, {400, 380, 400, 3.362972},
	} {
		near(t, "u2 from line-to-line values", harmonics.LineUnbalance(c.a, c.b, c.c), c.want, 1e-6)
	}
	for _, c := range []struct {
		v          [3][2]float64
		u2, u0     float64
		u1, v2, v0 float64
	}{
		{[3][2]float64{{230, 0}, {220, -120}, {225, 120}}, 1.283001, 1.283001, 225, 2.886751, 2.886751},
		{[3][2]float64{{1, 0}, {0.9, -125}, {1.05, 118}}, 3.321467, 6.447333, 0.9827276, 0.0326410, 0.0633597},
	} {
		r := synth.Recording{Rate: 6400, Seconds: 2, Frequency: synth.Frequency{Hz: 50}}
		for k, name := range []string{"V1", "V2", "V3"} {
			r.Channels = append(r.Channels, synth.Channel{Name: name, Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: c.v[k][0], Angle: c.v[k][1]}}})
		}
		s := measure(t, r, sheetFor(50, "V1", "V2", "V3"))
		u, q := s.Power.Unbalance, s.Power.Sequence[0]
		near(t, "u2", u.U2, c.u2, 1e-4)
		near(t, "u0", u.U0, c.u0, 1e-4)
		near(t, "u2 from line-to-line values", u.U2Line, c.u2, 1e-4)
		near(t, "U1", q.VPos, c.u1, 1e-5*c.u1)
		near(t, "U2", q.VNeg, c.v2, 1e-5*c.u1)
		near(t, "U0", q.VZero, c.v0, 1e-5*c.u1)
	}
}

// Balanced harmonics turn as their order says: h mod 3 = 1 positive, 2 negative, 0 zero (standards.md 10); zero-sequence
// currents add in the neutral, 3·I3: 70 % third gives 2.1 of the fundamental and 172.04 % of the line current (practice.md
// A10, a building-services guide of 2000).
func TestSequenceOfOrdersAndNeutral(t *testing.T) {
	hs := []synth.Harmonic{{Order: 1, RMS: 100}, {Order: 3, RMS: 70, Angle: 12}, {Order: 4, RMS: 3}, {Order: 5, RMS: 5, Angle: 50}, {Order: 7, RMS: 4}, {Order: 9, RMS: 2}}
	r := synth.Recording{Rate: 6400, Seconds: 2, Frequency: synth.Frequency{Hz: 50}}
	for k, name := range []string{"I1", "I2", "I3"} {
		r.Channels = append(r.Channels, synth.Channel{Name: name, Unit: "A", Harmonics: synth.Delayed(hs, float64(k)/3)})
	}
	sheet := sheetFor(50, "I1", "I2", "I3")
	sheet.Supply.Connection = site.Wye4
	p := measure(t, r, sheet).Power
	for _, w := range hs {
		q := p.Sequence[w.Order-1]
		got := [3]float64{q.IZero, q.IPos, q.INeg}
		for m, v := range got {
			want := 0.0
			if w.Order%3 == m {
				want = w.RMS
			}
			near(t, "sequence of an order", v, want, 0.003)
		}
	}
	near(t, "neutral h3", p.Neutral.H[3], 210, 0.01)
	near(t, "neutral triplens", p.Neutral.TriplenRMS, math.Hypot(210, 6), 0.01)

	r.Channels = r.Channels[:0]
	for k, name := range []string{"I1", "I2", "I3"} {
		r.Channels = append(r.Channels, synth.Channel{Name: name, Unit: "A", Harmonics: synth.Delayed(hs[:2], float64(k)/3)})
	}
	s := measure(t, r, sheet)
	near(t, "neutral over line current", 100*s.Power.Neutral.RMS/s.Channels[0].RMS, 172.04, 0.01)
}

// On a three-wire supply with line-to-line voltages, the power is that of the three lines whatever the earth is at.
func TestThreeWirePower(t *testing.T) {
	one := func(rms, angle float64) []synth.Harmonic { return []synth.Harmonic{{Order: 1, RMS: rms, Angle: angle}} }
	r := synth.Recording{Rate: 6400, Seconds: 2, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "V12", Unit: "V", Harmonics: one(400, 30)}, {Name: "V23", Unit: "V", Harmonics: one(400, -90)}, {Name: "V31", Unit: "V", Harmonics: one(400, 150)},
		{Name: "I1", Unit: "A", Harmonics: one(50, -30)}, {Name: "I2", Unit: "A", Harmonics: one(50, -150)}, {Name: "I3", Unit: "A", Harmonics: one(50, 90)}}}
	sheet := sheetFor(50, "V12", "V23", "V31", "I1", "I2", "I3")
	sheet.Supply.Connection = site.Delta3
	p := measure(t, r, sheet).Power
	near(t, "P", p.Effective.P, math.Sqrt(3)*400*50*math.Cos(math.Pi/6), 0.5)
	near(t, "Se", p.Effective.Se, math.Sqrt(3)*400*50, 0.5)
	near(t, "Q1+", p.Effective.Q1Pos, math.Sqrt(3)*400*50/2, 0.5)
	if p.Effective.FourWire || p.Neutral != nil || !math.IsNaN(p.Unbalance.U0) {
		t.Error("a three-wire supply has a neutral or a zero sequence")
	}
}
