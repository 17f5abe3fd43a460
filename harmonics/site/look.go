package site

// A Look is a first look at a recording: enough to guess what was not declared.
type Look struct {
	// TimeFactor is set when no fundamental was found because the time base must be wrong: by what the recording's
	// times must be multiplied for its strongest component to be at 50 or 60 Hz. 0 when nothing is to be said.
	TimeFactor float64

	Frequency float64       // Hz; 0 when no mains fundamental was found
	Channels  []ChannelLook // in the order of the recording's channels
}

// A ChannelLook is a first look at one channel, in the units the recording holds.
type ChannelLook struct {
	RMS         float64
	DC          float64
	Peak        float64
	Fundamental float64 // rms at Look.Frequency; 0 without one
	Angle       float64 // degrees, of the fundamental against the first channel's
	THDPct      float64 // rough, of the fundamental; NaN without one
}
