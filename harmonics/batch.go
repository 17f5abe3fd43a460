package harmonics

import (
	"math"

	"wavetally/harmonics/internal/dft"
	"wavetally/harmonics/internal/resample"
)

// A cut is one window: where it lies and what is known of it before it is transformed.
type cut struct {
	start, length float64 // samples from the start of the segment; they need not be whole
	at            float64 // s from the start of the recording
	span          float64 // s
	hz            float64
	flags         Flags
	missing       uint16 // channels with missing samples, a bit each
	mark          bool   // the first window after a 10 min mark
	breaks        bool   // the first window of a segment: it does not follow on from the one before
}

// A batch is a run of windows of one segment with the samples under them: what one worker takes at a time.
type batch struct {
	data   [][]float64 // [channel][sample], from position base of the segment on
	base   int
	rate   float64
	frame  frame
	kernel *resample.Kernel
	cuts   []cut
	out    []windowResult // as cuts
	upper  []float64      // [channel], mean square in the upper fifth of the band, of the batch's first window
	number int            // of the recording's batches
	done   chan struct{}

	nominal   float64
	reference int
	linesOnly bool
}

// A windowResult is what the transform of one window gives.
type windowResult struct {
	channels []windowChannel
	lines    [][]float64 // [channel][line], mean square of each line
	power    [3]float64  // mean of v·i of each phase, W; on a three-wire supply against the middle of the three lines
	phase    [3]float64  // mean square of each phase's voltage, measured or against that middle
	between  [3]float64  // mean square of v1-v2, v2-v3, v3-v1
	sum      float64     // mean square of i1+i2+i3
}

func (r *windowResult) reset(channels, lines int) {
	if len(r.channels) != channels {
		r.channels = make([]windowChannel, channels)
		r.lines = make([][]float64, channels)
	}
	for c := range r.lines {
		if cap(r.lines[c]) < lines {
			r.lines[c] = make([]float64, lines)
		}
		r.lines[c] = r.lines[c][:lines]
	}
}

// A worker transforms batches. It has scratch space of its own.
type worker struct {
	channels  []channel
	wires     wires
	linesOnly bool
	plan      *dft.Plan
	y         [][]float64
	spectrum  []complex128
	scratch   *resample.Scratch
}

// resample brings window c of batch b onto its grid of points, into w.y.
func (w *worker) resample(b *batch, c cut) {
	n := b.frame.points()
	if w.plan == nil || w.plan.Len() != n {
		w.plan = dft.NewPlan(n)
		w.y = make([][]float64, len(w.channels))
		for i := range w.y {
			w.y[i] = make([]float64, n)
		}
	}
	if w.scratch == nil {
		w.scratch = b.kernel.Scratch()
	}
	step := c.length / float64(n)
	first := c.start - float64(b.base)
	// Channels sampled at the same instants share their coefficients.
	for from := 0; from < len(w.channels); {
		to := from + 1
		for to < len(w.channels) && w.channels[to].skew == w.channels[from].skew {
			to++
		}
		// A channel sampled late holds at index n what was there skew later: its sample for time t is further ahead.
		b.kernel.Read(w.y[from:to], b.data[from:to], first-w.channels[from].skew*b.rate, step, w.scratch)
		from = to
	}
}

// run fills b.out.
func (w *worker) run(b *batch) {
	lines := b.frame.lines
	for len(b.out) < len(b.cuts) {
		b.out = append(b.out, windowResult{})
	}
	b.out = b.out[:len(b.cuts)]
	for i, c := range b.cuts {
		w.resample(b, c)
		r := &b.out[i]
		r.reset(len(w.channels), lines)
		for k := range w.channels {
			w.channel(b, c, k, r, i == 0)
		}
		w.products(r)
	}
}

func (w *worker) channel(b *batch, c cut, k int, r *windowResult, first bool) {
	out := &r.channels[k]
	out.missing = c.missing&(1<<k) != 0
	y := w.y[k]
	n := len(y)
	want := b.frame.lines
	if first {
		want = n/2 + 1
	}
	if cap(w.spectrum) < n/2+1 {
		w.spectrum = make([]complex128, n/2+1)
	}
	spectrum := w.plan.Transform(w.spectrum[:want], y)
	if first {
		b.upper[k] = upperBand(spectrum, c, b.rate, b.frame.cycles)
		spectrum = spectrum[:b.frame.lines]
	}
	out.sum(spectrum, b.frame, w.linesOnly)
	for i, v := range spectrum {
		r.lines[k][i] = square(v)
	}
	if w.channels[k].role.Voltage() {
		out.halves(y, b.frame.cycles)
	} else {
		out.meanSquare = meanSquare(y)
	}
	x := b.data[k]
	from, to := int(math.Ceil(c.start))-b.base, int(math.Ceil(c.start+c.length))-b.base
	out.raw.look(x[max(from, 0):min(to, len(x))], first && b.number%stepEvery == 0)
}

// stepEvery is in how many batches once the step of the converter is looked for: it takes a sort.
const stepEvery = 32

// halves fills in the mean square of every half cycle, and of the window.
func (w *windowChannel) halves(y []float64, cycles int) {
	per := len(y) / (2 * cycles)
	var sum float64
	for i := range 2 * cycles {
		w.half[i] = meanSquare(y[i*per:][:per])
		sum += w.half[i]
	}
	w.meanSquare = sum / float64(2*cycles)
}

func meanSquare(y []float64) float64 { return dot(y, y) / float64(len(y)) }

func dot(a, b []float64) float64 {
	b = b[:len(a)]
	var s0, s1 float64
	for i := 0; i+1 < len(a); i += 2 {
		s0 += a[i] * b[i]
		s1 += a[i+1] * b[i+1]
	}
	if len(a)%2 == 1 {
		s0 += a[len(a)-1] * b[len(a)-1]
	}
	return s0 + s1
}

// upperBand sums the lines in the upper fifth of the band below half the sampling rate, or half the working rate, but for
// those of harmonics and beside them.
func upperBand(spectrum []complex128, c cut, rate float64, cycles int) float64 {
	line := c.hz / float64(cycles)
	top := min(rate/2, line*float64(len(spectrum)-1))
	var sum float64
	for k := int(0.8 * top / line); k <= int(top/line) && k < len(spectrum); k++ {
		if d := k % cycles; d > 1 && d < cycles-1 || cycles < 4 {
			sum += square(spectrum[k])
		}
	}
	return sum
}

// products fills in what takes two channels at once.
func (w *worker) products(r *windowResult) {
	m := w.wires
	for p := range 3 {
		r.power[p], r.between[p], r.phase[p] = math.NaN(), math.NaN(), math.NaN()
		n := float64(len(w.y[0]))
		next, last := m.vll[p], m.vll[(p+2)%3]
		switch {
		case m.v[p] >= 0:
			r.phase[p] = r.channels[m.v[p]].meanSquare
			if m.i[p] >= 0 {
				r.power[p] = dot(w.y[m.v[p]], w.y[m.i[p]]) / n
			}
		case all(m.vll): // v1 = (v12-v31)/3, whatever the earth is at
			r.phase[p] = (r.channels[next].meanSquare + r.channels[last].meanSquare - 2*dot(w.y[next], w.y[last])/n) / 9
			if m.i[p] >= 0 {
				r.power[p] = (dot(w.y[next], w.y[m.i[p]]) - dot(w.y[last], w.y[m.i[p]])) / (3 * n)
			}
		}
		a, b := m.v[p], m.v[(p+1)%3]
		if a >= 0 && b >= 0 {
			r.between[p] = r.channels[a].meanSquare + r.channels[b].meanSquare - 2*dot(w.y[a], w.y[b])/n
		}
		if k := m.vll[p]; k >= 0 {
			r.between[p] = r.channels[k].meanSquare
		}
	}
	r.sum = math.NaN()
	if all(m.i) {
		a, b, c := w.y[m.i[0]], w.y[m.i[1]], w.y[m.i[2]]
		var s float64
		for j := range a {
			v := a[j] + b[j] + c[j]
			s += v * v
		}
		r.sum = s / float64(len(a))
	}
}
