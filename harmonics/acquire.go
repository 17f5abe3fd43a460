package harmonics

import (
	"math"
	"math/cmplx"

	"gonum.org/v1/gonum/dsp/fourier"
	"gonum.org/v1/gonum/dsp/window"
	"gonum.org/v1/gonum/stat"
)

// Ranges in which a fundamental is looked for, in Hz: those over which IEC 61000-4-30 class A measures frequency, and
// some margin so that a value at the edge still has a peak.
const (
	lowest50, highest50 = 42.0, 58.0
	lowest60, highest60 = 50.5, 69.5
)

// band returns the range in which to look for the fundamental of a supply of the given nominal frequency, 0 when it is
// not known.
func band(nominal float64) (low, high float64) {
	switch nominal {
	case 50:
		return lowest50, highest50
	case 60:
		return lowest60, highest60
	}
	return lowest50, highest60
}

// acquireSeconds is how much of a recording is looked at to find the fundamental.
const acquireSeconds = 2.0

// A found fundamental: clear is false when nothing stands out of its surroundings.
type found struct {
	hz, rms float64
	clear   bool
}

// acquire finds the strongest component of x within [low, high] Hz, at the given sampling rate. The fundamental need
// not be the strongest component of all: a current may hold more third harmonic than fundamental.
//
// It is clear when it has at least a thousandth of the whole power and twenty times what its surroundings have on
// average: pure noise reaches that once in ten million looks (some thirty lines, exponentially distributed).
func acquire(x []float64, rate, low, high float64) found {
	x, rate = coarse(x[:min(len(x), int(acquireSeconds*rate))], rate)
	n := len(x)
	if n < 16 || float64(n) < 2*rate/low {
		return found{}
	}
	mean := stat.Mean(x[:n], nil)
	var power float64
	v := make([]float64, n)
	for i := range v {
		v[i] = x[i] - mean
		power += v[i] * v[i] / float64(n)
	}
	if power == 0 || math.IsNaN(power) || math.IsInf(power, 0) {
		return found{}
	}
	size := 1
	for size < 4*n {
		size *= 2 // padding only draws the peak finer; nothing is measured from it
	}
	window.Hann(v)
	v = append(v, make([]float64, size-n)...)
	lines := fourier.NewFFT(size).Coefficients(nil, v)
	step := rate / float64(size)
	from, to := max(1, int(low/step)), min(len(lines)-2, int(high/step)+1)
	best, level := 0, 0.0
	for k := from; k <= to; k++ {
		if a := cmplx.Abs(lines[k]); a > level {
			best, level = k, a
		}
	}
	if best == 0 {
		return found{}
	}
	// A parabola through the logarithms of three lines: the Hann window's main lobe is close to one.
	a, b, c := math.Log(cmplx.Abs(lines[best-1])), math.Log(level), math.Log(cmplx.Abs(lines[best+1]))
	shift := 0.0
	if bend := a - 2*b + c; bend < 0 {
		shift = (a - c) / (2 * bend)
	}
	f := found{hz: (float64(best) + shift) * step, rms: 2 * level / float64(n) * math.Sqrt2}
	lobe := 2*rate/float64(n) + 2*step
	var around float64
	var count int
	for k := from; k <= to; k++ {
		if math.Abs(float64(k)*step-f.hz) > lobe {
			a := cmplx.Abs(lines[k])
			around += a * a
			count++
		}
	}
	standsOut := count < 4 || level*level > 20*around/float64(count)
	f.clear = f.rms*f.rms > power/1000 && standsOut
	return f
}

// coarseRate is enough to see a fundamental.
const coarseRate = 1600

// coarse brings x down to a rate of at least coarseRate by averaging runs of samples, twice as wide as they are apart.
// What folds down onto the fundamental that way is a few thousandths of a high harmonic: enough to find it.
func coarse(x []float64, rate float64) ([]float64, float64) {
	run := int(rate / coarseRate)
	if run < 2 || len(x) < 4*run {
		return x, rate
	}
	sums := make([]float64, len(x)/run)
	for i := range sums {
		for _, v := range x[i*run : (i+1)*run] {
			sums[i] += v
		}
	}
	out := make([]float64, len(sums)-1)
	for i := range out {
		out[i] = (sums[i] + sums[i+1]) / float64(2*run)
	}
	return out, rate / float64(run)
}
