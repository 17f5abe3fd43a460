package csv

import (
	"bytes"
	"math"

	"wavetally/loaders/table"
)

// A chunk is a stretch of whole lines and, once parsed, the rows in it. Chunks are cut by the file's bytes alone, so
// the result does not depend on how many workers parse them.
type chunk struct {
	text []byte // ends with a line end
	open bool   // the file ended without one here
	cut  bool   // in the middle of a row
	err  error  // that ended reading after this chunk

	rows    int
	columns [][]float64 // [channel][row]
	times   []float64   // [row], s since the plan's origin; NaN where there is none
	digits  int         // decimals that stamps have, where they have the fewest
	most    int         // decimals so far in this group of rows
	lines   int
	tail    int // rows at the end that are of another table's shape
	odd     oddities
	strange []strangeCell // of the row being read

	parsed chan struct{}
}

// A strangeCell is a cell of values that holds no number.
type strangeCell struct {
	channel  int
	kind     table.Kind
	from, to int
}

// oddities counts what was odd in the rows, with the first place of each.
type oddities struct {
	missing    []tally // [channel] cells that are empty or marked as missing
	unreadable []tally // [channel] cells that hold something else
	ragged     tally   // rows with too few or too many cells
	text       tally   // lines that are no rows
	nul        tally   // lines of NUL bytes
	badTime    tally   // rows whose time cannot be read
}

// A tally counts one kind of oddity.
type tally struct {
	n     int64
	line  int    // of the first
	text  string // of the first
	cells int    // of the first, for rows
}

func (t *tally) add(line int, text []byte) {
	if t.n == 0 {
		t.line, t.text = line, string(text[:min(len(text), 60)])
	}
	t.n++
}

func (t *tally) merge(o tally, lines int) {
	if t.n == 0 && o.n > 0 {
		*t = o
		t.line += lines
		return
	}
	t.n += o.n
}

func newChunk(channels int) *chunk {
	c := &chunk{columns: make([][]float64, channels), parsed: make(chan struct{}, 1)}
	c.odd = newOddities(channels)
	return c
}

func newOddities(channels int) oddities {
	return oddities{missing: make([]tally, channels), unreadable: make([]tally, channels)}
}

func (o *oddities) reset() {
	clear(o.missing)
	clear(o.unreadable)
	o.ragged, o.text, o.nul, o.badTime = tally{}, tally{}, tally{}, tally{}
}

func (o *oddities) merge(p *oddities, lines int) {
	for c := range o.missing {
		o.missing[c].merge(p.missing[c], lines)
		o.unreadable[c].merge(p.unreadable[c], lines)
	}
	o.ragged.merge(p.ragged, lines)
	o.text.merge(p.text, lines)
	o.nul.merge(p.nul, lines)
	o.badTime.merge(p.badTime, lines)
}

// reset makes c ready to be filled again.
func (c *chunk) reset() {
	c.rows, c.digits, c.most, c.lines, c.tail, c.open, c.cut, c.err = 0, math.MaxInt, 0, 0, 0, false, false, nil
	c.odd.reset()
}

// grow makes room for twice the rows.
func (c *chunk) grow() {
	n := max(1024, 2*len(c.times))
	for i := range c.columns {
		bigger := make([]float64, n)
		copy(bigger, c.columns[i])
		c.columns[i] = bigger
	}
	times := make([]float64, n)
	copy(times, c.times)
	c.times = times
}

// parse reads all rows of the chunk.
func (c *chunk) parse(p *plan) {
	b := c.text
	for i := 0; i < len(b); {
		switch b[i] {
		case '\n':
			i++
			c.lines++
			continue
		case '\r':
			i++
			if i == len(b) || b[i] != '\n' {
				c.lines++
			}
			continue
		}
		if c.rows == len(c.times) {
			c.grow()
		}
		before := c.rows
		if i = c.row(p, b, i); c.open && i == len(b)-1 && c.rows > before {
			c.cut = c.tail > 0 || c.seemsCut(p)
		}
	}
}

// seemsCut reports whether the last line, which has no line end, stops within its last cell: the cell cannot be read,
// or has fewer decimals than all of those above it.
func (c *chunk) seemsCut(p *plan) bool {
	if n := len(c.strange); n > 0 && c.strange[n-1].to == len(c.text)-1 {
		return true
	}
	lines := bytes.Split(bytes.TrimRight(c.text, "\r\n"), []byte{'\n'})
	if len(lines) < 5 {
		return false
	}
	last := lastDecimals(p, lines[len(lines)-1])
	for _, line := range lines[max(0, len(lines)-20) : len(lines)-1] {
		if lastDecimals(p, line) <= last {
			return false
		}
	}
	return true
}

// lastDecimals counts the decimals of a line's last cell.
func lastDecimals(p *plan, line []byte) int {
	line = bytes.TrimRight(line, "\r ")
	if p.delimiter != 0 {
		line = line[bytes.LastIndexByte(line, p.delimiter)+1:]
	}
	at := bytes.IndexByte(line, p.mark)
	if at < 0 {
		return 0
	}
	return len(line) - at - 1
}

// tries counts the cells of a row that hold a number and that hold text.
type tries struct{ good, text int }

// row reads the row that starts at b[i] and returns where its line's end is. The common case, plain numbers and single
// delimiters, passes through Scan alone.
func (c *chunk) row(p *plan, b []byte, i int) int {
	start := i
	c.strange = c.strange[:0]
	var clock instant
	var found tries
	for column := range p.steps {
		s := &p.steps[column]
		for b[i] == ' ' {
			i++
		}
		end := i
		if s.part == value {
			v, next, ok := table.Scan(b, i, p.mark, s.shift)
			for ok && b[next] == ' ' {
				next++
			}
			if ok && p.ends(b, next) {
				found.good++
				end = next
			} else {
				v, end = c.cell(p, b, i, s, &found)
			}
			c.columns[s.out][c.rows] = v
		} else {
			end = p.time(b, i, s.part, &clock)
		}
		if b[end] == '\n' || b[end] == '\r' {
			c.finish(p, b[start:end], column+1, found, clock)
			return end
		}
		if i = end; p.delimiter != ' ' {
			i++
		}
	}
	end := lineEnd(b, i)
	c.finish(p, b[start:end], len(p.steps)+extra(p, b, i), found, clock)
	return end
}

// ends reports whether a cell ends at b[i], blanks behind it having been passed.
func (p *plan) ends(b []byte, i int) bool {
	return b[i] == p.delimiter || b[i] == '\n' || b[i] == '\r' || p.delimiter == ' ' && i > 0 && b[i-1] == ' '
}

func lineEnd(b []byte, i int) int {
	for b[i] != '\n' && b[i] != '\r' {
		i++
	}
	return i
}

// extra counts the cells with something in them beyond the last column.
func extra(p *plan, b []byte, i int) int {
	n := 0
	for b[i] != '\n' && b[i] != '\r' {
		end := table.FieldEnd(b, i, p.delimiter)
		if len(table.Trim(b[i:end])) > 0 {
			n++
		}
		if i = end; b[i] == p.delimiter {
			i++
		}
		for p.delimiter == ' ' && b[i] == ' ' {
			i++
		}
	}
	return n
}

// cell reads a cell that is no plain number.
func (c *chunk) cell(p *plan, b []byte, i int, s *step, found *tries) (float64, int) {
	end := table.FieldEnd(b, i, p.delimiter)
	v, kind := table.Cell(b[i:end], p.sureMark, s.shift)
	switch kind {
	case table.Number:
		found.good++
		return v, end
	case table.Text:
		found.text++
	}
	c.strange = append(c.strange, strangeCell{s.out, kind, i, end})
	return v, end
}

// finish decides what to make of a line whose cells have been read.
func (c *chunk) finish(p *plan, line []byte, width int, found tries, clock instant) {
	switch {
	case p.complete(width) && !clock.text && (found.good > 0 || p.hasTime && clock.set || found.text == 0 && width > 1):
		c.keep(p, line, clock)
	case len(table.Trim(line)) == 0:
		if line[0] == 0 {
			c.odd.nul.add(c.lines, nil)
		}
	case found.good == 0 || clock.text || p.hasTime && !clock.set || !p.hasTime && found.text > 0:
		c.odd.text.add(c.lines, line)
	default:
		c.odd.ragged.add(c.lines, line)
		if c.odd.ragged.n == 1 {
			c.odd.ragged.cells = width
		}
		c.blank()
		c.tail++
	}
}

// keep makes a row of the line whose cells have been read.
func (c *chunk) keep(p *plan, line []byte, clock instant) {
	for _, s := range c.strange {
		if s.kind == table.Text {
			c.odd.unreadable[s.channel].add(c.lines, c.text[s.from:s.to])
		} else {
			c.odd.missing[s.channel].add(c.lines, c.text[s.from:s.to])
		}
	}
	t := math.NaN()
	if p.hasTime {
		if clock.set {
			t = clock.seconds(p)
			c.resolve(clock.digits)
		} else {
			c.odd.badTime.add(c.lines, line)
		}
	}
	c.times[c.rows] = t
	c.rows++
	c.tail = 0
}

// dropLast takes the last row back, with what was odd about it.
func (c *chunk) dropLast() {
	c.rows--
	if c.tail > 0 {
		c.tail--
		c.odd.ragged.n--
		return
	}
	for _, s := range c.strange {
		if s.kind == table.Text {
			c.odd.unreadable[s.channel].n--
		} else {
			c.odd.missing[s.channel].n--
		}
	}
}

// resolve finds how finely stamps are written. Trailing zeros may have been left out of some, so the longest of a group
// of rows counts, and of the groups the shortest, since six digits resolve less the longer the time.
func (c *chunk) resolve(digits int) {
	const group = 64
	if c.most = max(c.most, digits); c.rows%group == group-1 {
		c.digits, c.most = min(c.digits, c.most), 0
	}
}

// decimals is the result of resolve.
func (c *chunk) decimals() int {
	if c.rows < 64 {
		return c.most
	}
	return c.digits
}

// blank adds a row without values, so that those after it keep their place.
func (c *chunk) blank() {
	for out := range c.columns {
		c.columns[out][c.rows] = math.NaN()
	}
	c.times[c.rows] = math.NaN()
	c.rows++
}
