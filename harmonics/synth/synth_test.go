package synth_test

import (
	"math"
	"slices"
	"testing"
	"time"

	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
)

// read returns all samples of a source, channel by channel, and its blocks' positions.
func read(t *testing.T, s wave.Source) (rows [][]float64, blocks []wave.Block) {
	t.Helper()
	rows = make([][]float64, len(s.Header().Channels))
	for b, err := range s.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		for c := range rows {
			rows[c] = append(rows[c], b.Data[c]...)
		}
		b.Data = [][]float64{make([]float64, b.Len())}
		blocks = append(blocks, b)
	}
	return rows, blocks
}

var everything = synth.Recording{
	Name: "all", Start: time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC), Rate: 5001.7, Seconds: 3, Seed: 5,
	Frequency: synth.Frequency{Hz: 49.9, Ramp: 0.05, Steps: []synth.Step{{At: 1.2, Hz: 0.3}},
		Wander: []synth.Wander{{Hz: 0.04, Period: 2.5, Angle: 30}}},
	Channels: []synth.Channel{
		{Name: "U", Unit: "V", DC: 1.5, Skew: 20e-6,
			Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}, {Order: 5, RMS: 9, Angle: 40, ModHz: 3, Depth: 0.4, ModAngle: 70},
				{Order: 7, RMS: 4, Angle: -100, Load: func(t float64) float64 { return t / 3 }}, {Order: 61, RMS: 0.2, Angle: 9}},
			Tones: []synth.Tone{{Hz: 183.3, RMS: 2, Angle: 11, From: 0.5, To: 2.5}},
			Dips:  []synth.Dip{{At: 1, Length: 0.2, Depth: 0.35}}},
		{Name: "I", Unit: "A", Harmonics: []synth.Harmonic{{Order: 1, RMS: 40, Angle: -25}},
			Load: func(t float64) float64 { return 1 + 0.1*t }},
	},
}

// The slow way, term by term as the package comment writes it.
func TestSamplesAreTheSumOfTheirTerms(t *testing.T) {
	rows, _ := read(t, synth.New(everything))
	for c, ch := range everything.Channels {
		for n, got := range rows[c] {
			at := float64(n)/everything.Rate + ch.Skew
			var want float64
			for _, h := range ch.Harmonics {
				x := math.Sqrt2 * h.RMS * math.Cos(2*math.Pi*float64(h.Order)*everything.Frequency.Phase(at)+h.Angle*math.Pi/180)
				x *= 1 + h.Depth*math.Cos(2*math.Pi*h.ModHz*at+h.ModAngle*math.Pi/180)
				if h.Load != nil {
					x *= h.Load(at)
				}
				want += x
			}
			if ch.Load != nil {
				want *= ch.Load(at)
			}
			for _, d := range ch.Dips {
				if at >= d.At && at < d.At+d.Length {
					want *= 1 - d.Depth
				}
			}
			for _, tone := range ch.Tones {
				if at >= tone.From && at < tone.To {
					want += math.Sqrt2 * tone.RMS * math.Cos(2*math.Pi*tone.Hz*at+tone.Angle*math.Pi/180)
				}
			}
			want += ch.DC
			// 1e-9 of 325 V: the argument of the cosine reaches 6e4 rad here, where its last bit is 7e-12.
			if math.Abs(got-want) > 3e-7 {
				t.Fatalf("%s sample %d: %.12g, want %.12g", ch.Name, n, got, want)
			}
		}
	}
}

// The phase is the integral of the frequency: their trapezoidal sum over fine steps agrees.
func TestPhaseIsTheIntegralOfTheFrequency(t *testing.T) {
	f := everything.Frequency
	const steps = 300_000
	sum, dt := 0.0, 3.0/steps
	for i := range steps {
		at := float64(i) * dt
		sum += (f.At(at) + f.At(at+dt)) / 2 * dt
		if i%10_000 == 9_999 {
			// A step inside a trapezoid is half a step size off: 0.3 Hz × 10 µs / 2 = 1.5e-6 cycles.
			if got := f.Phase(at + dt); math.Abs(got-sum) > 3e-6 {
				t.Fatalf("phase at %g s is %.9f cycles, want %.9f", at+dt, got, sum)
			}
		}
	}
}

func TestReadingAgainAndInOtherBlocksGivesTheSameBits(t *testing.T) {
	r := everything
	r.Channels = slices.Clone(r.Channels)
	r.Channels[1].Noise = 0.3
	src := synth.New(r)
	first, _ := read(t, src)
	again, _ := read(t, src)
	r.BlockLen = 1000
	other, _ := read(t, synth.New(r))
	for c := range first {
		if len(first[c]) != 15005 {
			t.Fatalf("%d samples, want 3 s × 5001.7 Hz = 15005", len(first[c]))
		}
		for n, v := range first[c] {
			if again[c][n] != v || other[c][n] != v {
				t.Fatalf("channel %d sample %d: %v, then %v, in other blocks %v", c, n, v, again[c][n], other[c][n])
			}
		}
	}
}

func TestGapsStartSegments(t *testing.T) {
	r := synth.Recording{Rate: 1000, Seconds: 2, Frequency: synth.Frequency{Hz: 50}, BlockLen: 300,
		Channels: []synth.Channel{{Name: "U", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 1}},
			Missing: []synth.Span{{At: 1.9, Length: 0.01}}}},
		Gaps: []synth.Span{{At: 1.5, Length: 0.1}, {At: 0.25, Length: 0.5}}}
	src := synth.New(r)
	rows, blocks := read(t, src)
	if n := src.Header().Samples; n != 1400 || len(rows[0]) != 1400 {
		t.Errorf("header announces %d samples, %d came, want 1400", n, len(rows[0]))
	}
	type start struct {
		segment int
		at      float64
	}
	var starts []start
	for _, b := range blocks {
		if k := len(starts); k == 0 || starts[k-1].segment != b.Segment {
			starts = append(starts, start{b.Segment, b.At})
		}
	}
	want := []start{{0, 0}, {1, 0.75}, {2, 1.6}}
	if len(starts) != 3 || starts[0] != want[0] || starts[1] != want[1] || starts[2] != want[2] {
		t.Errorf("segments start %v, want %v", starts, want)
	}
	missing := 0
	for _, v := range rows[0] {
		if math.IsNaN(v) {
			missing++
		}
	}
	if missing != 10 {
		t.Errorf("%d samples are missing, want 10", missing)
	}
}

func TestDigitising(t *testing.T) {
	r := synth.Recording{Rate: 10_000, Seconds: 1, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{
		Name: "U", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}, Range: 300, Bits: 12}}}
	src := synth.New(r)
	rows, _ := read(t, src)
	step := src.Header().Channels[0].Step
	if step != 600.0/4096 {
		t.Errorf("step %g, want 600/4096", step)
	}
	lowest, highest := math.Inf(1), math.Inf(-1)
	for _, v := range rows[0] {
		if k := v / step; k != math.Round(k) {
			t.Fatalf("%v is not a whole number of steps", v)
		}
		lowest, highest = min(lowest, v), max(highest, v)
	}
	if lowest != -300 || highest != 300-step {
		t.Errorf("samples from %g to %g, want -300 to 300 less one step", lowest, highest)
	}
}

func TestNoiseHasItsRMS(t *testing.T) {
	const rms = 0.7
	r := synth.Recording{Rate: 10_000, Seconds: 20, Frequency: synth.Frequency{Hz: 50}, Seed: 1,
		Channels: []synth.Channel{{Name: "a", Unit: "V", Noise: rms}, {Name: "b", Unit: "V", Noise: rms}}}
	rows, _ := read(t, synth.New(r))
	var aa, bb, ab float64
	for n := range rows[0] {
		a, b := rows[0][n], rows[1][n]
		aa, bb, ab = aa+a*a, bb+b*b, ab+a*b
	}
	n := float64(len(rows[0]))
	// The rms of 200 000 normal values scatters by 1/√(2n) = 0.16 %, their correlation by 1/√n = 0.22 %: 5 sigma.
	if a, b := math.Sqrt(aa/n), math.Sqrt(bb/n); math.Abs(a/rms-1) > 0.008 || math.Abs(b/rms-1) > 0.008 {
		t.Errorf("noise of %g and %g, want %g", a, b, rms)
	}
	if c := ab / math.Sqrt(aa*bb); math.Abs(c) > 0.012 {
		t.Errorf("the channels' noises correlate by %g", c)
	}
}

// total distortion over orders 2 to top, of the first.
func thd(hs []synth.Harmonic, top int) float64 {
	var sum float64
	for _, h := range hs {
		if h.Order > 1 && h.Order <= top {
			sum += h.RMS * h.RMS
		}
	}
	return 100 * math.Sqrt(sum) / hs[0].RMS
}

// Series values: THD of the square wave to order 50 is 47.2971 %, of the six-pulse current 30.0153 %, and to order 25
// 29.0363 % (Fourier series of both, standard textbook results).
func TestIdealSpectra(t *testing.T) {
	for _, c := range []struct {
		name string
		hs   []synth.Harmonic
		top  int
		want float64
	}{
		{"square", synth.Square(1, 50), 50, 47.2971},
		{"six-pulse", synth.SixPulse(100, 50), 50, 30.0153},
		{"six-pulse", synth.SixPulse(100, 50), 25, 29.0363},
	} {
		if got := thd(c.hs, c.top); math.Abs(got-c.want) > 5e-5 {
			t.Errorf("%s to order %d: THD %.4f %%, want %.4f %%", c.name, c.top, got, c.want)
		}
	}
}

// The six-pulse current is +Id for ±60° about the crest, 0, -Id, and I1/Id = √6/π, 0.7797 (textbook). With orders to
// 5000 what is left of the Gibbs ripple away from the edges is small.
func TestSixPulseIsABlock(t *testing.T) {
	r := synth.Recording{Rate: 18_000, Seconds: 0.02, Frequency: synth.Frequency{Hz: 50},
		Channels: []synth.Channel{{Name: "I", Unit: "A", Harmonics: synth.SixPulse(math.Sqrt(6)/math.Pi*100, 5000)}}}
	rows, _ := read(t, synth.New(r))
	for degree, want := range map[int]float64{0: 100, 45: 100, 70: 0, 90: 0, 110: 0, 130: -100, 180: -100, 250: 0, 310: 100} {
		if got := rows[0][degree]; math.Abs(got-want) > 0.5 {
			t.Errorf("at %d°: %.2f A, want %.0f A", degree, got, want)
		}
	}
}

// A balanced set delayed by thirds has no sum but its triplens, which are in phase.
func TestDelayedMakesABalancedSet(t *testing.T) {
	hs := []synth.Harmonic{{Order: 1, RMS: 10, Angle: 20}, {Order: 3, RMS: 2, Angle: 50}, {Order: 5, RMS: 1, Angle: -70}, {Order: 7, RMS: 1}}
	r := synth.Recording{Rate: 3000, Seconds: 0.1, Frequency: synth.Frequency{Hz: 50}}
	for k, name := range []string{"1", "2", "3"} {
		r.Channels = append(r.Channels, synth.Channel{Name: name, Unit: "A", Harmonics: synth.Delayed(hs, float64(k)/3)})
	}
	rows, _ := read(t, synth.New(r))
	for n := range rows[0] {
		want := 3 * 2 * math.Sqrt2 * math.Cos(2*math.Pi*150*float64(n)/3000+50*math.Pi/180)
		if got := rows[0][n] + rows[1][n] + rows[2][n]; math.Abs(got-want) > 1e-9 {
			t.Fatalf("sum of sample %d is %g, want %g", n, got, want)
		}
		// The second phase is the first one later by a third of a cycle: 20 of 60 samples.
		if n >= 20 && math.Abs(rows[1][n]-rows[0][n-20]) > 1e-9 {
			t.Fatalf("second phase at sample %d is %g, the first was %g", n, rows[1][n], rows[0][n-20])
		}
	}
}

func BenchmarkEightChannels(b *testing.B) {
	r := synth.Recording{Rate: 12_800, Seconds: 10, Frequency: synth.Frequency{Hz: 50}}
	for range 8 {
		r.Channels = append(r.Channels, synth.Channel{Name: "I", Unit: "A", Harmonics: synth.SixPulse(100, 49), Noise: 0.1, Range: 400, Bits: 16})
	}
	for b.Loop() {
		for _, err := range synth.New(r).Blocks() {
			if err != nil {
				b.Fatal(err)
			}
		}
	}
	b.ReportMetric(float64(b.N)*128_000*8/b.Elapsed().Seconds(), "samples/s")
}
