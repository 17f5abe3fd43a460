package harmonics_test

import (
	"math"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/synth"
)

// misread is a recording whose times are all multiplied by a factor, as a wrong unit of the time column does.
func misread(factor float64) *held {
	r := synth.Recording{Rate: 12800, Seconds: 2.5, Frequency: synth.Frequency{Hz: 49.98}, Channels: []synth.Channel{
		{Name: "V1", Unit: "V", Harmonics: distorted(230), DC: 3}}}
	h := hold(synth.New(r))
	h.header.Rate /= factor
	for i := range h.blocks {
		h.blocks[i].Rate /= factor
		h.blocks[i].At *= factor
	}
	return h
}

func TestWrongTimeBaseIsRecognised(t *testing.T) {
	for _, factor := range []float64{1000, 1e-3, 1e6, 60, 10, 0.5} {
		src := misread(factor)
		look, err := harmonics.FirstLook(src)
		if err != nil {
			t.Fatal(err)
		}
		if want := 1 / factor; math.Abs(look.TimeFactor/want-1) > 1e-9 {
			t.Errorf("times %g times too long: factor %g, want %g", factor, look.TimeFactor, want)
		}
		d, ok := fitness.TimeBase(src.header, look)
		if rate := d.Evidence["corrected_hz"]; !ok || math.Abs(rate-12800) > 1e-6 {
			t.Errorf("times %g times too long: doubt %v %q", factor, ok, d.Text)
		}
	}
	look, err := harmonics.FirstLook(misread(1))
	if err != nil || look.TimeFactor != 0 || math.Abs(look.Frequency-49.98) > 0.02 {
		t.Errorf("a sound recording: %+v, %v", look, err)
	}
	noise := hold(synth.New(synth.Recording{Rate: 12800, Seconds: 2.5, Channels: []synth.Channel{{Name: "V1", Unit: "V", Noise: 5}}}))
	if look, _ := harmonics.FirstLook(noise); look.TimeFactor != 0 || look.Frequency != 0 {
		t.Errorf("noise: %+v", look)
	}
}

// A first look gives levels and angles good enough to guess roles by.
func TestFirstLookLevels(t *testing.T) {
	r := synth.Recording{Rate: 12800, Seconds: 3, Frequency: synth.Frequency{Hz: 59.95}, Channels: []synth.Channel{
		{Name: "a", Unit: "V", Harmonics: distorted(230)}, {Name: "b", Unit: "A", Harmonics: synth.Delayed(distorted(10), 1.0/3), DC: 1}}}
	look, err := harmonics.FirstLook(synth.New(r))
	if err != nil {
		t.Fatal(err)
	}
	near(t, "frequency", look.Frequency, 59.95, 0.02)
	near(t, "fundamental of a", look.Channels[0].Fundamental, 230, 0.5)
	near(t, "angle of b", look.Channels[1].Angle, -120, 0.5)
	near(t, "dc of b", look.Channels[1].DC, 1, 0.02)
	near(t, "THD of b", look.Channels[1].THDPct, 24.74, 0.5)
}
