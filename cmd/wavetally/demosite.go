package main

import (
	"math"
	"math/cmplx"
	"time"

	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
)

// The demonstration's site is invented: a bakery on a 400 V board with electric ovens, mixers on six-pulse drives and
// single-phase lighting. One thing about its recording is wrong on purpose: the sensor of phase 2 was put on the wrong
// way round, and the site sheet does not say so.

// demoStart is when the invented recording begins: 50 s before a ten-minute mark, on a baking morning.
var demoStart = time.Date(2026, 3, 11, 4, 39, 10, 0, time.UTC)

const (
	demoSeconds = 90
	demoRate    = 12800
	demoDemand  = 410   // A
	demoIsc     = 12500 // A
)

func demoSheet() site.Sheet {
	s := site.Sheet{
		Site: site.Identity{
			Name:       "Kestrel Lane bakery, board MB-1 (invented)",
			Location:   "main switchroom, incoming side of the main breaker",
			SurveyedBy: "wavetally demo",
			Purpose:    "Show the way from a recording to a report",
			Timezone:   "UTC",
		},
		Supply: site.Supply{
			Connection: site.Wye4, NominalVoltage: 400, NominalFrequency: 50, Point: "PCC",
			ShortCircuitCurrent: demoIsc, ShortCircuitCurrentMin: 9000, ShortCircuitSource: "network operator's letter, invented",
			DemandCurrent: demoDemand, DemandSource: "mean of 12 monthly peaks, invented",
			TransformerKVA: 630, TransformerImpedance: 6, TransformerEddyLoss: 0.10,
			CapacitorKvar: []float64{50, 50, 50},
		},
		Limits: site.Limits{Apply: []string{"ieee-519-2022", "en-50160"}},
	}
	for _, r := range []string{"V1", "V2", "V3", "I1", "I2", "I3", "IN"} {
		s.Channels = append(s.Channels, site.Channel{Source: demoNames[r], Measures: r, Scale: 1, Uncertainty: 0.5})
	}
	return s
}

// demoNames are the recorder's channel names.
var demoNames = map[string]string{"V1": "UL1", "V2": "UL2", "V3": "UL3", "I1": "IL1", "I2": "IL2", "I3": "IL3", "IN": "IN"}

// A component of the demonstration's voltage, in per cent of the fundamental, or of its current, in A, and its angle in
// degrees for phase 1.
type component struct {
	order       int
	size, angle float64
}

var demoVoltage = []component{{2, 0.06, 20}, {3, 0.55, -150}, {4, 0.04, 80}, {5, 2.6, 155}, {7, 1.5, -35}, {9, 0.2, 100}, {11, 1.0, 60},
	{13, 0.6, -120}, {17, 0.35, 10}, {19, 0.25, 170}, {23, 0.18, -80}, {25, 0.14, 40}}

// The drives' and the lights' currents at full work. Orders 3, 9, 15 are the lights', the others the drives'.
var demoCurrent = []component{{2, 0.5, 30}, {3, 10, 160}, {5, 22, 175}, {7, 12, -15}, {9, 3.6, -60}, {11, 12.6, 150}, {13, 5.2, -50}, {15, 1.2, 20},
	{17, 3.5, 120}, {19, 2.1, -90}, {23, 1.6, 80}, {25, 1.2, -140}, {29, 0.7, 45}, {31, 0.5, 170}, {35, 0.4, 0}, {37, 0.3, 110}}

// What differs between the phases.
var demoPhases = [3]struct {
	volts, amps, angle float64 // of the fundamental, rms and degrees
	order11            float64 // share of the 11th harmonic: a mixer's drive on two phases has lost a choke
}{
	{231.6, 366, -19, 1},
	{230.4, 352, -20, 1.06},
	{229.9, 371, -19.5, 0.97},
}

// ovens is the share of the ovens' load against time: some of their elements are switched on and off every half minute.
func ovens(t float64) float64 {
	_, cycle := math.Modf(t / 30)
	return 0.66 + 0.32*(rise(30*cycle, 2)-rise(30*cycle, 16))
}

// mixers is the share of the drives' work: a batch is kneaded from 25 s to 70 s.
func mixers(t float64) float64 { return 0.72 + 0.28*(rise(t, 25)-rise(t, 70)) }

// rise goes smoothly from 0 to 1 within three seconds around the given time.
func rise(t, at float64) float64 {
	x := min(max((t-at)/3+0.5, 0), 1)
	return x * x * (3 - 2*x)
}

// lights do not change.
func lights(float64) float64 { return 1 }

// partly is how a voltage harmonic follows the bakery's current: the rest comes from the neighbourhood.
func partly(load func(float64) float64) func(float64) float64 {
	return func(t float64) float64 { return 0.6 + 0.4*load(t) }
}

func loadOf(order int) func(float64) float64 {
	switch {
	case order == 1:
		return ovens
	case order%3 == 0:
		return lights
	}
	return mixers
}

// demoRecording makes the recorder's waveforms.
func demoRecording() synth.Recording {
	r := synth.Recording{
		Name: "board", Start: demoStart, Rate: demoRate, Seconds: demoSeconds, Nominal: 50, Seed: 519,
		Frequency: synth.Frequency{Hz: 50.012, Wander: []synth.Wander{{Hz: 0.018, Period: 47}, {Hz: 0.006, Period: 13, Angle: 70}}},
	}
	neutral := map[int]complex128{}
	var currents []synth.Channel
	for k, p := range demoPhases {
		phase := string("ABC"[k])
		third := float64(k) / 3
		volts := []synth.Harmonic{{Order: 1, RMS: p.volts}}
		for _, c := range demoVoltage {
			volts = append(volts, synth.Harmonic{Order: c.order, RMS: p.volts * c.size / 100, Angle: c.angle, Load: partly(loadOf(c.order))})
		}
		r.Channels = append(r.Channels, synth.Channel{Name: demoNames["V"+string("123"[k])], Unit: "V", Phase: phase,
			Harmonics: synth.Delayed(volts, third), Noise: 0.05, Range: 600, Bits: 16})

		amps := []synth.Harmonic{{Order: 1, RMS: p.amps, Angle: p.angle, Load: ovens}}
		for _, c := range demoCurrent {
			size := c.size
			if c.order == 11 {
				size *= p.order11
			}
			amps = append(amps, synth.Harmonic{Order: c.order, RMS: size, Angle: c.angle, Load: loadOf(c.order)})
		}
		amps = synth.Delayed(amps, third)
		for _, h := range amps {
			neutral[h.Order] += cmplx.Rect(h.RMS, h.Angle*math.Pi/180)
		}
		if k == 1 { // the sensor that points the wrong way
			for i := range amps {
				amps[i].Angle += 180
			}
		}
		currents = append(currents, synth.Channel{Name: demoNames["I"+string("123"[k])], Unit: "A", Phase: phase,
			Harmonics: amps, Noise: 0.05, Range: 1000, Bits: 16})
	}
	r.Channels = append(append(r.Channels, currents...), demoNeutral(neutral))
	return r
}

// demoNeutral carries the sum of the phases, of which little but the triplens is left.
func demoNeutral(sums map[int]complex128) synth.Channel {
	c := synth.Channel{Name: demoNames["IN"], Unit: "A", Phase: "N", Noise: 0.05, Range: 1000, Bits: 16}
	for order := 1; order <= 50; order++ {
		if rms, angle := cmplx.Polar(sums[order]); rms > 1e-9 {
			c.Harmonics = append(c.Harmonics, synth.Harmonic{Order: order, RMS: rms, Angle: angle * 180 / math.Pi, Load: loadOf(order)})
		}
	}
	return c
}
