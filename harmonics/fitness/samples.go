package fitness

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// channels looks at each channel's samples: is there a signal, does it fit its range, is it fine enough, does it wander.
func (a *assessment) channels() {
	volts, amps := a.strongest(voltage), a.strongest(current)
	for i := range a.sum.Channels {
		c, f := &a.sum.Channels[i], &a.sum.Facts[i]
		best := volts
		if c.Role.Current() {
			best = amps
		}
		if f.Samples == 0 || f.Highest == f.Lowest || !c.Role.Neutral() && c.Fundamental < deadShare*best {
			a.deadChannel(c, f)
			continue
		}
		if c.Role.Neutral() && f.Highest-f.Lowest < 1e-9 {
			continue
		}
		a.clipped(c, f)
		a.resolution(c, f)
		a.drift(c, f)
		a.folded(c, f, i)
	}
}

func (a *assessment) deadChannel(c *harmonics.ChannelSummary, f *harmonics.ChannelFacts) {
	a.dead[c.Role] = true
	weight, what := Caution, "the circuit is off, or its sensor is not connected, or not switched on"
	if c.Role.Voltage() {
		weight, what = StopsVerdict, "its lead is not connected, its fuse has blown, or the phase is off"
	}
	a.add(Doubt{Code: "dead-channel", Weight: weight, Channel: c.Role,
		Text: fmt.Sprintf("%s holds no signal (%s %s rms): %s. Check it at the board; if the circuit is really off, leave the channel out of the site sheet.",
			c.Role, figure(c.RMS), c.Unit, what),
		Evidence: map[string]float64{"rms": c.RMS, "fundamental_rms": c.Fundamental}})
}

// clipped looks for flat tops at the end of the range: runs of equal samples longer than a crest of that resolution has.
func (a *assessment) clipped(c *harmonics.ChannelSummary, f *harmonics.ChannelFacts) {
	peak := (f.Highest - f.Lowest) / 2
	if f.FlatRuns == 0 || peak <= 0 || a.sum.Windows.Used == 0 {
		return
	}
	// A sine of that peak stays within one step of its crest for 2·√(2·step/peak) radians.
	perCycle := a.sum.Rate / a.sum.Frequency.Mean
	natural := perCycle / (2 * math.Pi) * 2 * math.Sqrt(2*f.Step/peak)
	if float64(f.LongestFlat) < 2*natural+4 {
		return
	}
	share := float64(f.ClippedWindows) / float64(a.sum.Windows.Used)
	weight := Note
	switch {
	case share > clippedStops:
		weight = StopsVerdict
	case share > clippedNote:
		weight = Caution
	}
	a.add(Doubt{Code: "clipped", Weight: weight, Channel: c.Role,
		Text: fmt.Sprintf("%s runs into the end of its range in %s %% of the windows (flat for up to %d samples at %s %s): harmonics are too high there. Choose the next larger range or sensor and record again.",
			c.Role, figure(100*share), f.LongestFlat, figure(math.Max(f.Highest, -f.Lowest)), c.Unit),
		Evidence: map[string]float64{"windows_pct": 100 * share, "longest_flat_samples": float64(f.LongestFlat), "peak": math.Max(f.Highest, -f.Lowest)}})
}

func (a *assessment) resolution(c *harmonics.ChannelSummary, f *harmonics.ChannelFacts) {
	if f.Step <= 0 {
		return
	}
	steps := (f.Highest - f.Lowest) / 2 / f.Step
	if steps >= stepsCaution {
		return
	}
	weight := Caution
	switch {
	case c.Role.Neutral(): // a neutral may carry next to nothing
		weight = Note
	case steps < stepsStop:
		weight = StopsVerdict
	}
	a.add(Doubt{Code: "low-resolution", Weight: weight, Channel: c.Role,
		Text: fmt.Sprintf("%s rises to only %s steps of %s %s: rounding looks like distortion. Use a smaller range or sensor, more turns through the sensor, or export with more digits.",
			c.Role, figure(steps), figure(f.Step), c.Unit),
		Evidence: map[string]float64{"steps_to_peak": steps, "step": f.Step}})
}

func (a *assessment) drift(c *harmonics.ChannelSummary, f *harmonics.ChannelFacts) {
	wander := f.DCHigh - f.DCLow
	if !(wander > driftShare*c.Fundamental) || c.Role.Neutral() {
		return
	}
	a.add(Doubt{Code: "channel-drift", Weight: Caution, Channel: c.Role,
		Text: fmt.Sprintf("The zero of %s wanders by %s %s (%s %% of the fundamental): the sensor's amplifier drifts. Zero the sensor, let it warm up, and read the dc value and low orders with care.",
			c.Role, figure(wander), c.Unit, figure(100*wander/c.Fundamental)),
		Evidence: map[string]float64{"wander": wander, "wander_pct": 100 * wander / c.Fundamental}})
}

// folded looks for energy just below half the sampling rate: a spectrum behind an anti-alias filter falls towards it.
func (a *assessment) folded(c *harmonics.ChannelSummary, f *harmonics.ChannelFacts, i int) {
	if a.sum.LinesOnly || c.Fundamental <= 0 || c.Role.Neutral() || a.has("clipped", c.Role) {
		return
	}
	share := f.UpperBand / c.Fundamental
	// What noise like that between the measured harmonics would put there: a fifth of the band's lines, at a third of
	// the floor's square each (a subgroup has three lines).
	lines := 0.2 * a.sum.Rate / 2 / (a.sum.Frequency.Mean / float64(a.sum.Windows.Cycles))
	noise := c.FloorPct / 100 / math.Sqrt(3) * math.Sqrt(lines)
	if !(share > foldedShare) || share < foldedOverNoise*noise {
		return
	}
	a.add(Doubt{Code: "aliasing-possible", Weight: Caution, Channel: c.Role,
		Text: fmt.Sprintf("%s holds %s %% of its fundamental just below half the sampling rate: what lies above is probably folded down into the harmonics. Record at a higher rate, or with an anti-alias filter.",
			c.Role, figure(100*share)),
		Evidence: map[string]float64{"upper_band_pct": 100 * share, "noise_there_pct": 100 * noise}})
}

func (a *assessment) sampling() {
	perCycle := a.sum.Rate / a.sum.Nominal
	if perCycle >= perCycleNote {
		return
	}
	top := harmonics.MaxOrder
	for _, c := range a.sum.Channels {
		top = min(top, c.TopOrder)
	}
	d := Doubt{Code: "sampling-too-slow", Weight: Note, Evidence: map[string]float64{"samples_per_cycle": perCycle, "top_order": float64(top)}}
	switch {
	case perCycle <= perCycleStops:
		d.Weight = Caution // findings on orders it cannot see are not assessed in any case; those on low orders stand
		d.Text = fmt.Sprintf("Sampled %s times a cycle: nothing above order %d can be measured, and totals lack it. Record at 128 samples a cycle or more, behind an anti-alias filter.", figure(perCycle), top)
	case perCycle < perCycleCaution:
		d.Weight = Caution
		d.Text = fmt.Sprintf("Sampled %s times a cycle: enough for order %d only behind an anti-alias filter; say so in the report if there is one.", figure(perCycle), top)
	default:
		d.Text = fmt.Sprintf("Sampled %s times a cycle: enough for order %d; 256 is preferred.", figure(perCycle), top)
	}
	a.add(d)
}
