package harmonics

import (
	"context"
	"math"
	"time"

	"wavetally/harmonics/internal/resample"
	"wavetally/harmonics/wave"
)

// tenMinutes is the length of the long aggregation interval, s.
const tenMinutes = 600

// A cutter reads a recording, follows its fundamental and cuts it into windows, handed on in batches.
type cutter struct {
	channels []channel
	nominal  float64   // Hz; 0 until known
	start    time.Time // of the recording; zero when unknown
	free     <-chan *batch
	hand     func(*batch) // takes a batch with its windows

	reference int  // index into channels; -1 until chosen
	cycles    int  // of a window
	linesOnly bool // the recording is made of captures shorter than a window

	seg     segment
	short   []piece // segments shorter than a window, kept until it is clear whether there are longer ones
	windows int
	batches int
	gaps    []Gap
	end     float64 // s, just after the last sample seen
	samples int64
	missing []int64 // samples, per channel
	rate    float64 // of the first segment
	slow    float64 // rate of a segment too slow for a single order; 0 none
	usual   float64 // rms of the fundamental when it was last found
	dark    bool    // there was a segment without a clear fundamental
}

// A segment is the stretch of samples being cut.
type segment struct {
	active  bool
	number  int
	at      float64 // s from the start of the recording, of position 0
	rate    float64
	batch   *batch // holds the samples from position batch.base on
	track   *tracker
	frame   frame
	kernel  *resample.Kernel
	start   float64 // of the next window
	nextTen float64 // position of the next 10 min mark
	mark    bool    // the next window is the first after a mark
	breaks  bool    // the next window is the first of the segment
	holes   []hole
	held    []float64 // last good sample of each channel
	useless bool      // nothing can be measured on it
	cut     int       // windows cut from it
}

// A hole is a run of missing samples of one channel, by position.
type hole struct{ channel, from, to int }

// read cuts the whole recording.
func (c *cutter) read(ctx context.Context, src wave.Source, progress func(seconds float64)) error {
	for b, err := range src.Blocks() {
		if err != nil {
			return err
		}
		if err := ctx.Err(); err != nil {
			return err
		}
		c.block(b)
		if progress != nil {
			progress(c.end)
		}
	}
	c.close()
	if c.windows == 0 {
		c.cutShort()
	}
	return ctx.Err()
}

func (c *cutter) block(b wave.Block) {
	if b.Len() == 0 {
		return
	}
	if !c.seg.active || c.seg.number != b.Segment {
		c.close()
		c.open(b)
	}
	s := &c.seg
	for k, ch := range c.channels {
		s.batch.data[k] = c.take(k, s.batch.data[k], b.Data[ch.source], ch.gain)
	}
	c.samples += int64(b.Len())
	c.end = b.At + float64(b.Len())/b.Rate
	c.advance(false)
}

// take appends samples, in the channel's unit. A missing sample holds the value before it, so that windows beside the
// hole are not spoilt; windows over it are flagged.
func (c *cutter) take(k int, dst, src []float64, gain float64) []float64 {
	s := &c.seg
	n := len(dst)
	if cap(dst)-n < len(src) {
		dst = append(make([]float64, 0, 2*(n+len(src))), dst...)
	}
	dst = dst[:n+len(src)]
	out := dst[n:]
	var check float64
	for i, v := range src {
		v *= gain
		out[i] = v
		check += v - v // 0, or NaN from the first NaN or infinity on
	}
	if check == 0 {
		s.held[k] = out[len(out)-1]
		return dst
	}
	held := s.held[k]
	for i, v := range src {
		v *= gain
		if v-v != 0 {
			v = held
			c.miss(k, s.batch.base+n+i)
		}
		out[i] = v
		held = v
	}
	s.held[k] = held
	return dst
}

func (c *cutter) miss(k, position int) {
	c.missing[k]++
	holes := c.seg.holes
	for i := len(holes) - 1; i >= 0 && i > len(holes)-1-len(c.channels); i-- {
		if h := &holes[i]; h.channel == k && h.to == position {
			h.to++
			return
		}
	}
	c.seg.holes = append(holes, hole{k, position, position + 1})
}

func (c *cutter) open(b wave.Block) {
	if c.samples > 0 {
		if gap := b.At - c.end; gap > 0.5/b.Rate {
			c.gaps = append(c.gaps, Gap{At: c.end, Length: gap})
		}
	} else {
		c.rate = b.Rate
	}
	c.seg = segment{active: true, number: b.Segment, at: b.At, rate: b.Rate, batch: c.fresh(),
		held: make([]float64, len(c.channels)), breaks: true}
	for k, ch := range c.channels { // nothing to hold yet: the first good sample serves
		for _, v := range b.Data[ch.source] {
			if v -= 0; v-v == 0 {
				c.seg.held[k] = v * ch.gain
				break
			}
		}
	}
}

func (c *cutter) fresh() *batch {
	b := <-c.free
	b.base, b.cuts = 0, b.cuts[:0]
	if len(b.data) != len(c.channels) {
		b.data, b.upper = make([][]float64, len(c.channels)), make([]float64, len(c.channels))
	}
	for k := range b.data {
		b.data[k] = b.data[k][:0]
	}
	return b
}

// close ends the segment: what is left of it is cut as far as whole windows go.
func (c *cutter) close() {
	s := &c.seg
	if !s.active {
		return
	}
	c.advance(true)
	s.active = false
	if s.cut == 0 && !s.useless && c.windows == 0 && len(c.short) < maxPieces {
		c.short = append(c.short, newPiece(s))
	}
	if len(s.batch.cuts) > 0 {
		c.dispatch(s.batch)
	} else {
		c.hand(s.batch)
	}
	s.batch = nil
}

func (c *cutter) dispatch(b *batch) {
	b.number = c.batches
	c.batches++
	b.rate, b.frame, b.kernel = c.seg.rate, c.seg.frame, c.seg.kernel
	b.nominal, b.reference, b.linesOnly = c.nominal, c.reference, c.linesOnly
	c.hand(b)
}

// advance cuts as many windows as the samples at hand allow; final says that no more will come.
func (c *cutter) advance(final bool) {
	s := &c.seg
	if s.useless {
		s.batch.data = trim(s.batch.data)
		return
	}
	have := s.batch.base + len(s.batch.data[0])
	if s.track == nil {
		if !final && float64(have) < acquireSeconds*s.rate {
			return
		}
		if !c.lock(final) {
			return
		}
	}
	s.track.extend(s.batch.data[c.reference], s.batch.base)
	for {
		length := float64(c.cycles) * s.rate / s.track.hz
		if !final && have < s.track.need(s.start, length)+s.kernel.After()+c.skew() {
			return
		}
		if s.start+length*0.5 > float64(have) {
			return
		}
		length, flags := s.track.window(s.start, c.cycles, s.batch.data[c.reference], s.batch.base)
		if int(math.Ceil(s.start+length))+s.kernel.After()+c.skew() > have {
			return
		}
		c.add(length, flags)
		if len(s.batch.cuts) >= c.batchWindows() {
			c.swap()
		}
	}
}

func trim(data [][]float64) [][]float64 {
	for k := range data {
		data[k] = data[k][:0]
	}
	return data
}

// batchWindows is how many windows a batch takes: enough to make the handing over cheap, few enough to keep the
// memory for high sampling rates down.
func (c *cutter) batchWindows() int {
	const samples = 320_000 // of all channels
	per := float64(len(c.channels)*c.cycles) * c.seg.rate / c.seg.track.hz
	return min(max(int(samples/per), 1), 16)
}

// skew is how many samples the most delayed channel needs beyond the others, on either side.
func (c *cutter) skew() int {
	var most float64
	for _, ch := range c.channels {
		most = max(most, math.Abs(ch.skew))
	}
	return int(math.Ceil(most * c.seg.rate))
}

func (c *cutter) add(length float64, flags Flags) {
	s := &c.seg
	end := s.start + length
	w := cut{start: s.start, length: length, at: s.at + s.start/s.rate, span: length / s.rate,
		hz: float64(c.cycles) * s.rate / length, flags: flags, mark: s.mark, breaks: s.breaks}
	w.missing, w.flags = c.missingIn(s.start, end, w.flags)
	s.batch.cuts = append(s.batch.cuts, w)
	s.mark, s.breaks = false, false
	s.cut++
	c.windows++
	s.start = end
	// IEC 61000-4-30, 4.5: the window that straddles a 10 min mark is kept, and a new one starts at the mark.
	if end >= s.nextTen-0.01 {
		s.start, s.mark = s.nextTen, true
		s.nextTen += tenMinutes * s.rate
	}
	s.track.forget(s.start)
}

func (c *cutter) missingIn(start, end float64, flags Flags) (uint16, Flags) {
	s := &c.seg
	if len(s.holes) == 0 {
		return 0, flags
	}
	from, to := int(start)-s.kernel.Before(), int(math.Ceil(end))+s.kernel.After()
	var bits uint16
	kept := s.holes[:0]
	for _, h := range s.holes {
		if h.from < to && h.to > from {
			bits |= 1 << h.channel
		}
		if h.to > from {
			kept = append(kept, h)
		}
	}
	s.holes = kept
	if bits&(1<<c.reference) != 0 || bits == 1<<len(c.channels)-1 {
		flags |= Missing
	}
	return bits, flags
}

// swap hands the batch on and goes on with a fresh one that begins with the samples still needed.
func (c *cutter) swap() {
	s := &c.seg
	old, b := s.batch, c.fresh()
	b.base = max(old.base, int(s.start)-s.kernel.Before()-c.skew()-1)
	for k := range b.data {
		b.data[k] = append(b.data[k], old.data[k][b.base-old.base:]...)
	}
	s.batch = b
	c.dispatch(old)
}

// lock finds the fundamental at the start of a segment, and lays out its windows. It reports whether there is
// something to cut.
func (c *cutter) lock(final bool) bool {
	s := &c.seg
	low, high := band(c.nominal)
	if s.rate < 4*low {
		s.useless, c.slow = true, s.rate
		return false
	}
	if c.reference < 0 {
		levels := make([]float64, len(c.channels))
		for k := range c.channels {
			if f := acquire(s.batch.data[k], s.rate, low, high); f.clear {
				levels[k] = f.rms
			}
		}
		c.reference = reference(c.channels, levels)
		if levels[c.reference] == 0 {
			c.reference = -1
		}
	}
	var f found
	if c.reference >= 0 {
		f = acquire(s.batch.data[c.reference], s.rate, low, high)
	}
	if !f.clear {
		c.dark = true
		if c.windows == 0 {
			if !final { // look again at what comes, half a second at a time
				c.shift(0.5)
			}
			return false
		}
		// The supply was followed before: go on at the nominal frequency, and let the windows say that it is lost.
		f.hz, f.rms = c.nominal, c.usual
	}
	c.usual = max(c.usual, f.rms)
	c.settle(f.hz)
	s.frame = newFrame(s.rate, f.hz, c.cycles)
	if s.frame.top < 1 {
		s.useless, c.slow = true, s.rate
		return false
	}
	s.kernel = newKernel(s.rate, f.hz, s.frame)
	s.track = newTracker(s.rate, f.hz, low, high, f.rms)
	s.track.next = s.batch.base
	s.start = float64(s.batch.base + s.kernel.Before() + c.skew() + 1)
	c.marks()
	return true
}

func newKernel(rate, hz float64, f frame) *resample.Kernel {
	return resample.NewKernel(resample.Spec{In: rate, Out: float64(f.perCycle) * hz, Pass: f.pass(rate, hz)})
}

// settle fixes the nominal frequency, and with it the cycles of a window, when the first fundamental is found.
func (c *cutter) settle(hz float64) {
	if c.nominal == 0 {
		c.nominal = 50
		if hz > 55 {
			c.nominal = 60
		}
	}
	c.cycles = windowCycles(c.nominal)
}

// windowCycles is the number of cycles in a window of about 200 ms, IEC 61000-4-7.
func windowCycles(nominal float64) int {
	if nominal == 60 {
		return 12
	}
	return 10
}

// shift drops samples from the front of a segment in which no fundamental was found yet.
func (c *cutter) shift(seconds float64) {
	s := &c.seg
	drop := min(int(seconds*s.rate), len(s.batch.data[0]))
	for k, d := range s.batch.data {
		s.batch.data[k] = append(d[:0], d[drop:]...)
	}
	s.batch.base += drop
}

// marks finds the first 10 min mark of the segment: of UTC when the start is known, else of the recording itself.
func (c *cutter) marks() {
	s := &c.seg
	since := s.at
	if !c.start.IsZero() {
		since += float64(c.start.Unix()%tenMinutes) + float64(c.start.Nanosecond())/1e9
	}
	since = math.Mod(since, tenMinutes)
	s.nextTen = (tenMinutes - since) * s.rate
	const close = 0.02 // s: a recording that starts within a cycle of a mark is taken to start at it
	switch {
	case since < close:
		s.mark = true
	case tenMinutes-since < close:
		s.mark = true
		s.nextTen += tenMinutes * s.rate
	}
	for s.nextTen <= s.start {
		s.nextTen += tenMinutes * s.rate
	}
}
