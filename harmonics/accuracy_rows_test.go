package harmonics_test

import (
	"math"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/synth"
)

// distorted has 25 % THD on odd orders, each at 1 % or more.
func distorted(fundamental float64) []synth.Harmonic {
	hs := []synth.Harmonic{{Order: 1, RMS: fundamental}}
	for _, h := range []struct {
		order      int
		pct, angle float64
	}{{3, 12, 20}, {5, 17, 140}, {7, 11, -70}, {9, 4, 90}, {11, 5, 33}, {13, 3, -120}, {17, 2, 5}, {19, 1.5, 170}, {23, 1, -10}, {25, 1, 60}} {
		hs = append(hs, synth.Harmonic{Order: h.order, RMS: fundamental * h.pct / 100, Angle: h.angle})
	}
	return hs
}

// Second row: 25 % THD, 2 % interharmonics, white noise 40 dB below the fundamental. f to 5 mHz, harmonics of 1 % and
// more to 0.5 % of reading over a minute, and no even order above the stated noise floor.
//
// A subgroup is a root of a sum of squares, so noise adds to it: at 6400 Hz the noise of 1 % is spread over 640 lines,
// and three of them add 0.25 % to a harmonic of 1 %. Below about 4 kHz that alone is more than 0.5 %, and no averaging
// takes it away; Harmonic.Floor says how much it is.
func TestAccuracyNoise(t *testing.T) {
	t.Log("f Hz      rate Hz | f mHz (worst window)  worst of reading %   noise floor h6 %  false evens")
	for _, nominal := range []float64{50, 60} {
		for _, rate := range []float64{6400, 12800, 51200} {
			for _, off := range []float64{-0.21, 0, 0.083} {
				hz := nominal + off
				r := synth.Recording{Rate: rate, Seconds: 60, Frequency: synth.Frequency{Hz: hz}, Seed: 11, Channels: []synth.Channel{{
					Name: "V1", Unit: "V", Harmonics: distorted(100), Noise: 1,
					Tones: []synth.Tone{{Hz: nominal * 1.43, RMS: 1}, {Hz: nominal * 3.57, RMS: 1.4, Angle: 50}, {Hz: nominal * 7.61, RMS: 1}},
				}}}
				s := measure(t, r, sheetFor(nominal, "V1"))
				f := 1000 * max(math.Abs(s.Frequency.Max-hz), math.Abs(s.Frequency.Min-hz))
				c := &s.Channels[0]
				var reading float64
				for _, w := range r.Channels[0].Harmonics {
					reading = max(reading, 100*math.Abs(c.H(w.Order).RMS/w.RMS-1))
				}
				evens := 0
				for h := 2; h <= harmonics.MaxOrder; h += 2 {
					if c.H(h).Above {
						evens++
						t.Errorf("%g Hz at %g Hz: order %d at %.4f %% is called above its noise floor of %.4f %%", hz, rate, h, c.H(h).Pct, c.H(h).Floor)
					}
				}
				t.Logf("%8.3f  %7.0f | %20.2f  %18.3f  %17.4f  %11d", hz, rate, f, reading, c.H(6).Floor, evens)
				if !(f <= 5) || !(reading <= 0.5) {
					t.Errorf("%g Hz at %g Hz beyond the bounds", hz, rate)
				}
			}
		}
	}
}

// Third row: a frequency that drifts by 0.1 Hz/s or jumps by 0.5 Hz leaves harmonics right to 0.1 % of the fundamental
// in every window but the step's own, which is flagged.
func TestAccuracyUnsteady(t *testing.T) {
	const bound = 0.1
	for name, f := range map[string]synth.Frequency{
		"drift up":   {Hz: 49.4, Ramp: 0.1},
		"drift down": {Hz: 50.5, Ramp: -0.1},
		"step up":    {Hz: 49.9, Steps: []synth.Step{{At: 5.034, Hz: 0.5}}},
		"step down":  {Hz: 50.2, Steps: []synth.Step{{At: 4.983, Hz: -0.5}}},
		"mid window": {Hz: 49.9, Steps: []synth.Step{{At: 5.11, Hz: 0.5}}},
		"two steps":  {Hz: 50, Steps: []synth.Step{{At: 3.1, Hz: 0.5}, {At: 6.2, Hz: -0.5}}},
	} {
		r := synth.Recording{Rate: 12800, Seconds: 10, Frequency: f, Channels: []synth.Channel{
			{Name: "V1", Unit: "V", Harmonics: distorted(100)}}}
		worst, flagged := worstWindow(t, r)
		t.Logf("%-10s worst window %.4f %% of the fundamental, %d windows flagged", name, worst, flagged)
		if !(worst <= bound) {
			t.Errorf("%s: a window is off by %.4f %% of the fundamental", name, worst)
		}
		// A step within a few milliseconds of a window's end leaves that window good: it need not be flagged.
		if flagged > len(f.Steps) {
			t.Errorf("%s: %d windows flagged for %d steps", name, flagged, len(f.Steps))
		}
	}
}

// worstWindow returns the largest error of an order in an unflagged window, per cent of the fundamental, and the number
// of flagged windows.
func worstWindow(t *testing.T, r synth.Recording) (worst float64, flagged int) {
	t.Helper()
	windows, err := harmonics.WindowsOf(synth.New(r), sheetFor(50, "V1"))
	if err != nil || len(windows) < 40 {
		t.Fatalf("%d windows, %v", len(windows), err)
	}
	want := make([]float64, harmonics.Orders)
	for _, h := range r.Channels[0].Harmonics {
		want[h.Order] = h.RMS
	}
	for _, w := range windows {
		if w.Flags != 0 {
			flagged++
			continue
		}
		for h := 1; h < harmonics.Orders; h++ {
			worst = max(worst, 100*math.Abs(w.Group[h]-want[h])/want[1])
		}
	}
	return worst, flagged
}

// Fourth row: the subgroup of a harmonic whose amplitude is modulated holds the side lines: A·√(1+m²/2) for 5 Hz at
// 50 Hz (standards.md 5.2 works it out for m = 0.2: 1.009950 A).
func TestAccuracyModulated(t *testing.T) {
	const depth = 0.2
	r := synth.Recording{Rate: 12800, Seconds: 60, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{
		Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 100}, {Order: 5, RMS: 10, ModHz: 5, Depth: depth}},
	}}}
	c := &measure(t, r, sheetFor(50, "V1")).Channels[0]
	if got, want := c.H(5).RMS, 10*1.009950; math.Abs(got-want) > 2e-5*want {
		t.Errorf("order 5 modulated by 20 %% at 5 Hz: %.6f, want %.6f", got, want)
	}
	// The two lines beside 187.5 Hz each read 2/π of the tone, and both lie in the centred subgroup above order 3;
	// the rest of the tone is spread over other lines. IEC 61000-4-7 annex A; "to about 1 %" in standards.md 5.2.
	r.Channels[0].Tones = []synth.Tone{{Hz: 187.5, RMS: 3}}
	c = &measure(t, r, sheetFor(50, "V1")).Channels[0]
	if got, atLeast := c.Inter[3], 3*math.Sqrt2*2/math.Pi; got < 0.99*atLeast || got > 3 {
		t.Errorf("a tone of 3 V at 187.5 Hz: centred subgroup above order 3 is %.4f, want between %.4f and 3", got, atLeast)
	}
	for _, hz := range []float64{1, 2, 4, 8} {
		r.Channels[0].Tones = nil
		r.Channels[0].Harmonics[1].ModHz = hz
		c := &measure(t, r, sheetFor(50, "V1")).Channels[0]
		// All the power of the order lies in its subgroup, but for what a modulation faster than a line spreads over
		// the next: between the carrier alone and everything.
		if got := c.H(5).RMS; got < 10 || got > 10*1.00996 {
			t.Errorf("order 5 modulated at %g Hz: %.5f, want 10 to 10.0995", hz, got)
		}
	}
}

// Fifth row: from 1 % to 150 % of the nominal range at 16 bits, errors are those of the first row and the rounding
// noise: a 16-bit step over ±150 % of range is 4.6e-5 of range, its rms a √12th, spread over 1280 lines.
func TestAccuracyAmplitudes(t *testing.T) {
	const full = 1000 // V, peak: the nominal range
	for _, share := range []float64{0.01, 0.03, 0.1, 0.5, 1, 1.4} {
		rms := share * full / math.Sqrt2 / 1.12
		r := synth.Recording{Rate: 12800, Seconds: 6, Frequency: synth.Frequency{Hz: 50.03}, Channels: []synth.Channel{
			{Name: "V1", Unit: "V", Harmonics: spread(rms, 50), Range: 1.5 * full, Bits: 16}}}
		c := &measure(t, r, sheetFor(50, "V1")).Channels[0]
		step := 3.0 * full / 65536
		noise := step / math.Sqrt(12) * math.Sqrt(3.0/1280)
		var worst float64
		for _, w := range r.Channels[0].Harmonics {
			worst = max(worst, math.Abs(c.H(w.Order).RMS-w.RMS))
		}
		bound := boundOfFundamental/100*rms + 4*noise
		t.Logf("%5.1f %% of range: worst error %.5f V, %.5f %% of the fundamental; bound %.5f V", 100*share, worst, 100*worst/rms, bound)
		if !(worst <= bound) {
			t.Errorf("%g %% of range: off by %g V, more than %g", 100*share, worst, bound)
		}
	}
}

// Sixth row: what to lock to.
func TestAccuracyLock(t *testing.T) {
	third := []synth.Harmonic{{Order: 1, RMS: 1}, {Order: 3, RMS: 8}, {Order: 5, RMS: 2}, {Order: 7, RMS: 1.5}}
	for name, test := range map[string]struct {
		channels []synth.Channel
		roles    []string
		want     string
	}{
		"currents only":                      {[]synth.Channel{{Name: "I1", Unit: "A", Harmonics: distorted(3)}, {Name: "I2", Unit: "A", Harmonics: distorted(9)}}, []string{"I1", "I2"}, "I2"},
		"one channel":                        {[]synth.Channel{{Name: "V3", Unit: "V", Harmonics: distorted(100)}}, []string{"V3"}, "V3"},
		"a fundamental weaker than its 3rd":  {[]synth.Channel{{Name: "IN", Unit: "A", Harmonics: third}}, []string{"IN"}, "IN"},
		"a voltage although a current rises": {[]synth.Channel{{Name: "I1", Unit: "A", Harmonics: distorted(500)}, {Name: "V2", Unit: "V", Harmonics: distorted(100)}}, []string{"I1", "V2"}, "V2"},
		"V1 although V2 is higher":           {[]synth.Channel{{Name: "V1", Unit: "V", Harmonics: distorted(100)}, {Name: "V2", Unit: "V", Harmonics: distorted(120)}}, []string{"V1", "V2"}, "V1"},
	} {
		r := synth.Recording{Rate: 12800, Seconds: 5, Frequency: synth.Frequency{Hz: 49.97}, Channels: test.channels}
		s := measure(t, r, sheetFor(50, test.roles...))
		if string(s.Reference) != test.want || math.Abs(s.Frequency.Mean-49.97) > boundFrequency {
			t.Errorf("%s: tracked on %s at %.5f Hz, want %s at 49.97 Hz", name, s.Reference, s.Frequency.Mean, test.want)
		}
		for k, ch := range s.Channels {
			for _, w := range test.channels[k].Harmonics {
				if name != "a voltage although a current rises" && name != "currents only" && name != "V1 although V2 is higher" && math.Abs(ch.H(w.Order).RMS-w.RMS) > boundOfFundamental/100*max(w.RMS, test.channels[k].Harmonics[0].RMS) {
					t.Errorf("%s: order %d is %.6f, want %.6f", name, w.Order, ch.H(w.Order).RMS, w.RMS)
				}
			}
		}
	}
	r := synth.Recording{Rate: 12800, Seconds: 5, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{Name: "V1", Unit: "V", Noise: 10}}}
	if _, err := harmonics.Measure(t.Context(), synth.New(r), sheetFor(50, "V1"), harmonics.Options{}); err != harmonics.ErrNoFundamental {
		t.Errorf("noise alone: %v, want %v", err, harmonics.ErrNoFundamental)
	}
}
