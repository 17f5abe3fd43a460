// Package resample reads a sampled, band-limited waveform between its samples.
//
// The interpolator is a sinc cut short by a Kaiser window (J. F. Kaiser, 1974; the length formula is in every textbook
// on digital filters): flat to [Spec.Pass], and down by more than [Attenuation] dB where the images of that band, or
// what would fold into it at a lower output rate, begin.
package resample

import (
	"fmt"
	"math"
)

// Attenuation is the ripple in the pass band and the rest in the stop band, in dB. 105 dB is an error of 0.0006 % of a
// component: a third of the tightest bound the measurement is held to. Kaiser's formulas are fits for long filters; the
// margin makes short ones keep the promise too.
const (
	Attenuation = 105
	margin      = 6
)

// Spec says what an interpolator is for. All are in Hz.
type Spec struct {
	In   float64 // sampling rate of the input
	Out  float64 // sampling rate of the output
	Pass float64 // highest frequency that must come through unchanged; below half of In and of Out
}

// A Kernel is an interpolator, as a table of its impulse response. It is read-only, and may be shared.
type Kernel struct {
	taps   int       // input samples behind one output sample; even
	phases int       // rows between one input sample and the next
	table  []float64 // [phase][tap], phases+1 rows
}

// MaxTaps bounds the work for one output sample; Spec that would need more (a pass band within a hair of half the
// rate) get this many and a softer edge.
const MaxTaps = 4096

// phases a half-period of the highest frequency the kernel holds: between rows the table is read by a straight line,
// whose error is (π/phases)²/24 of a coefficient, 0.4 millionths.
const fineness = 1024

// NewKernel designs an interpolator. It panics when the band does not fit the rates, a caller's bug.
func NewKernel(s Spec) *Kernel {
	low := min(s.In, s.Out)
	if !(s.Pass > 0 && 2*s.Pass < low) {
		panic(fmt.Sprintf("resample: a band of %g Hz does not fit rates of %g and %g Hz", s.Pass, s.In, s.Out))
	}
	// In cycles per input sample: the band that must be left alone ends at pass, what must be gone begins at stop,
	// and the sinc cuts half-way, at half the lower rate.
	width := (low - 2*s.Pass) / s.In
	cut := low / 2 / s.In
	taps := int(math.Ceil((Attenuation+margin-7.95)/(2.285*2*math.Pi*width))) + 2
	taps += taps % 2
	taps = min(max(taps, 4), MaxTaps)
	k := &Kernel{taps: taps, phases: max(16, int(math.Ceil(fineness*2*cut)))}
	k.fill(cut)
	return k
}

func (k *Kernel) fill(cut float64) {
	const beta = 0.1102 * (Attenuation + margin - 8.7)
	half := float64(k.taps) / 2
	k.table = make([]float64, (k.phases+1)*k.taps)
	for p := range k.phases + 1 {
		row := k.table[p*k.taps:][:k.taps]
		frac := float64(p) / float64(k.phases)
		var sum float64
		for i := range row {
			// Tap i sits at input sample floor(position) - taps/2 + 1 + i.
			t := float64(i) - half + 1 - frac
			edge := t / half
			row[i] = sinc(2*cut*t) * besselI0(beta*math.Sqrt(max(0, 1-edge*edge)))
			sum += row[i]
		}
		for i := range row { // a constant comes through as itself, whatever the phase
			row[i] /= sum
		}
	}
}

// Before and After are the numbers of input samples needed before and after the sample at or before a position.
func (k *Kernel) Before() int { return k.taps/2 - 1 }
func (k *Kernel) After() int  { return k.taps / 2 }

// Taps is the number of input samples behind one output sample.
func (k *Kernel) Taps() int { return k.taps }

// Scratch returns room for Read's coefficients.
func (k *Kernel) Scratch() []float64 { return make([]float64, k.taps) }

// Read writes to y[c][j] the value of channel x[c] at position first + j·step, counted in samples from x[c][0], for all
// j. Coefficients are worked out once and used for all channels. Positions must lie at least Before() samples after
// the start and After() before the end, or Read panics.
func (k *Kernel) Read(y, x [][]float64, first, step float64, scratch []float64) {
	if len(x) == 0 || len(y[0]) == 0 {
		return
	}
	taps := k.taps
	coef := scratch[:taps]
	phases := float64(k.phases)
	n := len(y[0])
	for j := range n {
		at := first + float64(j)*step
		whole := math.Floor(at)
		p := (at - whole) * phases
		row := int(p)
		lerp := p - float64(row)
		a := k.table[row*taps:][:taps]
		b := k.table[(row+1)*taps:][:taps] // row = phases only when rounding took p up to it; then lerp is 0
		for i := range coef {
			coef[i] = a[i] + lerp*(b[i]-a[i])
		}
		from := int(whole) - (taps/2 - 1)
		c := 0
		for ; c+4 <= len(x); c += 4 {
			y[c][j], y[c+1][j], y[c+2][j], y[c+3][j] =
				four(coef, x[c][from:], x[c+1][from:], x[c+2][from:], x[c+3][from:])
		}
		for ; c < len(x); c++ {
			y[c][j] = one(coef, x[c][from:])
		}
	}
}

func one(coef, x []float64) float64 {
	x = x[:len(coef)]
	var even, odd float64
	for i := 0; i+1 < len(coef); i += 2 { // taps are even
		even += coef[i] * x[i]
		odd += coef[i+1] * x[i+1]
	}
	return even + odd
}

// four channels at a time: each coefficient is fetched once, and four sums run side by side.
func four(coef, x0, x1, x2, x3 []float64) (s0, s1, s2, s3 float64) {
	n := len(coef)
	x0, x1, x2, x3 = x0[:n], x1[:n], x2[:n], x3[:n]
	for i, c := range coef {
		s0 += c * x0[i]
		s1 += c * x1[i]
		s2 += c * x2[i]
		s3 += c * x3[i]
	}
	return
}

func sinc(x float64) float64 {
	if x == 0 {
		return 1
	}
	return math.Sin(math.Pi*x) / (math.Pi * x)
}

// besselI0 is the modified Bessel function of order 0, by its power series; for the arguments used here (below 15)
// all terms are positive and forty of them reach the last digit.
func besselI0(x float64) float64 {
	sum, term := 1.0, 1.0
	for n := 1.0; term > 1e-17*sum; n++ {
		term *= (x / (2 * n)) * (x / (2 * n))
		sum += term
	}
	return sum
}
