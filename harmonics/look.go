package harmonics

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/dsp/window"
	"gonum.org/v1/gonum/stat"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// FirstLook looks at the first two seconds or so of a recording: enough to guess what each channel measures. Values are
// in the units the recording holds.
func FirstLook(src wave.Source) (site.Look, error) {
	h := src.Header()
	look := site.Look{Channels: make([]site.ChannelLook, len(h.Channels))}
	data := make([][]float64, len(h.Channels))
	var rate float64
	for b, err := range src.Blocks() {
		if err != nil {
			return look, err
		}
		if rate != 0 && b.Rate != rate {
			break
		}
		rate = b.Rate
		for k := range data {
			for _, v := range b.Data[k] {
				if v-v != 0 {
					v = 0
				}
				data[k] = append(data[k], v)
			}
		}
		if len(data) > 0 && (len(data[0]) >= lookMost || len(data[0]) >= lookLeast && float64(len(data[0])) >= acquireSeconds*rate) {
			break
		}
	}
	strongest := -1
	var best, share float64
	for k, x := range data {
		if len(x) == 0 {
			return look, nil
		}
		c := &look.Channels[k]
		var sum, mean float64
		for _, v := range x {
			sum += v * v
			mean += v / float64(len(x))
			c.Peak = max(c.Peak, math.Abs(v))
		}
		c.RMS, c.DC, c.THDPct = math.Sqrt(sum/float64(len(x))), mean, math.NaN()
		// A voltage says more about the frequency than a current of the same clarity; the unit, if given, tells.
		weight := 1.0
		if h.Channels[k].Unit == "V" {
			weight = 1e6
		}
		if f := acquire(x, rate, lowest50, highest60); f.clear && weight*f.rms > best {
			best, strongest, look.Frequency = weight*f.rms, k, f.hz
			share = f.rms * f.rms / (c.RMS*c.RMS - mean*mean)
		}
	}
	if strongest < 0 || share < dominant {
		// What lies in the mains' band may be a harmonic of a fundamental whose times are wrong.
		if look.TimeFactor = timeFactor(data, rate); look.TimeFactor != 0 || strongest < 0 {
			look.Frequency = 0
			return look, nil
		}
	}
	phasors := fundamentals(data, rate, look.Frequency)
	first := cmplx.Phase(phasors[0])
	for k, p := range phasors {
		c := &look.Channels[k]
		c.Fundamental = cmplx.Abs(p)
		c.Angle = degrees(p * cmplx.Rect(1, -first))
		if rest := c.RMS*c.RMS - c.DC*c.DC - c.Fundamental*c.Fundamental; c.Fundamental > 0 {
			c.THDPct = 100 * math.Sqrt(max(rest, 0)) / c.Fundamental
		}
	}
	return look, nil
}

// How many samples a channel are looked at, whatever the time base says: it may be wrong.
const lookLeast, lookMost = 4096, 1 << 18

// timeFactors are by what a time column is commonly wrong: milliseconds, microseconds or nanoseconds taken for seconds or
// the other way round, minutes or hours for seconds, and sampling rates off by a decade or by two.
var timeFactors = []float64{1e-3, 1e3, 1e-6, 1e6, 1e-9, 1e9, 1.0 / 60, 60, 1.0 / 3600, 3600, 0.1, 10, 0.01, 100, 0.5, 2}

// dominant is the share of a channel's power below which its supposed fundamental is not taken at its word.
const dominant = 0.2

// factorFit is how close to 50 or 60 Hz a wrong time base must come after correction: mains frequency keeps to it.
const factorFit = 0.004

// timeFactor looks for one component that stands for most of a channel's power, wherever it is, and says by which common
// factor times are wrong if that is the fundamental; 0 when none fits.
func timeFactor(data [][]float64, rate float64) float64 {
	for _, x := range data {
		n := min(len(x), lookMost)
		if n < 64 {
			continue
		}
		v := append([]float64(nil), x[:n]...)
		mean := stat.Mean(v, nil)
		for i := range v {
			v[i] -= mean
		}
		window.Hann(v)
		lines := fourier.NewFFT(n).Coefficients(nil, v)
		best, level, all := 0, 0.0, 0.0
		for k := 2; k < len(lines); k++ {
			p := square(lines[k])
			all += p
			if p > level {
				best, level = k, p
			}
		}
		if best < 2 || best+1 >= len(lines) || level+square(lines[best-1])+square(lines[best+1]) < 0.6*all {
			continue
		}
		a, b, c := math.Log(cmplx.Abs(lines[best-1])), math.Log(cmplx.Abs(lines[best])), math.Log(cmplx.Abs(lines[best+1]))
		hz := (float64(best) + (a-c)/(2*(a-2*b+c))) * rate / float64(n)
		for _, f := range timeFactors {
			for _, nominal := range []float64{50, 60} {
				if math.Abs(hz/f/nominal-1) < factorFit {
					return f
				}
			}
		}
	}
	return 0
}

// fundamentals returns the rms phasor of the fundamental of each channel over its whole cycles, under a Hann window.
func fundamentals(data [][]float64, rate, hz float64) []complex128 {
	out := make([]complex128, len(data))
	n := int(math.Floor(float64(len(data[0]))*hz/rate) * rate / hz)
	if n < 8 {
		return out
	}
	cos, sin := make([]float64, n), make([]float64, n)
	for i := range n {
		hann := (1 - math.Cos(2*math.Pi*float64(i)/float64(n))) / float64(n) * math.Sqrt2
		s, c := math.Sincos(2 * math.Pi * hz * float64(i) / rate)
		cos[i], sin[i] = hann*c, -hann*s
	}
	for k, x := range data {
		out[k] = complex(dot(cos, x[:n]), dot(sin, x[:n]))
	}
	return out
}
