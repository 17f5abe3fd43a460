package harmonics_test

import (
	"context"
	"math"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
)

func sheetFor(nominal float64, roles ...string) site.Sheet {
	var s site.Sheet
	s.Supply.NominalFrequency = nominal
	for _, r := range roles {
		s.Channels = append(s.Channels, site.Channel{Source: r, Measures: r})
	}
	return s
}

func measure(t testing.TB, r synth.Recording, sheet site.Sheet) *harmonics.Summary {
	t.Helper()
	s, err := harmonics.Measure(context.Background(), synth.New(r), sheet, harmonics.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// spread gives every order from 2 to top an amplitude and an angle of its own, without a pattern that could hide a
// mistake: the amplitudes fall like a real spectrum's.
func spread(fundamental float64, top int) []synth.Harmonic {
	hs := []synth.Harmonic{{Order: 1, RMS: fundamental}}
	for h := 2; h <= top; h++ {
		share := 0.06 / math.Sqrt(float64(h)) * (0.6 + 0.4*math.Cos(float64(h*h)))
		hs = append(hs, synth.Harmonic{Order: h, RMS: fundamental * share, Angle: math.Mod(float64(h)*97.3, 360) - 180})
	}
	return hs
}

// The bounds of the first row of the accuracy table: steady signals.
const (
	boundOfFundamental = 0.002  // % of the fundamental
	boundOfReading     = 0.02   // % of reading, where it is 1 % of the fundamental or more
	boundAngle         = 0.01   // degrees × order
	boundFrequency     = 0.0005 // Hz
	boundTHD           = 0.002  // points
)

func TestAccuracySteady(t *testing.T) {
	t.Log("nominal    f Hz     rate Hz   top | worst: of fundamental %  of reading %  angle °/order  f mHz   THD points")
	for _, nominal := range []float64{50, 60} {
		for _, share := range []float64{0.85, 0.962, 0.9987, 1, 1.0031, 1.15} {
			for _, rate := range []float64{3200, 6400, 7680, 10000, 12800, 15360, 20000, 44100, 51200, 96000, 250e3, 1e6} {
				if rate > 1e5 && share != 0.9987 {
					continue
				}
				accuracySteady(t, nominal, nominal*share, rate)
			}
		}
	}
}

func accuracySteady(t *testing.T, nominal, hz, rate float64) {
	top := min(50, int(0.8*rate/2/hz))
	r := synth.Recording{Rate: rate, Seconds: 1.3, Frequency: synth.Frequency{Hz: hz}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: spread(230, top)},
		{Name: "I1", Unit: "A", Harmonics: synth.Delayed(spread(10, top), 0.07)},
	}}
	s := measure(t, r, sheetFor(nominal, "V1", "I1"))
	var ofFundamental, ofReading, angle, thd float64
	for k, c := range s.Channels {
		want := r.Channels[k].Harmonics
		var sum float64
		for _, w := range want {
			got := c.H(w.Order)
			e := 100 * math.Abs(got.RMS-w.RMS)
			ofFundamental = max(ofFundamental, e/want[0].RMS)
			if w.RMS >= want[0].RMS/100 {
				ofReading = max(ofReading, e/w.RMS)
				turn := math.Mod(got.Angle-w.Angle+540, 360) - 180
				angle = max(angle, math.Abs(turn)/float64(w.Order))
			}
			if w.Order > 1 {
				sum += w.RMS * w.RMS
			}
		}
		thd = max(thd, math.Abs(c.THDPct-100*math.Sqrt(sum)/want[0].RMS))
		if !(ofFundamental <= boundOfFundamental) || !(ofReading <= boundOfReading) || !(angle <= boundAngle) || !(thd <= boundTHD) {
			t.Errorf("%s beyond the bounds", c.Role)
		}
	}
	f := math.Max(math.Abs(s.Frequency.Max-hz), math.Abs(s.Frequency.Min-hz))
	if !(f <= boundFrequency) {
		t.Errorf("frequency between %.5f and %.5f, want %.5f", s.Frequency.Min, s.Frequency.Max, hz)
	}
	t.Logf("%4.0f  %9.4f  %9.0f  %4d | %21.5f  %12.4f  %13.5f  %6.4f  %11.5f", nominal, hz, rate, top, ofFundamental, ofReading, angle, 1000*f, thd)
}
