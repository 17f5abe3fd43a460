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

// Attenuation is the ripple in the pass band and the rest in the stop band, in dB. 95 dB is an error of 0.002 % of a
// component: a tenth of the tightest bound the measurement is held to. Kaiser's formulas are fits for long filters; the
// margin makes short ones keep the promise too.
const (
	Attenuation = 95
	margin      = 7
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

// run is how many output samples have their coefficients worked out at a time: few enough that they stay in the
// innermost cache while all channels use them.
const run = 64

// Scratch is the working space of Read.
type Scratch struct {
	coef []float64
	from [run]int
}

// Scratch returns working space for Read; it may serve other kernels too.
func (k *Kernel) Scratch() *Scratch { return &Scratch{coef: make([]float64, run*k.taps)} }

// Read writes to y[c][j] the value of channel x[c] at position first + j·step, counted in samples from x[c][0], for all
// j. Coefficients are worked out once and used for all channels. Positions must lie at least Before() samples after
// the start and After() before the end, or Read panics.
func (k *Kernel) Read(y, x [][]float64, first, step float64, s *Scratch) {
	if len(x) == 0 {
		return
	}
	if len(s.coef) < run*k.taps {
		s.coef = make([]float64, run*k.taps)
	}
	for at := 0; at < len(y[0]); at += run {
		n := min(run, len(y[0])-at)
		k.coefficients(s, first, step, at, n)
		c := 0
		for ; c+4 <= len(x); c += 4 {
			four(y[c][at:at+n], y[c+1][at:at+n], y[c+2][at:at+n], y[c+3][at:at+n], x[c], x[c+1], x[c+2], x[c+3], s, k.taps)
		}
		for ; c < len(x); c++ {
			one(y[c][at:at+n], x[c], s, k.taps)
		}
	}
}

// coefficients works out those of output samples at .. at+n-1.
func (k *Kernel) coefficients(s *Scratch, first, step float64, at, n int) {
	phases := float64(k.phases)
	taps := k.taps
	for j := range n {
		position := first + float64(at+j)*step
		whole := int(position) // positions are not negative
		p := (position - float64(whole)) * phases
		row := int(p)
		lerp := p - float64(row)
		a := k.table[row*taps:][:taps]
		b := k.table[(row+1)*taps:][:taps] // row = phases only when rounding took p up to it; then lerp is 0
		coef := s.coef[j*taps:][:taps]
		for i, v := range a {
			coef[i] = v + lerp*(b[i]-v)
		}
		s.from[j] = whole - (taps/2 - 1)
	}
}

func one(y, x []float64, s *Scratch, taps int) {
	for j := range y {
		coef := s.coef[j*taps:][:taps]
		v := x[s.from[j]:][:taps]
		var even, odd float64
		for i := 0; i < len(coef)-1; i += 2 { // taps are even
			even += coef[i] * v[i]
			odd += coef[i+1] * v[i+1]
		}
		y[j] = even + odd
	}
}

// four channels at a time: each coefficient is fetched once, and four sums run side by side.
func four(y0, y1, y2, y3, x0, x1, x2, x3 []float64, s *Scratch, taps int) {
	y1, y2, y3 = y1[:len(y0)], y2[:len(y0)], y3[:len(y0)]
	for j := range y0 {
		coef := s.coef[j*taps:][:taps]
		from := s.from[j]
		v0, v1, v2, v3 := x0[from:][:taps], x1[from:][:taps], x2[from:][:taps], x3[from:][:taps]
		var s0, s1, s2, s3 float64
		for i := 0; i < len(coef)-1; i += 2 {
			c, d := coef[i], coef[i+1]
			s0 += c*v0[i] + d*v0[i+1]
			s1 += c*v1[i] + d*v1[i+1]
			s2 += c*v2[i] + d*v2[i+1]
			s3 += c*v3[i] + d*v3[i+1]
		}
		y0[j], y1[j], y2[j], y3[j] = s0, s1, s2, s3
	}
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
