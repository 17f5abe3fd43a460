package fitness

import (
	"fmt"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// TimeBase says, from a first look, that the times of a recording contradict the mains: what is plainly its fundamental
// would not be at 50 or 60 Hz. Such a recording cannot be measured until it is corrected.
func TimeBase(header wave.Header, look site.Look) (Doubt, bool) {
	f := look.TimeFactor
	if f == 0 {
		return Doubt{}, false
	}
	how := fmt.Sprintf("times must be multiplied by %s", figure(f))
	switch f {
	case 1e-3:
		how = "the time column is in milliseconds, not seconds"
	case 1e-6:
		how = "the time column is in microseconds, not seconds"
	case 1e3:
		how = "the time column is in seconds, not milliseconds"
	}
	rate := header.Rate / f
	return Doubt{Code: "time-column-wrong", Weight: StopsVerdict,
		Text: fmt.Sprintf("At the stated %s samples a second the waveform's fundamental would be nowhere near 50 or 60 Hz; it fits if %s, which makes %s samples a second. Declare the sampling rate in the site sheet.",
			figure(header.Rate), how, figure(rate)),
		Evidence: map[string]float64{"factor": f, "stated_hz": header.Rate, "corrected_hz": rate},
		Proposal: []string{"[file]", fmt.Sprintf("sampling_rate = %.9g", rate)}}, true
}
