package harmonics

import (
	"math"
	"math/cmplx"
)

// Windows in a 3 s interval, IEC 61000-4-30: 150 or 180 cycles.
const windowsIn3s = 15

// windowSlack is a little more than a window, s: what a recording that ends at a mark lacks of its last one.
const windowSlack = 0.3

// keptThrees is how many 3 s intervals are kept for charts and tables: one hour.
const keptThrees = 1200

// spectrogramSeconds is how long a recording may be for its lines to be kept window by window.
const spectrogramSeconds = 60

// A collector takes windows in the order of time and adds them up.
type collector struct {
	channels  []channel
	wires     wires
	nominal   float64
	events    *events
	linesOnly bool
	frame     frame
	reference int

	count    WindowCount
	first    float64 // at of the first window
	hz       struct{ sum, min, max float64 }
	lock     FrequencyFact
	lastHz   float64
	whole    []total // [channel]
	three    interval
	carry    interval // the 3 s interval that was in progress at a 10 min mark
	ten      interval
	threes   []Interval
	tens     []Interval
	perShare [][]sample // [channel][order]: 3 s values in per cent of the fundamental; [0] is the THD
	perLevel [][]sample // [channel][order]: 3 s values; [0] is the THC
	day      dayWatch
	power    powerSums
	capture  captureChoice
	lines    *Spectrogram
}

// A total is what all unflagged windows of one channel add up to.
type total struct {
	n          int
	meanSquare float64
	dc         float64
	dcLow      float64
	dcHigh     float64
	crest      float64
	crestN     int
	group      [Orders]float64
	inter      [Orders]float64
	turned     [Orders]complex128 // lines, turned so that the reference's fundamental has phase 0
	lines      []float64          // mean squares
	upper      float64
	upperN     int
	fundLow    float64
	fundHigh   float64
	raw        rawFacts
}

// An interval adds up the windows of one 3 s or 10 min interval.
type interval struct {
	at, end  float64
	windows  int
	total    int
	flags    Flags
	hz       float64
	whole    bool // began at its clock mark
	broken   bool // a segment ended inside it
	channels []levelSums
}

type levelSums struct {
	n          int
	meanSquare float64
	dc         float64
	group      [Orders]float64
	inter      [Orders]float64
}

func newCollector(channels []channel) *collector {
	c := &collector{channels: channels, wires: wiring(channels), events: newEvents(channels)}
	c.hz.min, c.hz.max = math.Inf(1), math.Inf(-1)
	c.whole = make([]total, len(channels))
	c.three.channels = make([]levelSums, len(channels))
	c.carry.channels = make([]levelSums, len(channels))
	c.ten.channels = make([]levelSums, len(channels))
	c.perShare, c.perLevel = make([][]sample, len(channels)), make([][]sample, len(channels))
	for k := range channels {
		c.whole[k].dcLow, c.whole[k].dcHigh = math.Inf(1), math.Inf(-1)
		c.whole[k].fundLow, c.whole[k].fundHigh = math.Inf(1), math.Inf(-1)
		c.perShare[k], c.perLevel[k] = make([]sample, Orders), make([]sample, Orders)
	}
	c.day.init(len(channels))
	c.lines = &Spectrogram{Levels: make([][][]float64, len(channels))}
	return c
}

// add takes a batch. Flags of events reach back one window, so each window is counted when the next has been seen.
func (c *collector) add(b *batch, w *worker) {
	flags := make([]Flags, len(b.cuts))
	for i := range b.cuts {
		now, before := c.events.window(b.cuts[i], b.frame.cycles, &b.out[i])
		flags[i] = b.cuts[i].flags | now
		if i > 0 {
			flags[i-1] |= before
		}
		// Across batches the window before is already counted; an event that begins in the first half cycle of a
		// batch flags that window alone.
	}
	for i := range b.cuts {
		c.window(b, i, flags[i], w)
	}
}

func (c *collector) window(b *batch, i int, flags Flags, w *worker) {
	cut, r := &b.cuts[i], &b.out[i]
	c.frame = b.frame
	if c.count.Total == 0 {
		c.first = cut.at
	}
	c.count.Total++
	c.boundary(cut)
	if flags == 0 {
		c.facts(b, i)
	}
	c.keepLines(cut, r)
	if flags&Unlocked != 0 {
		c.lock.Unlocked++
	}
	if flags&Step != 0 {
		c.lock.Steps++
	}
	c.three.add(cut, r, flags)
	if c.carry.total > 0 {
		c.carry.add(cut, r, flags)
	}
	c.ten.add(cut, r, flags)
	c.closeThree(&c.carry)
	c.closeThree(&c.three)
	if flags != 0 {
		c.count.Flagged++
		c.lastHz = 0
		return
	}
	c.count.Used++
	c.hz.sum += cut.hz
	c.hz.min, c.hz.max = min(c.hz.min, cut.hz), max(c.hz.max, cut.hz)
	if c.lastHz != 0 && !cut.breaks {
		c.lock.LargestChange = max(c.lock.LargestChange, math.Abs(cut.hz-c.lastHz))
	}
	c.lastHz = cut.hz
	turn := c.turn(r)
	for k := range c.channels {
		if !r.channels[k].missing {
			c.whole[k].add(&r.channels[k], r.lines[k], &turn)
		}
	}
	c.power.add(c.wires, r)
	c.capture.offer(c, b, i, w)
}

// turn returns, for each order, the factor that brings a line's phase to where the reference's fundamental has phase 0.
func (c *collector) turn(r *windowResult) [Orders]complex128 {
	var out [Orders]complex128
	u := complex(1, 0)
	if ref := r.channels[c.reference].line[1]; ref != 0 {
		u = cmplx.Conj(ref) / complex(cmplx.Abs(ref), 0)
	}
	p := complex(1, 0)
	for h := range out {
		out[h] = p
		p *= u
	}
	return out
}

func (t *total) add(w *windowChannel, lines []float64, turn *[Orders]complex128) {
	t.n++
	t.meanSquare += w.meanSquare
	t.dc += w.dc
	t.dcLow, t.dcHigh = min(t.dcLow, w.dc), max(t.dcHigh, w.dc)
	if w.meanSquare > 0 {
		t.crest += max(w.raw.high, -w.raw.low) / math.Sqrt(w.meanSquare)
		t.crestN++
	}
	for h := range Orders {
		t.group[h] += w.group[h]
		t.inter[h] += w.inter[h]
		t.turned[h] += w.line[h] * turn[h]
	}
	f := math.Sqrt(w.group[1])
	t.fundLow, t.fundHigh = min(t.fundLow, f), max(t.fundHigh, f)
	if len(t.lines) < len(lines) {
		t.lines = append(t.lines, make([]float64, len(lines)-len(t.lines))...)
	}
	for i, v := range lines {
		t.lines[i] += v
	}
}

// facts gathers what the samples of an unflagged window tell.
func (c *collector) facts(b *batch, i int) {
	for k := range c.channels {
		w := &b.out[i].channels[k]
		if w.missing {
			continue
		}
		t := &c.whole[k]
		t.raw.merge(w.raw)
		if i == 0 {
			t.upper += b.upper[k]
			t.upperN++
		}
	}
}

func (c *collector) keepLines(cut *cut, r *windowResult) {
	if c.lines == nil || c.linesOnly {
		return
	}
	if cut.at-c.first > spectrogramSeconds {
		c.lines = nil
		return
	}
	c.lines.Times = append(c.lines.Times, cut.at)
	c.lines.LineHz += cut.hz / float64(c.frame.cycles)
	for k := range c.channels {
		column := make([]float64, len(r.lines[k]))
		for j, v := range r.lines[k] {
			column[j] = math.Sqrt(v)
		}
		c.lines.Levels[k] = append(c.lines.Levels[k], column)
	}
}

// boundary closes intervals when a window begins a new one: at a 10 min mark, and after a break.
func (c *collector) boundary(cut *cut) {
	if cut.breaks { // 3 s intervals have no gap: what was begun is dropped
		c.three.reset()
		c.carry.reset()
	}
	c.ten.broken = c.ten.broken || cut.breaks && c.ten.total > 0
	if cut.mark {
		// IEC 61000-4-30, 4.5: the 3 s interval in progress at a mark goes on beside the new one. One that has hardly
		// begun is dropped, so that ten minutes hold 200 of them whatever the frequency does.
		c.carry, c.three = c.three, c.carry
		if c.carry.total <= windowsIn3s/2 {
			c.carry.reset()
		}
		c.three.reset()
		c.closeTen(true)
		c.ten.whole = true
	} else if c.ten.total > 0 && cut.at-c.ten.at >= tenMinutes {
		c.closeTen(false) // the mark itself fell into a gap
	}
}

func (i *interval) reset() {
	channels := i.channels
	clear(channels)
	*i = interval{channels: channels}
}

func (i *interval) add(cut *cut, r *windowResult, flags Flags) {
	if i.total == 0 {
		i.at = cut.at
	}
	i.total++
	i.flags |= flags
	i.end = cut.at + cut.span
	if flags != 0 {
		return
	}
	i.windows++
	i.hz += cut.hz
	for k := range i.channels {
		w, s := &r.channels[k], &i.channels[k]
		if w.missing {
			continue
		}
		s.n++
		s.meanSquare += w.meanSquare
		s.dc += w.dc
		for h := range Orders {
			s.group[h] += w.group[h]
			s.inter[h] += w.inter[h]
		}
	}
}

// result turns sums into rms values.
func (i *interval) result(want int, complete bool) Interval {
	out := Interval{At: i.at, Span: i.end - i.at, Windows: i.windows, Want: want, Flags: i.flags,
		Frequency: i.hz / float64(i.windows), Channels: make([]Levels, len(i.channels))}
	out.Complete = complete && i.windows == i.total
	room := make([]float64, 2*Orders*len(i.channels))
	for k := range i.channels {
		s := &i.channels[k]
		l := &out.Channels[k]
		l.H, l.Inter, room = room[:Orders:Orders], room[Orders:2*Orders:2*Orders], room[2*Orders:]
		n := float64(s.n)
		if s.n != i.windows { // a part of the interval is not the interval
			n = math.NaN()
		}
		l.RMS = math.Sqrt(s.meanSquare / n)
		for h := range Orders {
			l.H[h], l.Inter[h] = math.Sqrt(s.group[h]/n), math.Sqrt(s.inter[h]/n)
		}
		l.H[0] = math.Abs(s.dc) / n
		l.THC = total2(l.H)
	}
	return out
}

// total2 is the root of the sum of squares of orders 2 and up, those measured.
func total2(h []float64) float64 {
	var sum float64
	for _, v := range h[2:] {
		if !math.IsNaN(v) {
			sum += v * v
		}
	}
	if math.IsNaN(h[1]) {
		return math.NaN()
	}
	return math.Sqrt(sum)
}

// closeThree ends a 3 s interval when it has its fifteen windows.
func (c *collector) closeThree(t *interval) {
	if t.total < windowsIn3s || c.linesOnly {
		return
	}
	v := t.result(windowsIn3s, true)
	t.reset()
	if len(c.threes) < keptThrees {
		c.threes = append(c.threes, v)
	}
	if !v.Valid() {
		return
	}
	for k := range v.Channels {
		l := &v.Channels[k]
		for h := 1; h < Orders; h++ {
			c.perLevel[k][h].add(l.H[h], v.At)
			c.perShare[k][h].add(100*l.H[h]/l.H[1], v.At)
		}
		c.perLevel[k][0].add(l.THC, v.At)
		c.perShare[k][0].add(100*l.THC/l.H[1], v.At)
	}
	c.day.add(&v)
}

// closeTen ends a 10 min interval; ended says that it ran up to its mark.
func (c *collector) closeTen(ended bool) {
	t := &c.ten
	if t.total > 0 && !c.linesOnly {
		want := int(math.Round(tenMinutes * c.nominal / float64(c.frame.cycles)))
		if t.windows > 0 {
			want = int(math.Round(tenMinutes * t.hz / float64(t.windows) / float64(c.frame.cycles)))
		}
		// No window may be lacking, but for the last one of a recording that ends with its interval.
		spans := t.whole && ended && !t.broken && math.Abs(float64(t.total-want)) <= 1 && t.end-t.at > tenMinutes-windowSlack
		c.tens = append(c.tens, t.result(want, spans))
	}
	t.reset()
}

// finish closes what is open.
func (c *collector) finish() {
	c.closeTen(c.ten.end-c.ten.at > tenMinutes-windowSlack)
	c.day.close()
	c.events.finish()
}
