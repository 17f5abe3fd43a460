package report

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// cyclesShown is how many cycles of the captured window the waveform charts show: more hide the shape.
const cyclesShown = 2

// waveformCharts show the captured window: the channels of a group together, then each channel with the same window
// rebuilt from its harmonics and lines above the noise floor, and what those leave unexplained.
func waveformCharts(s *Survey) []Chart {
	cap := s.Summary.Capture
	if cap == nil {
		return nil
	}
	var out []Chart
	for _, g := range groups {
		if c, ok := groupWaveform(s, g); ok {
			out = append(out, c)
		}
	}
	for i := range s.Summary.Channels {
		out = append(out, rebuiltChart(s, i))
	}
	return out
}

func groupWaveform(s *Survey, g group) (Chart, bool) {
	cap := s.Summary.Capture
	c := Chart{Key: "waveform-" + g.key, Kind: WaveformChart}
	for i := range s.Summary.Channels {
		ch := &s.Summary.Channels[i]
		if g.member(ch.Role) {
			c.Series = append(c.Series, waveSeries(cap, ch, cap.Samples[i], Measured, string(ch.Role)))
			rms, crest := shapeOf(cap.Samples[i])
			c.Title += fmt.Sprintf(", %s %s rms, crest factor %s", ch.Role, Quantity(rms, ch.Unit), Sig(crest))
		}
	}
	if len(c.Series) == 0 {
		return c, false
	}
	c.Title = g.name + c.Title[1:]
	if g.key == "N" {
		c.Title = g.name + " conductor" + c.Title[len(g.name):]
	}
	c.X, c.Y = waveAxes(cap, c.Series)
	c.Caption = s.captureCaption()
	return c, true
}

// shapeOf is the rms and the crest factor of a window.
func shapeOf(v []float64) (rms, crest float64) {
	peak := 0.0
	for _, x := range v {
		rms += x * x / float64(len(v))
		peak = math.Max(peak, math.Abs(x))
	}
	rms = math.Sqrt(rms)
	return rms, peak / rms
}

func rebuiltChart(s *Survey, i int) Chart {
	cap, ch := s.Summary.Capture, &s.Summary.Channels[i]
	diff := make([]float64, len(cap.Samples[i]))
	for k := range diff {
		diff[k] = cap.Samples[i][k] - cap.Rebuilt[i][k]
	}
	residual := waveSeries(cap, ch, diff, Residual, "residual")
	residual.Note = Quantity(cap.Residual[i], ch.Unit) + " rms"
	c := Chart{Key: "rebuilt-" + string(ch.Role), Kind: WaveformChart,
		Title: fmt.Sprintf("%s: the lines above the noise floor leave %s rms unexplained, %s %% of the fundamental", ch.Role,
			Quantity(cap.Residual[i], ch.Unit), Sig(100*cap.Residual[i]/ch.Fundamental)),
		Caption: "As recorded; rebuilt by inverse transform from the lines above the noise floor; the difference of the two. " + s.captureCaption(),
		Series: []Series{
			waveSeries(cap, ch, cap.Samples[i], Measured, "as recorded"),
			waveSeries(cap, ch, cap.Rebuilt[i], Rebuilt, "rebuilt"),
			residual,
		}}
	c.X, c.Y = waveAxes(cap, c.Series)
	return c
}

// waveSeries is one channel over the cycles shown, in ms from the window's start.
func waveSeries(cap *harmonics.Capture, ch *harmonics.ChannelSummary, v []float64, use, name string) Series {
	n := len(v) / cap.Cycles * min(cyclesShown, cap.Cycles)
	out := Series{Name: name, Role: ch.Role, Use: use, Unit: ch.Unit, X: make([]float64, n), Y: v[:n:n]}
	for i := range n {
		out.X[i] = 1000 * float64(i) * float64(cap.Cycles) / (float64(len(v)) * cap.Frequency)
	}
	return out
}

func waveAxes(cap *harmonics.Capture, series []Series) (x, y Axis) {
	x = Axis{Label: "time in the window", Unit: "ms", High: 1000 * float64(min(cyclesShown, cap.Cycles)) / cap.Frequency}
	top := 0.0
	for _, s := range series {
		for _, v := range s.Y {
			top = math.Max(top, math.Abs(v))
		}
	}
	y = Axis{Label: "voltage", Unit: series[0].Unit, Low: -1.08 * top, High: 1.08 * top}
	if series[0].Unit == "A" {
		y.Label = "current"
	}
	return x, y
}

func (s *Survey) captureCaption() string {
	cap := s.Summary.Capture
	shown := min(cyclesShown, cap.Cycles)
	return fmt.Sprintf("%d of the %d cycles of the window %s at %s Hz, chosen for: %s.", shown, cap.Cycles, s.Recording.Clock(cap.At),
		sig(cap.Frequency, 5), cap.Why)
}

// phasorCharts draw the fundamentals as arrows, the proof of the wiring: 0° to the right, angles anticlockwise.
// X is the angle in degrees, Y the rms; voltages and currents have lengths of their own.
func phasorCharts(s *Survey) []Chart {
	c := Chart{Key: "phasor", Kind: PhasorChart, Title: "Fundamental phasors, angles against " + string(s.Summary.Reference),
		X: Axis{Label: "angle", Unit: "°", Low: -180, High: 180}, Y: Axis{Label: "rms"},
		Caption: "Voltages and currents are drawn to separate scales. " + s.span(0, "") + "."}
	for i := range s.Summary.Channels {
		ch := &s.Summary.Channels[i]
		if ch.Role == "VN" || !(ch.Fundamental > 0) || math.IsNaN(ch.Angle1) {
			continue
		}
		c.Series = append(c.Series, Series{Name: string(ch.Role), Role: ch.Role, Use: Measured, Unit: ch.Unit,
			X: []float64{ch.Angle1}, Y: []float64{ch.Fundamental},
			Note: fmt.Sprintf("%s at %s°", Quantity(ch.Fundamental, ch.Unit), Sig(math.Round(10*ch.Angle1)/10))})
	}
	if len(c.Series) < 2 {
		return nil
	}
	return []Chart{c}
}
