package harmonics

import (
	"time"

	"wavetally/harmonics/site"
)

// MaxOrder is the highest harmonic order measured, as IEC 61000-4-30 class A and IEEE 519 ask.
const MaxOrder = 50

// Orders is the length of every slice indexed by harmonic order: 0 (dc) to MaxOrder.
const Orders = MaxOrder + 1

// Flags says why a window or an interval is kept but not counted in statistics. Zero is a good one.
type Flags uint16

const (
	Missing      Flags = 1 << iota // a gap or missing samples fall into it
	Unlocked                       // the fundamental could not be followed
	Step                           // the frequency jumped inside it
	Dip                            // a voltage dip overlaps it
	Swell                          // a voltage swell overlaps it
	Interruption                   // a voltage interruption overlaps it
)

// Strings returns the names of the flags that are set.
func (f Flags) Strings() []string {
	var out []string
	for i, name := range []string{"missing samples", "not locked", "frequency step", "dip", "swell", "interruption"} {
		if f&(1<<i) != 0 {
			out = append(out, name)
		}
	}
	return out
}

// Levels are one channel's values over one interval, each the root of the mean square of its windows' values, in the
// channel's unit. A value that was not measured is NaN.
type Levels struct {
	RMS   float64   // true rms, dc and everything up to the top line included
	H     []float64 // [order] subgroup rms; H[0] is the magnitude of the dc component
	Inter []float64 // [order] centred interharmonic subgroup between order and order+1
	THC   float64   // root of the sum of squares of H[2..MaxOrder], interharmonics excluded
}

// THD returns the total harmonic distortion of the levels, in per cent of the fundamental, over orders 2 to top.
func (l Levels) THD(top int) float64 { return 100 * rss(l.H, 2, top) / l.H[1] }

// An Interval is the aggregate of the windows of a 3 s or 10 min interval, all channels.
type Interval struct {
	At        float64 // start, s from the start of the recording
	Span      float64 // s
	Windows   int     // unflagged windows aggregated
	Want      int     // windows a complete interval would have
	Complete  bool    // no window is missing or flagged, and the interval spans its whole clock time
	Flags     Flags   // union of its windows' flags
	Frequency float64 // Hz, mean of its windows
	Channels  []Levels
}

// Valid reports whether the interval takes part in statistics.
func (i Interval) Valid() bool { return i.Complete && i.Flags == 0 }

// Stats are statistics of one quantity over the valid intervals of one length. Percentiles are nearest-rank: the
// smallest value that at least the given share of all values does not exceed. The zero value means no interval.
type Stats struct {
	N                        int
	Mean, P50, P95, P99, Max float64
	MaxAt                    float64 // s from the start of the recording, of the interval with the highest value
	P95Low, P95High          float64 // 95 % distribution-free confidence bounds of P95 from order statistics; NaN when N is too small to give one
}

// A Harmonic is one order of one channel over the whole recording.
type Harmonic struct {
	Order     int
	RMS       float64 // rms over the recording of the subgroup, in the channel's unit; NaN above what the sampling rate supports
	Pct       float64 // of the channel's fundamental
	Angle     float64 // degrees in (-180, 180]: phase(h) - h × phase of the reference voltage's fundamental, cosine convention
	Coherence float64 // 0..1: how steady the angle was; 1 is constant
	Floor     float64 // rms, in the channel's unit, that noise alone puts into this subgroup
	Above     bool    // RMS stands clear of Floor
	Share3s   Stats   // of 3 s values, per cent of the fundamental of the same interval
	Level3s   Stats   // of 3 s values, in the channel's unit
	Share10m  Stats   // of 10 min values, per cent of the fundamental of the same interval
	Level10m  Stats   // of 10 min values, in the channel's unit
}

// A ChannelSummary is everything measured on one channel over the whole recording.
type ChannelSummary struct {
	Role        site.Role
	Source      string  // the recording's channel name
	Unit        string  // "V" or "A"
	Uncertainty float64 // % of reading, from the site sheet; 0 when not declared
	RMS         float64
	DC          float64    // signed mean
	Peak        float64    // highest magnitude of a sample
	Crest       float64    // crest factor: mean over windows of peak over rms
	Fundamental float64    // rms of the subgroup of order 1
	Angle1      float64    // degrees, of order 1 against the reference voltage's fundamental
	FloorPct    float64    // median over orders of Floor, per cent of the fundamental
	TopOrder    int        // highest order the sampling rate supports
	Harmonics   []Harmonic // [order-1], orders 1 to MaxOrder
	Inter       []float64  // [order], rms over the recording, of the centred interharmonic subgroup above order; NaN where not measured
	THD3s       Stats      // per cent of the fundamental, orders 2 to MaxOrder
	THD10m      Stats
	THD40x10m   Stats // the same over orders 2 to 40
	THC3s       Stats // in the channel's unit: root of the sum of squares of orders 2 to MaxOrder; TDD is this over the demand current
	THC10m      Stats
	THDPct      float64 // over the whole recording
	KFactor     float64 // sum h² Ih² / sum Ih², orders 1 to MaxOrder, of the channel's own rms
	FHL         float64 // harmonic loss factor of IEEE C57.110, the same sums
}

// H returns order h of the channel, 1 to MaxOrder.
func (c *ChannelSummary) H(h int) *Harmonic { return &c.Harmonics[h-1] }

// A Day holds the daily 99th percentile of 3 s values that IEEE 519 asks for, per channel.
type Day struct {
	At       float64 // s from the start of the recording
	N        int     // valid 3 s values
	Want     int     // in a whole day: 28 800
	Channels []DayLevels
}

// DayLevels are 99th percentiles over one day for one channel, nearest-rank.
type DayLevels struct {
	Level []float64 // [order], in the channel's unit; [0] unused
	Share []float64 // [order], per cent of the fundamental of the same interval
	THC   float64   // in the channel's unit
	THD   float64   // per cent of the fundamental, orders 2 to MaxOrder
}

// A Gap is a stretch without usable samples.
type Gap struct{ At, Length float64 } // s

// A Capture is one window kept for display: all channels, resampled onto whole cycles.
type Capture struct {
	At        float64 // s from the start of the recording
	Frequency float64 // Hz
	Cycles    int
	Why       string      // why this window was chosen, such as "highest load"
	Samples   [][]float64 // [channel][n], over Cycles whole cycles, in the channel's unit
	Rebuilt   [][]float64 // [channel][n], the same window rebuilt from the lines above the noise floor
	Residual  []float64   // [channel], rms of Samples minus Rebuilt
	Lines     [][]float64 // [channel][k], rms of line k at k × Frequency / Cycles
}

// A Spectrogram is the level of each line against time, for a short recording.
type Spectrogram struct {
	LineHz float64       // mean spacing of the lines, about 5 Hz
	Times  []float64     // s from the start, one a column
	Levels [][][]float64 // [channel][column][line], rms in the channel's unit
}

// WindowCount tells how the windows of a recording fared.
type WindowCount struct {
	Cycles  int // fundamental cycles a window: 10 at 50 Hz, 12 at 60 Hz, fewer for a capture shorter than that
	Total   int
	Used    int
	Flagged int
}

// Frequency statistics, in Hz, over used windows.
type FrequencyRange struct{ Mean, Min, Max float64 }

// A VoltageEvent is a dip, swell or interruption found on the rms refreshed each half cycle.
type VoltageEvent struct {
	Kind     Flags // Dip, Swell or Interruption
	At       float64
	Length   float64
	Extreme  float64 // residual voltage of a dip, highest of a swell, in V
	Share    float64 // Extreme in per cent of nominal
	Channels []site.Role
}

// A Summary is what was measured on a recording.
type Summary struct {
	Nominal   float64   // Hz, 50 or 60
	Start     time.Time // of the recording; zero when unknown
	Duration  float64   // s, from the first sample to the last
	Samples   int64     // per channel
	Rate      float64   // Hz, as recorded
	Reference site.Role // the channel the fundamental was tracked on
	Windows   WindowCount
	Gaps      []Gap
	Frequency FrequencyRange
	Channels  []ChannelSummary

	Threes      []Interval // 3 s intervals of the first hour, for charts and tables; statistics use all of them
	Tens        []Interval // 10 min intervals, all of them
	Days        []Day
	Events      []VoltageEvent
	Power       *Power
	Capture     *Capture
	Spectrogram *Spectrogram // nil for recordings longer than a minute

	Lock FrequencyFact

	// Intervals says that the values came from a recorder's interval log, not from waveforms.
	Intervals bool
	// LinesOnly says that the recording was shorter than one window: Harmonics are single lines over the whole
	// cycles there were, without subgroups.
	LinesOnly bool

	// Facts, one a channel in the order of Channels, tell a sound hook-up and a sound recording from a wrong one.
	Facts []ChannelFacts
}

// Channel returns the summary of the channel with the given role, or nil.
func (s *Summary) Channel(r site.Role) *ChannelSummary {
	for i := range s.Channels {
		if s.Channels[i].Role == r {
			return &s.Channels[i]
		}
	}
	return nil
}
