package synth

import "math"

// Frequency is the fundamental's frequency against time:
//
//	f(t) = Hz + Ramp·t + Σ Steps with At ≤ t + Σ Wander.Hz·sin(2π·t/Period + Angle)
type Frequency struct {
	Hz     float64 // at t = 0, before steps and wander
	Ramp   float64 // Hz/s
	Steps  []Step
	Wander []Wander
}

// A Step adds Hz to the frequency from At (s) on.
type Step struct{ At, Hz float64 }

// A Wander is a slow sine added to the frequency.
type Wander struct {
	Hz     float64 // amplitude
	Period float64 // s
	Angle  float64 // degrees
}

// At returns the frequency at time t, in Hz.
func (f Frequency) At(t float64) float64 {
	hz := f.Hz + f.Ramp*t
	for _, s := range f.Steps {
		if t >= s.At {
			hz += s.Hz
		}
	}
	for _, w := range f.Wander {
		hz += w.Hz * math.Sin(2*math.Pi*t/w.Period+radians(w.Angle))
	}
	return hz
}

// Phase returns the phase of the fundamental at time t in cycles: the integral of the frequency from 0 to t, in closed
// form.
func (f Frequency) Phase(t float64) float64 {
	cycles := f.Hz*t + f.Ramp*t*t/2
	for _, s := range f.Steps {
		if t > s.At {
			cycles += s.Hz * (t - s.At)
		}
	}
	for _, w := range f.Wander {
		angle := radians(w.Angle)
		cycles += w.Hz * w.Period / (2 * math.Pi) * (math.Cos(angle) - math.Cos(2*math.Pi*t/w.Period+angle))
	}
	return cycles
}

func radians(degrees float64) float64 { return degrees * math.Pi / 180 }
