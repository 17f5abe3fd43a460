package csv

import (
	"errors"
	"fmt"
	"io"
	"iter"
	"math"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
	"wavetally/loaders/table"
	"wavetally/loaders/timebase"
)

// rows opens the file again and reads up to the first row.
func (s *source) rows() (io.Reader, io.Closer, error) {
	f, err := s.opt.Open(s.path)
	if err != nil {
		return nil, nil, err
	}
	r := s.layout.Encoding.Reader(f)
	if err := skip(r, s.layout.Offset); err != nil {
		f.Close()
		return nil, nil, s.readError(err)
	}
	return r, f, nil
}

// Blocks reads the rows.
func (s *source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		r, closer, err := s.rows()
		if err != nil {
			yield(wave.Block{}, err)
			return
		}
		defer closer.Close()
		feed := startFeed(&cutter{r: r, size: s.chunkSize()}, s.plan)
		defer feed.close()
		run := newRun(s, yield)
		for c := feed.next(); c != nil; c = feed.next() {
			if !run.take(c) {
				return
			}
			feed.release(c)
		}
		run.end()
	}
}

func (s *source) chunkSize() int {
	if s.chunk == 0 {
		return chunkSize(16 * s.layout.Width())
	}
	return s.chunk
}

// A run is one reading of the rows.
type run struct {
	source  *source
	yield   func(wave.Block, error) bool
	tracker *timebase.Tracker
	block   wave.Block
	odd     oddities
	lines   int   // before the chunk at hand
	rows    int64 // handed over
	pending int   // rows of another shape, to be handed over only if rows of the right one follow
	jumps   jumps
	stretch float64
	step    float64  // s, resolution of the stamps at hand
	rates   []string // other rates than the first, in words
	stopped bool
}

func newRun(s *source, yield func(wave.Block, error) bool) *run {
	r := &run{source: s, yield: yield, odd: newOddities(len(s.channels)), lines: s.layout.Line}
	r.block = wave.Block{Rate: s.header.Rate, Data: make([][]float64, len(s.channels))}
	s.notes = nil
	r.stretch = s.stretch()
	if s.plan.hasTime {
		wraps := 0.0
		if k := s.layout.Clock; k.Kind == table.StampClock && k.Date < 0 {
			wraps = 86400
		}
		r.tracker = timebase.NewTracker(s.fit, s.header.Rate, wraps)
	}
	return r
}

// stretch is what brings a row's stamp to seconds of the recording.
func (s *source) stretch() float64 {
	switch {
	case s.layout.Clock.Kind == table.IndexClock:
		return 1 / s.header.Rate
	case s.fit.Interval > 0 && s.opt.DeclaredRate() > 0:
		return s.fit.Rate() / s.header.Rate
	}
	return 1
}

// take hands over the rows of a chunk. It reports false when reading is to end.
func (r *run) take(c *chunk) bool {
	if c.cut && c.rows > 0 {
		r.source.addNote("truncated", "", "The last line, %d, ends in the middle of a row; it is left out.", r.lines+c.lines-1)
		c.dropLast()
	}
	if whole := c.rows - c.tail; whole > 0 {
		if r.pending > 0 && !r.blanks() {
			return false
		}
		if !r.hand(c, whole) {
			return false
		}
		r.pending = 0
	}
	r.pending += c.tail
	r.odd.merge(&c.odd, r.lines)
	r.lines += c.lines
	if errors.Is(c.err, input.ErrCut) {
		r.source.addNote("truncated", "", "The packed file is cut short in line %d of what is in it; what comes before is used.", r.lines)
		return true
	}
	if c.err != nil {
		r.fail(c.err)
		return false
	}
	if err := r.malformed(); err != nil {
		r.stop(err)
		return false
	}
	return true
}

// hand hands over the first n rows of a chunk, in blocks that end where the rows do not follow on.
func (r *run) hand(c *chunk, n int) bool {
	if r.tracker == nil {
		return r.emit(c, 0, n, r.at(0))
	}
	if k := r.source.layout.Clock; k.Kind != table.IndexClock {
		r.step = resolution(k, c.decimals())
		r.tracker.Allow(r.step)
	}
	from, at := 0, 0.0
	for i := range n {
		event, t := r.tracker.Next(r.stamp(c.times[i]))
		if i == 0 {
			at = t
		}
		if event == timebase.Follows {
			continue
		}
		if i > from && !r.emit(c, from, i, at) {
			return false
		}
		if r.rows > 0 {
			r.block.Segment++
		}
		if !r.newRate(c.times[i:n], t) {
			r.jumps.add(event, t, r.tracker.Off())
		}
		from, at = i, t
	}
	return r.emit(c, from, n, at)
}

// newRate looks whether the rows from time at on keep another rate, and goes over to it if they do.
func (r *run) newRate(stamps []float64, at float64) bool {
	if r.stretch != 1 || r.tracker.Keeps(stamps) {
		return false
	}
	points := make([]timebase.Point, len(stamps))
	for i, t := range stamps {
		points[i] = timebase.Point{Row: int64(i), T: t, Step: r.step}
	}
	fit, err := timebase.From(points, r.source.originSeconds())
	if err != nil {
		return false
	}
	rate := fit.Rate()
	if math.Abs(rate-r.block.Rate) < 1e-3*rate {
		return false
	}
	r.tracker.Restart(fit, rate)
	r.tracker.Allow(r.step)
	if r.block.Rate = rate; len(r.rates) < 4 {
		r.rates = append(r.rates, fmt.Sprintf("%.7g Hz from %.6g s", rate, at))
	}
	return true
}

func resolution(k table.Clock, digits int) float64 {
	if k.Kind == table.NumberClock {
		return k.Seconds * math.Pow10(-digits)
	}
	return math.Pow10(-digits)
}

// stamp turns a running number of samples into seconds. Where the site sheet's rate overrules the stamps, they are
// stretched to it, so that they still tell where rows are missing.
func (r *run) stamp(t float64) float64 { return t * r.stretch }

// at is the time of the row n rows on, in a recording without stamps.
func (r *run) at(n int) float64 { return float64(r.rows+int64(n)) / r.block.Rate }

// emit hands over rows [from, to) in blocks of at most BlockLen.
func (r *run) emit(c *chunk, from, to int, at float64) bool {
	for start := from; start < to; start += wave.BlockLen {
		end := min(start+wave.BlockLen, to)
		for out := range r.block.Data {
			r.block.Data[out] = c.columns[out][start:end]
		}
		r.block.At = at + float64(start-from)/r.block.Rate
		r.rows += int64(end - start)
		if !r.yield(r.block, nil) {
			r.stopped = true
			return false
		}
	}
	return true
}

// blanks hands over rows of missing samples in place of rows that could not be read.
func (r *run) blanks() bool {
	c := newChunk(len(r.block.Data))
	for range r.pending {
		if c.rows == len(c.times) {
			c.grow()
		}
		c.blank()
	}
	return r.hand(c, c.rows)
}

// malformed ends reading when rows of another shape are no exception any more.
func (r *run) malformed() error {
	const few = 64
	if n := r.odd.ragged.n; n <= few || n*20 < r.rows {
		return nil
	}
	t := r.odd.ragged
	return &wave.ParseError{File: r.source.name, Line: t.line, Msg: fmt.Sprintf(
		"the row has %d cells where the table has %d, and %d more rows are like it; split the file where another table begins, or state delimiter and header_lines under [file] in the site sheet",
		t.cells, r.source.layout.Width(), t.n-1)}
}

func (r *run) stop(err error) {
	r.stopped = true
	r.yield(wave.Block{}, err)
}

func (r *run) fail(err error) {
	if err == errLongLine {
		r.stop(&wave.ParseError{File: r.source.name, Line: r.lines, Msg: "the line is longer than 1 MiB; the file is damaged from here on: export it again"})
		return
	}
	r.stop(r.source.readError(err))
}
