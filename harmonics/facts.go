package harmonics

// ChannelFacts are what the samples themselves tell about a channel's hook-up, sensor and converter. Package fitness
// turns them into doubts.
type ChannelFacts struct {
	// Phasor is the channel's fundamental over the recording: rms magnitude, and angle against the reference
	// voltage's fundamental. It is the vector mean over windows.
	Phasor complex128
	// Steadiness is |vector mean| over the rms of the fundamental, 0..1: well under 1 when the angle to the
	// reference wanders.
	Steadiness float64

	Samples int64 // looked at, missing ones not counted
	Missing int64 // NaN samples

	Lowest, Highest float64 // extreme samples, in the channel's unit
	AtLowest        int64   // samples that equal Lowest, to a tenth of Step
	AtHighest       int64
	FlatRuns        int64 // runs of three or more equal samples at Lowest or Highest
	LongestFlat     int64 // samples, of those runs
	ClippedWindows  int   // windows with such a run

	// Step is the smallest difference seen between two neighbouring, unequal samples: the resolution of the file or
	// of the converter. 0 when all samples are equal.
	Step float64

	// DCLow and DCHigh are the lowest and highest mean of a window.
	DCLow, DCHigh float64

	// UpperBand is the rms of the lines, harmonics left out, in the upper fifth of the band below half the sampling rate (below half the
	// working rate, where the recording is decimated), in the channel's unit. A spectrum that does not fall towards
	// it has probably been folded.
	UpperBand float64
	// FundamentalLow and FundamentalHigh are the lowest and highest fundamental of an unflagged window, rms.
	FundamentalLow, FundamentalHigh float64
}

// A FrequencyFact sums up how steadily the fundamental could be followed.
type FrequencyFact struct {
	LargestChange float64 // Hz, between one window and the next, both unflagged
	SkirtPct      float64 // energy in the lines beside the harmonics over energy in the harmonics (order 1 aside), %
	Unlocked      int     // windows without lock
	Steps         int     // windows with a jump of the frequency
}
