// Package synth makes recordings whose every harmonic is known: for tests, for the demonstration and for examples.
// It shares no code with the analysis, so that an error in one cannot hide in the other.
//
// A sample of a channel at time t (in seconds from the start of the recording, plus the channel's skew) is
//
//	x(t) = DC + Σ √2·RMS·cos(2π·Order·φ(t) + Angle)·modulation·load·dip + Σ √2·RMS·cos(2π·Hz·t + Angle) + noise
//
// then clipped to the channel's range and rounded to its bits. φ(t) is the phase of the fundamental in cycles, 0 at
// t = 0, from the closed form of the integral of the frequency: it is never accumulated, so the millionth window is as
// exact as the first. Angles are in degrees, cosine convention: with a voltage V1 whose fundamental has the angle 0, the
// Angle of any component is what survey.json calls angle_deg.
//
// The recording is made while it is read; nothing in memory grows with its length, and every reading gives the same
// samples to the bit.
package synth

import "time"

// A Recording describes what to generate. The zero value of every field but Rate, Seconds, Frequency and Channels is
// "none of it".
type Recording struct {
	Name      string // shown as the file's name
	Start     time.Time
	Rate      float64 // samples per second; need not be whole
	Seconds   float64 // length, gaps included; the number of samples is Seconds × Rate, rounded
	Nominal   float64 // nominal frequency that the header tells, Hz; 0: the header does not tell
	Frequency Frequency
	Channels  []Channel
	Gaps      []Span // stretches that are not recorded; each starts a new segment
	Seed      uint64 // of the noise
	BlockLen  int    // samples per block; 0: wave.BlockLen
}

// A Channel is one quantity of the recording.
type Channel struct {
	Name  string
	Unit  string // "V" or "A"
	Phase string // the file's own designation
	DC    float64

	Harmonics []Harmonic
	Tones     []Tone
	Noise     float64 // rms of white Gaussian noise, in Unit

	Load    func(t float64) float64 // multiplies the harmonics; nil: 1
	Dips    []Dip
	Missing []Span // samples marked as missing (NaN)

	Range float64 // ends of the input range, ± in Unit: samples are clipped to it; 0: no limit
	Bits  int     // resolution of the converter over 2 × Range; 0: not rounded
	Skew  float64 // s: sampled that much later than the block's time
}

// A Harmonic is one order of a channel.
type Harmonic struct {
	Order int     // 1 is the fundamental; orders above 50 are allowed
	RMS   float64 // in the channel's unit
	Angle float64 // degrees

	// The amplitude is multiplied by 1 + Depth·cos(2π·ModHz·t + ModAngle).
	ModHz, Depth, ModAngle float64 // Hz, share, degrees

	Load func(t float64) float64 // multiplies this order, besides the channel's; nil: 1
}

// A Tone is a component that does not follow the mains frequency: an interharmonic or a signalling tone.
type Tone struct {
	Hz    float64
	RMS   float64 // in the channel's unit
	Angle float64 // degrees at t = 0

	From, To float64 // s; it sounds in [From, To). To 0: to the end
}

// A Dip multiplies a channel's harmonics by 1 - Depth during [At, At+Length). A negative depth is a swell, 1 an
// interruption.
type Dip struct{ At, Length, Depth float64 }

// A Span is a stretch of time [At, At+Length), in seconds from the start of the recording.
type Span struct{ At, Length float64 }

func (s Span) holds(t float64) bool { return t >= s.At && t < s.At+s.Length }
