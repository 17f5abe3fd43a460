package dft

import (
	"fmt"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/dsp/fourier"
)

// byDefinition is the transform written as the package comment has it, n²/2 multiplications.
func byDefinition(x []float64) []complex128 {
	n := len(x)
	out := make([]complex128, n/2+1)
	turn := make([]complex128, n)
	for j := range turn {
		turn[j] = cmplx.Rect(1, -2*math.Pi*float64(j)/float64(n))
	}
	for k := range out {
		g := math.Sqrt2
		if k == 0 || 2*k == n {
			g = 1
		}
		for j, v := range x {
			out[k] += complex(v*g/float64(n), 0) * turn[j*k%n]
		}
	}
	return out
}

func noise(n int) []float64 {
	r := rand.New(rand.NewPCG(1, uint64(n)))
	x := make([]float64, n)
	for i := range x {
		x[i] = r.NormFloat64()
	}
	return x
}

// roundoff bounds the error for unit noise: float64 has 1.1e-16, and errors of a few dozen additions pile up as a
// random walk.
const roundoff = 2e-15

func TestTransformEqualsDefinition(t *testing.T) {
	for n := 1; n <= 1000; n++ {
		x := noise(n)
		got, want := NewPlan(n).Transform(nil, x), byDefinition(x)
		tolerance := roundoff * math.Sqrt(float64(n)) // the definition sums n terms itself
		for k := range want {
			if d := cmplx.Abs(got[k] - want[k]); !(d <= tolerance) {
				t.Fatalf("n = %d, line %d: %v, by definition %v", n, k, got[k], want[k])
			}
		}
	}
}

// The other implementation is gonum's fourier.FFT, unscaled.
func TestTransformEqualsGonum(t *testing.T) {
	for _, n := range []int{2, 100, 128, 1000, 1280, 1536, 2560, 3072, 2816, 4096, 44100} {
		x := noise(n)
		got, want := NewPlan(n).Transform(nil, x), fourier.NewFFT(n).Coefficients(nil, x)
		for k := range want {
			g := math.Sqrt2
			if k == 0 || 2*k == n {
				g = 1
			}
			if d := cmplx.Abs(got[k] - want[k]*complex(g/float64(n), 0)); !(d <= roundoff) {
				t.Fatalf("n = %d, line %d: off gonum's by %g", n, k, d)
			}
		}
	}
}

func TestFewerLinesAreTheSame(t *testing.T) {
	for _, n := range []int{15, 2560} {
		p, x := NewPlan(n), noise(n)
		all := p.Transform(nil, x)
		for _, lines := range []int{0, 1, n / 4, n/2 + 1} {
			for k, v := range p.Transform(make([]complex128, lines), x) {
				if v != all[k] {
					t.Fatalf("n = %d, %d lines: line %d is %v, not %v", n, lines, k, v, all[k])
				}
			}
		}
	}
}

func TestParseval(t *testing.T) {
	for _, n := range []int{9, 10, 2560, 3072} {
		x := noise(n)
		var inTime, inLines float64
		for _, v := range x {
			inTime += v * v / float64(n)
		}
		for _, c := range NewPlan(n).Transform(nil, x) {
			inLines += real(c)*real(c) + imag(c)*imag(c)
		}
		if math.Abs(inTime-inLines) > 1e-13*inTime {
			t.Errorf("n = %d: mean square %g, lines %g", n, inTime, inLines)
		}
	}
}

func TestWrongLengthsPanic(t *testing.T) {
	for name, f := range map[string]func(){
		"no samples":     func() { NewPlan(0) },
		"short record":   func() { NewPlan(8).Transform(nil, make([]float64, 7)) },
		"too many lines": func() { NewPlan(8).Transform(make([]complex128, 6), make([]float64, 8)) },
	} {
		func() {
			defer func() {
				if recover() == nil {
					t.Errorf("%s: no panic", name)
				}
			}()
			f()
		}()
	}
}

func BenchmarkTransform(b *testing.B) {
	for _, n := range []int{1280, 2560, 3072} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			p, x, dst := NewPlan(n), noise(n), make([]complex128, 512)
			b.ReportAllocs()
			for b.Loop() {
				p.Transform(dst, x)
			}
		})
		b.Run(fmt.Sprint("gonum", n), func(b *testing.B) {
			p, x, dst := fourier.NewFFT(n), noise(n), make([]complex128, n/2+1)
			for b.Loop() {
				p.Coefficients(dst, x)
			}
		})
	}
}
