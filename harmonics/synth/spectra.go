package synth

import "math"

// Delayed returns the harmonics of the same waveform later by the given share of a cycle: order h turns by
// -h × 360° × cycles. The second phase of a balanced system is Delayed(first, 1.0/3), the third Delayed(first, 2.0/3).
func Delayed(hs []Harmonic, cycles float64) []Harmonic {
	out := append([]Harmonic(nil), hs...)
	for i := range out {
		out[i].Angle = wrap(out[i].Angle - 360*cycles*float64(out[i].Order))
	}
	return out
}

// Scaled returns the harmonics with their rms multiplied.
func Scaled(hs []Harmonic, factor float64) []Harmonic {
	out := append([]Harmonic(nil), hs...)
	for i := range out {
		out[i].RMS *= factor
	}
	return out
}

// SixPulse returns the current of an ideal three-phase bridge with the fundamental i1 (A rms), in phase with the voltage:
// orders 6k ± 1 up to top, each 1/h of the fundamental. It is the 120° block, positive at the voltage's crest.
func SixPulse(i1 float64, top int) []Harmonic {
	out := []Harmonic{{Order: 1, RMS: i1}}
	for h := 5; h <= top; h++ {
		if h%6 != 1 && h%6 != 5 {
			continue
		}
		// The Fourier coefficients of a block of half-width 60° are proportional to sin(60° h)/h.
		angle := 0.0
		if math.Sin(float64(h)*math.Pi/3) < 0 {
			angle = 180
		}
		out = append(out, Harmonic{Order: h, RMS: i1 / float64(h), Angle: angle})
	}
	return out
}

// Square returns a square wave of the given fundamental, positive around t = 0: odd orders up to top, each 1/h.
func Square(rms1 float64, top int) []Harmonic {
	var out []Harmonic
	for h := 1; h <= top; h += 2 {
		angle := 0.0
		if h%4 == 3 {
			angle = 180
		}
		out = append(out, Harmonic{Order: h, RMS: rms1 / float64(h), Angle: angle})
	}
	return out
}

// wrap brings an angle into (-180, 180].
func wrap(degrees float64) float64 {
	a := math.Mod(degrees, 360)
	switch {
	case a > 180:
		a -= 360
	case a <= -180:
		a += 360
	}
	return a
}
