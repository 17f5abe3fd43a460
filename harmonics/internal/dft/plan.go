// Package dft is the discrete Fourier transform of a real record of any length, scaled to rms phasors.
//
// For x[0..n-1] the transform is
//
//	X[k] = (g/n) · sum over j of x[j]·exp(-2πi·jk/n),  k = 0..n/2
//
// with g = √2, and g = 1 for k = 0 and, when n is even, for k = n/2. So |X[k]| is the rms value of line k, X[0] the
// mean, phase 0 a cosine at x[0], and the sum of |X[k]|² the mean of x² (Parseval).
package dft

import (
	"fmt"
	"math"
	"math/cmplx"
)

// A Plan transforms real records of one length. It has scratch space inside: one plan a goroutine.
type Plan struct {
	n     int
	whole bool // odd length: transformed as a complex record of length n; else two samples a complex point
	c     *complexPlan
	twist []complex128 // exp(-2πi·k/n)/2, k = 0..n/4, to take the two halves of an even record apart
}

// NewPlan returns a plan for records of n samples. It panics unless n is at least 1.
func NewPlan(n int) *Plan {
	if n < 1 {
		panic(fmt.Sprintf("dft: record of %d samples", n))
	}
	p := &Plan{n: n, whole: n%2 == 1}
	if p.whole {
		p.c = newComplexPlan(n)
		return p
	}
	p.c = newComplexPlan(n / 2)
	p.twist = make([]complex128, n/2)
	for k := range p.twist {
		p.twist[k] = root(n, k) / 2
	}
	return p
}

// Len returns the length of the records.
func (p *Plan) Len() int { return p.n }

// Transform writes X[0..len(dst)-1] for the record x into dst and returns it; nil dst is allocated for all n/2+1 lines.
// A shorter dst saves the work for lines that nobody asks for. It panics when len(x) is not the plan's length or dst is
// longer than n/2+1. x is not changed.
func (p *Plan) Transform(dst []complex128, x []float64) []complex128 {
	if len(x) != p.n {
		panic(fmt.Sprintf("dft: record of %d samples for a plan of %d", len(x), p.n))
	}
	if dst == nil {
		dst = make([]complex128, p.n/2+1)
	}
	if len(dst) > p.n/2+1 {
		panic(fmt.Sprintf("dft: %d lines asked of a record of %d samples", len(dst), p.n))
	}
	if p.whole {
		p.odd(dst, x)
	} else {
		p.even(dst, x)
	}
	return dst
}

func (p *Plan) odd(dst []complex128, x []float64) {
	z := p.c.a
	for i, v := range x {
		z[i] = complex(v, 0)
	}
	z = p.c.run()
	scale := complex(math.Sqrt2/float64(p.n), 0)
	for k := range dst {
		dst[k] = z[k] * scale
	}
	if len(dst) > 0 {
		dst[0] /= math.Sqrt2
	}
}

// even transforms samples 2j and 2j+1 as one complex point and takes the two interleaved spectra apart:
// with Z the transform of x[2j] + i·x[2j+1], m = n/2 and Z* = conj(Z[m-k]),
// X[k] = (Z[k]+Z*)/2 - i·exp(-2πi·k/n)·(Z[k]-Z*)/2.
func (p *Plan) even(dst []complex128, x []float64) {
	z, m := p.c.a, p.n/2
	for i := range z {
		z[i] = complex(x[2*i], x[2*i+1])
	}
	z = p.c.run()
	scale := math.Sqrt2 / float64(p.n)
	for k := 1; k < len(dst) && k < m; k++ {
		a, b := z[k], z[m-k]
		sr, si := real(a)+real(b), imag(a)-imag(b) // Z + Z*
		dr, di := real(a)-real(b), imag(a)+imag(b) // Z - Z*
		w := p.twist[k]
		wr, wi := real(w), imag(w)
		// -i·w·d = (wr·di + wi·dr) - i·(wr·dr - wi·di)
		dst[k] = complex(scale*(sr/2+wr*di+wi*dr), scale*(si/2-wr*dr+wi*di))
	}
	scale = 1 / float64(p.n)
	if len(dst) > 0 {
		dst[0] = complex(scale*(real(z[0])+imag(z[0])), 0)
	}
	if len(dst) > m {
		dst[m] = complex(scale*(real(z[0])-imag(z[0])), 0)
	}
}

// root returns exp(-2πi·k/n), exact at the eighths of a turn so that rounding does not lean to one side.
func root(n, k int) complex128 {
	k %= n
	if 8*k%n == 0 {
		const h = math.Sqrt2 / 2
		return [8]complex128{1, complex(h, -h), -1i, complex(-h, -h), -1, complex(-h, h), 1i, complex(h, h)}[8*k/n]
	}
	return cmplx.Exp(complex(0, -2*math.Pi*float64(k)/float64(n)))
}
