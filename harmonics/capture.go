package harmonics

import (
	"math"

	"gonum.org/v1/gonum/dsp/fourier"
	"wavetally/harmonics/internal/dft"
)

// captureChoice keeps the window with the highest load: the largest sum of squares of the phase currents'
// fundamentals, or of the voltages' where no current was measured.
type captureChoice struct {
	load    float64
	at, hz  float64
	cycles  int
	samples [][]float64
}

// better is how much higher a load must be for the window to be copied anew: it keeps copies few on a rising load.
const better = 1.02

func (p *captureChoice) offer(c *collector, b *batch, i int, w *worker) {
	r := &b.out[i]
	var amps, volts float64
	for k, ch := range c.channels {
		switch {
		case r.channels[k].missing || ch.role.Neutral():
		case ch.role.Current():
			amps += r.channels[k].group[1]
		default:
			volts += r.channels[k].group[1]
		}
	}
	load := amps
	if load == 0 {
		load = volts
	}
	if p.samples != nil && load <= better*p.load {
		return
	}
	p.load, p.at, p.hz, p.cycles = load, b.cuts[i].at, b.cuts[i].hz, b.frame.cycles
	w.resample(b, b.cuts[i])
	p.samples = make([][]float64, len(c.channels))
	for k := range p.samples {
		p.samples[k] = append([]float64(nil), w.y[k]...)
	}
}

// clearLine is how far a line must stand above the rms of noise in one line to be told from it: noise alone passes
// it once in 200 000 lines (its square is exponentially distributed: exp(-3.5²)).
const clearLine = 3.5

// finish rebuilds the window from its lines above the noise: noise[c][k] is the rms that noise puts into line k.
func (p *captureChoice) finish(noise func(channel, line int) float64) *Capture {
	if p.samples == nil {
		return nil
	}
	n := len(p.samples[0])
	plan, inverse := dft.NewPlan(n), fourier.NewFFT(n)
	out := &Capture{At: p.at, Frequency: p.hz, Cycles: p.cycles, Why: "highest load", Samples: p.samples}
	for k, x := range p.samples {
		lines := plan.Transform(nil, x)
		levels := make([]float64, len(lines))
		for i, c := range lines {
			levels[i] = math.Sqrt(square(c))
			floor := noise(k, i)
			if i > 0 && !(levels[i] > clearLine*floor) { // beyond the lines measured the floor is NaN: left out
				lines[i] = 0
			}
			if i > 0 && 2*i != n {
				lines[i] /= math.Sqrt2 // rms to the half-peak coefficients that the inverse sums
			}
		}
		rebuilt := inverse.Sequence(nil, lines)
		var left float64
		for i := range x {
			left += (x[i] - rebuilt[i]) * (x[i] - rebuilt[i])
		}
		out.Rebuilt = append(out.Rebuilt, rebuilt)
		out.Residual = append(out.Residual, math.Sqrt(left/float64(n)))
		out.Lines = append(out.Lines, levels)
	}
	return out
}
