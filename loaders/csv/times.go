package csv

import (
	"wavetally/loaders/table"
	"wavetally/loaders/timebase"
)

// times collects stamps of rows, in neighbouring pairs where they change, thinned evenly once there are many.
type times struct {
	plan   *plan
	chunk  *chunk
	row    int64
	first  instant
	origin int64
	points []timebase.Point
	last   timebase.Point
	next   int64 // row from which the next pair is kept
	every  int64
}

// maxPoints bounds the memory of a scan, however long the file.
const maxPoints = 16384

// newTimes prepares a plan's rows for being read for their time alone.
func newTimes(p *plan) *times {
	only := *p
	only.steps = make([]step, len(p.steps))
	for i, s := range p.steps {
		if s.part != value {
			only.steps[i] = s
		}
	}
	only.channels = 0
	return &times{plan: &only, chunk: newChunk(0), every: 1}
}

// read takes in the chunk's rows.
func (t *times) read() {
	b := t.chunk.text
	for i := 0; i < len(b); {
		if b[i] == '\n' || b[i] == '\r' {
			i++
			continue
		}
		var clock instant
		i = t.plan.rowTime(b, i, &clock)
		if !clock.set {
			continue
		}
		if t.row == 0 {
			t.first, t.origin = clock, clock.whole
			t.plan.origin = clock.whole
		}
		t.add(timebase.Point{Row: t.row, T: clock.seconds(t.plan), Step: resolution(t.plan.clock, clock.digits)})
		t.row++
	}
}

func (t *times) add(p timebase.Point) {
	if t.row == 0 {
		t.last = p
		t.points = append(t.points, p)
		return
	}
	if p.T != t.last.T && p.Row >= t.next {
		if n := len(t.points); t.points[n-1].Row != t.last.Row {
			t.points = append(t.points, t.last)
		}
		t.points = append(t.points, p)
		t.next = p.Row + t.every
	}
	t.last = p
	if len(t.points) >= maxPoints {
		t.thin()
	}
}

// thin drops every other pair of rows.
func (t *times) thin() {
	kept := t.points[:0]
	for i := 0; i+1 < len(t.points); i += 4 {
		kept = append(kept, t.points[i], t.points[i+1])
	}
	t.points = kept
	t.every = max(2, 2*t.every)
}

// rowTime reads the time of the row at b[i] and returns where its line ends.
func (p *plan) rowTime(b []byte, i int, clock *instant) int {
	for column := range p.steps {
		for b[i] == ' ' {
			i++
		}
		end := i
		if what := p.steps[column].part; what == nothing {
			end = table.FieldEnd(b, i, p.delimiter)
		} else {
			end = p.time(b, i, what, clock)
		}
		if column+1 >= p.needed {
			return lineEnd(b, end)
		}
		if b[end] == '\n' || b[end] == '\r' {
			*clock = instant{} // too few cells for a row
			return end
		}
		if i = end; p.delimiter != ' ' {
			i++
		}
	}
	return lineEnd(b, i)
}

// scanTimes reads the whole file for its stamps, or as much of it as settles the rate.
func (s *source) scanTimes() ([]timebase.Point, error) {
	r, closer, err := s.rows()
	if err != nil {
		return nil, err
	}
	defer closer.Close()
	k := &cutter{r: r, size: maxChunk}
	t := newTimes(s.plan)
	for looked := int64(0); k.fill(t.chunk); {
		if t.chunk.err != nil {
			break // reported when the rows are read
		}
		t.read()
		if t.row > 4*looked { // each look costs more the more points there are
			looked = t.row
			if fit, err := timebase.From(t.points, s.originSeconds()); err == nil && fit.Uncertainty() < 5e-7 {
				break
			}
		}
	}
	return t.points, nil
}
