// Package harmonics measures harmonics on recorded mains waveforms.
//
// A recording is followed by its fundamental ([tracker]), cut into windows of 10 or 12 whole cycles ([cutter]), each
// brought onto a whole number of points by band-limited interpolation and transformed ([worker]), its lines summed into
// the subgroups of IEC 61000-4-7 ([windowChannel]), and these aggregated into 3 s and 10 min intervals and statistics
// as IEC 61000-4-30 says ([collector]). The result is a [Summary].
//
// Conventions: a line C[k] is an rms phasor, phase 0 a cosine at the window's first sample; values are in V and A,
// shares in per cent; a value that was not measured is NaN. There is no printing, no clock and no file in here.
package harmonics

import (
	"context"
	"errors"
	"fmt"
	"math"
	"math/cmplx"
	"runtime"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// Options of a measurement. The zero value will do.
type Options struct {
	Workers  int                       // goroutines that transform windows; 0: one a core. The result does not depend on it.
	Progress func(done, total float64) // told from time to time how far it is, in seconds of the recording; total 0: unknown
}

// Errors that a recording can end in.
var (
	ErrNoFundamental = errors.New("no mains fundamental stands out between 42 and 69.5 Hz on any channel that has a role; check the sampling rate and what the channels are said to measure")
	ErrTooShort      = errors.New("the recording holds less than one cycle of the fundamental; record at least ten cycles (0.2 s)")
)

// Measure measures src as sheet describes it. The sheet's channels must name the recording's; its nominal frequency
// may be 0, and is then taken from the recording.
func Measure(ctx context.Context, src wave.Source, sheet site.Sheet, opt Options) (*Summary, error) {
	h := src.Header()
	channels, err := resolve(h, sheet)
	if err != nil {
		return nil, err
	}
	workers := opt.Workers
	if workers <= 0 {
		workers = runtime.GOMAXPROCS(0)
	}
	// Batches go round: from free to the cutter, to a worker, to the collector in their order, and back to free.
	total := workers + 3
	free, work, inOrder := make(chan *batch, total), make(chan *batch, total), make(chan *batch, total)
	for range total {
		free <- &batch{done: make(chan struct{}, 1)}
	}
	cut := &cutter{channels: channels, nominal: sheet.Supply.NominalFrequency, start: h.Start, free: free,
		reference: -1, missing: make([]int64, len(channels)),
		hand: func(b *batch) {
			inOrder <- b
			work <- b
		}}
	wires := wiring(channels)
	for range workers {
		go func() {
			w := &worker{channels: channels, wires: wires}
			for b := range work {
				w.linesOnly = b.linesOnly
				w.run(b)
				b.done <- struct{}{}
			}
		}()
	}
	var readErr error
	go func() {
		defer close(inOrder)
		defer close(work)
		seconds := float64(h.Samples) / h.Rate
		readErr = cut.read(ctx, src, func(done float64) {
			if opt.Progress != nil {
				opt.Progress(done, seconds)
			}
		})
	}()
	c := newCollector(channels)
	again := &worker{channels: channels, wires: wires}
	for b := range inOrder {
		<-b.done
		if len(b.cuts) > 0 {
			c.nominal, c.reference, c.linesOnly = b.nominal, b.reference, b.linesOnly
			c.add(b, again)
		}
		free <- b
	}
	if readErr != nil {
		return nil, readErr
	}
	if c.count.Total == 0 {
		return nil, nothing(cut)
	}
	c.finish()
	return c.summary(cut, h, sheet), nil
}

// nothing says why there is not a single window.
func nothing(c *cutter) error {
	switch {
	case c.samples == 0:
		return errors.New("the recording holds no samples")
	case c.slow > 0:
		return fmt.Errorf("sampled at %g Hz, too slowly for a mains waveform; export the waveform, not its rms values, or correct the time base", c.slow)
	case c.dark && c.end > 0.5:
		return ErrNoFundamental
	}
	return ErrTooShort
}

func (c *collector) summary(cut *cutter, h wave.Header, sheet site.Sheet) *Summary {
	used := float64(c.count.Used)
	s := &Summary{
		Nominal: cut.nominal, Start: h.Start, Duration: cut.end, Samples: cut.samples, Rate: cut.rate,
		Reference: c.channels[c.reference].role, Gaps: cut.gaps, Windows: c.count,
		Frequency: FrequencyRange{Mean: c.hz.sum / used, Min: c.hz.min, Max: c.hz.max},
		Threes:    c.threes, Tens: c.tens, Days: c.day.days, Events: c.events.done,
		LinesOnly: c.linesOnly, Lock: c.lock,
	}
	s.Windows.Cycles = c.frame.cycles
	if c.count.Used == 0 {
		s.Frequency = FrequencyRange{math.NaN(), math.NaN(), math.NaN()}
	}
	at := make([]float64, len(c.tens))
	for i := range c.tens {
		at[i] = c.tens[i].At
	}
	for k := range c.channels {
		s.Channels = append(s.Channels, c.channelSummary(k, at))
		s.Facts = append(s.Facts, c.channelFacts(k, cut))
	}
	s.Lock.SkirtPct = c.skirt()
	s.Power = c.power.result(c.wires, c.channels, s, sheet.Supply.Connection)
	s.Capture = c.capture.finish(func(k, line int) float64 {
		h := int(math.Round(float64(line) / float64(c.frame.cycles)))
		if h > c.frame.top {
			return math.NaN()
		}
		t := &c.whole[k]
		perLine, _ := noiseFloor(t.lines, c.frame, t.n, max(h, 1))
		if math.IsNaN(perLine) { // a short capture has no lines between: all of its lines are kept
			return 0
		}
		return math.Sqrt(perLine)
	})
	if c.lines != nil && len(c.lines.Times) > 0 {
		c.lines.LineHz /= float64(len(c.lines.Times))
		s.Spectrogram = c.lines
	}
	return s
}

func (c *collector) channelSummary(k int, at []float64) ChannelSummary {
	ch, t := c.channels[k], &c.whole[k]
	n := float64(t.n)
	if t.n == 0 {
		n = math.NaN()
	}
	out := ChannelSummary{Role: ch.role, Source: ch.name, Unit: ch.unit, Uncertainty: ch.err, TopOrder: c.frame.top,
		RMS: math.Sqrt(t.meanSquare / n), DC: t.dc / n, Peak: max(t.raw.high, -t.raw.low),
		Crest: t.crest / float64(t.crestN), Fundamental: math.Sqrt(t.group[1] / n)}
	lines := 3
	if c.linesOnly {
		lines = 1
	}
	var floors []float64
	var sum, weighted float64
	level := func(h int) func(*Levels) float64 { return func(l *Levels) float64 { return l.H[h] } }
	for h := 1; h <= MaxOrder; h++ {
		hm := Harmonic{Order: h, RMS: math.Sqrt(t.group[h] / n), Angle: math.NaN(), Coherence: math.NaN(), Floor: math.NaN()}
		hm.Pct = 100 * hm.RMS / out.Fundamental
		if h <= c.frame.top && t.n > 0 {
			hm.Angle = degrees(t.turned[h])
			hm.Coherence = min(1, cmplx.Abs(t.turned[h])/n/hm.RMS)
			perLine, count := noiseFloor(t.lines, c.frame, t.n, h)
			hm.Floor = math.Sqrt(float64(lines) * perLine)
			hm.Above = aboveNoise(t.group[h]/n, perLine, t.n, count, lines)
			if h > 1 && !math.IsNaN(hm.Floor) {
				floors = append(floors, 100*hm.Floor/out.Fundamental)
			}
			sum += hm.RMS * hm.RMS
			weighted += float64(h*h) * hm.RMS * hm.RMS
		}
		hm.Share3s, hm.Level3s = c.perShare[k][h].stats(), c.perLevel[k][h].stats()
		hm.Level10m = c.tenStats(k, at, level(h))
		hm.Share10m = c.tenStats(k, at, func(l *Levels) float64 { return 100 * l.H[h] / l.H[1] })
		out.Harmonics = append(out.Harmonics, hm)
	}
	out.Angle1 = out.H(1).Angle
	out.FloorPct = median(floors)
	out.KFactor = weighted / sum
	out.FHL = out.KFactor
	out.Inter = make([]float64, Orders)
	for h := range out.Inter {
		out.Inter[h] = math.Sqrt(t.inter[h] / n)
	}
	hs := make([]float64, Orders)
	for h := 1; h < Orders; h++ {
		hs[h] = out.H(h).RMS
	}
	out.THDPct = 100 * total2(hs) / out.Fundamental
	out.THD3s, out.THC3s = c.perShare[k][0].stats(), c.perLevel[k][0].stats()
	out.THC10m = c.tenStats(k, at, func(l *Levels) float64 { return l.THC })
	out.THD10m = c.tenStats(k, at, func(l *Levels) float64 { return 100 * l.THC / l.H[1] })
	out.THD40x10m = c.tenStats(k, at, func(l *Levels) float64 { return 100 * total2(l.H[:41]) / l.H[1] })
	return out
}

// tenStats are statistics over the valid 10 min intervals.
func (c *collector) tenStats(k int, at []float64, of func(*Levels) float64) Stats {
	values := make([]float64, len(c.tens))
	for i := range c.tens {
		values[i] = math.NaN()
		if c.tens[i].Valid() {
			values[i] = of(&c.tens[i].Channels[k])
		}
	}
	return statsOf(values, at)
}

func (c *collector) channelFacts(k int, cut *cutter) ChannelFacts {
	t := &c.whole[k]
	r := &t.raw
	f := ChannelFacts{Samples: r.n, Missing: cut.missing[k], Lowest: r.low, Highest: r.high, AtLowest: r.atLow,
		AtHighest: r.atHigh, FlatRuns: r.flats, LongestFlat: r.longest, ClippedWindows: r.clipped, Step: r.step,
		DCLow: t.dcLow, DCHigh: t.dcHigh, FundamentalLow: t.fundLow, FundamentalHigh: t.fundHigh}
	if math.IsInf(f.Step, 1) {
		f.Step = 0
	}
	if t.n > 0 {
		f.Phasor = t.turned[1] / complex(float64(t.n), 0)
		f.Steadiness = min(1, cmplx.Abs(f.Phasor)/math.Sqrt(t.group[1]/float64(t.n)))
	}
	if t.upperN > 0 {
		f.UpperBand = math.Sqrt(t.upper / float64(t.upperN))
	}
	return f
}

// skirt compares the reference's lines next to the harmonics with the harmonics' own, orders 2 and up, in per cent.
func (c *collector) skirt() float64 {
	t := &c.whole[c.reference]
	var beside, own float64
	for h := 2; h <= c.frame.top; h++ {
		k := h * c.frame.cycles
		if k+1 >= len(t.lines) {
			break
		}
		beside += t.lines[k-1] + t.lines[k+1]
		own += t.lines[k]
	}
	if own == 0 || c.linesOnly {
		return math.NaN()
	}
	return 100 * beside / own
}

func median(v []float64) float64 {
	s := statsOf(v, make([]float64, len(v)))
	if s.N == 0 {
		return math.NaN()
	}
	return s.P50
}
