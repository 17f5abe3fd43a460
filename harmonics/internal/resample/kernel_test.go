package resample

import (
	"fmt"
	"math"
	"testing"
)

// bound is twice what Attenuation promises, as the ripples of pass band and images add.
var bound = 2 * math.Pow(10, -Attenuation/20.0)

// A tone anywhere in the pass band is read right between the samples, at any pair of rates.
func TestTonesComeThrough(t *testing.T) {
	for _, s := range []Spec{
		{12800, 12800, 2575}, {12800, 12790, 2575}, {6400, 12800, 2560}, {3200, 6400, 1280}, {400, 6400, 160},
		{1000, 7680, 400}, {44100, 12800, 2575}, {1e6, 15360, 3090}, {7680, 7680, 3072},
	} {
		k := NewKernel(s)
		n := 512
		need := int(float64(n)*s.In/s.Out) + k.Taps() + 2
		for _, share := range []float64{0.01, 0.3, 0.77, 0.95, 1} {
			f := share * s.Pass
			x := make([]float64, need)
			for i := range x {
				x[i] = math.Cos(2*math.Pi*f*float64(i)/s.In + 1)
			}
			y := [][]float64{make([]float64, n)}
			first := float64(k.Before()) + 0.37
			k.Read(y, [][]float64{x}, first, s.In/s.Out, k.Scratch())
			var worst float64
			for j, got := range y[0] {
				at := first + float64(j)*s.In/s.Out
				worst = max(worst, math.Abs(got-math.Cos(2*math.Pi*f*at/s.In+1)))
			}
			if !(worst <= bound) {
				t.Errorf("%+v, %d taps: a tone of %.0f Hz is off by %.2g of its peak, more than %.2g", s, k.Taps(), f, worst, bound)
			}
		}
	}
}

// What would fold into the pass band when the rate goes down must be gone.
func TestFoldingTonesAreGone(t *testing.T) {
	s := Spec{100000, 12800, 2575}
	k := NewKernel(s)
	n := 256
	for _, f := range []float64{s.Out - s.Pass, s.Out, s.Out + 500, 3 * s.Out, 49000} {
		x := make([]float64, int(float64(n)*s.In/s.Out)+k.Taps()+2)
		for i := range x {
			x[i] = math.Cos(2 * math.Pi * f * float64(i) / s.In)
		}
		y := [][]float64{make([]float64, n)}
		k.Read(y, [][]float64{x}, float64(k.Before()), s.In/s.Out, k.Scratch())
		for _, v := range y[0] {
			if !(math.Abs(v) <= bound) {
				t.Fatalf("a tone of %.0f Hz is left at %.2g, more than %.2g", f, v, bound)
			}
		}
	}
}

// Four channels at a time, and the rest one by one, are the same sums to the last bits.
func TestChannelsDoNotMix(t *testing.T) {
	k := NewKernel(Spec{12800, 12800, 2575})
	const channels, n = 7, 100
	x := make([][]float64, channels)
	for c := range x {
		x[c] = make([]float64, n+k.Taps()+2)
		for i := range x[c] {
			x[c][i] = float64(c + 1)
		}
	}
	y := make([][]float64, channels)
	for c := range y {
		y[c] = make([]float64, n)
	}
	k.Read(y, x, float64(k.Before())+0.5, 1.0001, k.Scratch())
	for c := range y {
		for j, v := range y[c] {
			if math.Abs(v-float64(c+1)) > 1e-14*float64(c+1) {
				t.Fatalf("channel %d, sample %d: %v, want %d", c, j, v, c+1)
			}
		}
	}
}

func TestImpossibleBandPanics(t *testing.T) {
	defer func() {
		if recover() == nil {
			t.Error("no panic for a band beyond half the rate")
		}
	}()
	NewKernel(Spec{In: 1000, Out: 6400, Pass: 500})
}

func BenchmarkRead(b *testing.B) {
	for _, channels := range []int{1, 4, 8} {
		b.Run(fmt.Sprint(channels, "ch"), func(b *testing.B) {
			k := NewKernel(Spec{12800, 12800, 2575})
			x, y := make([][]float64, channels), make([][]float64, channels)
			for c := range x {
				x[c], y[c] = make([]float64, 2600), make([]float64, 2560)
			}
			scratch := k.Scratch()
			b.ReportMetric(float64(k.Taps()), "taps")
			for b.Loop() {
				k.Read(y, x, 8.3, 1.0001, scratch)
			}
			b.ReportMetric(float64(channels*2560*b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
		})
	}
}
