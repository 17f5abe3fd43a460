package comtrade

import (
	"bytes"
	"fmt"
	"io"
	"math"

	"wavetally/harmonics/wave"
	"wavetally/loaders/table"
)

// maxLine bounds a line of an ASCII file; 4096 analog and 65 536 status channels take less.
const maxLine = 1 << 20

// Bounds of what is read as a raw value and as a time stamp.
const (
	largestRaw   = 1e100
	largestStamp = 1e18
)

// An asciiReader reads records that are lines of text: number, stamp, analog values, status bits.
type asciiReader struct {
	r        io.Reader
	name     string
	channels []channel
	cells    int     // number, stamp and analog values
	all      int     // with the status bits
	code     float64 // raw value of a missing sample
	total    int64   // records announced

	buf        []byte
	have       []byte // of buf, not yet used
	err        error
	rows       int64
	line       int // of the line taken last
	open       bool
	incomplete bool // the last line was left out
}

// newASCIIReader reads lines of which the first has the number first in its file.
func newASCIIReader(r io.Reader, s *source, first int) *asciiReader {
	n := 2 + len(s.config.analogs)
	return &asciiReader{r: r, name: s.data.name(), channels: s.channels, cells: n, all: n + s.config.statuses, code: editionMissing(s.config.edition),
		total: s.config.rates[len(s.config.rates)-1].last, buf: make([]byte, maxLine), line: first - 1}
}

func (r *asciiReader) next(b *batch) error {
	b.rows = 0
	for b.rows < len(b.numbers) {
		line, err := r.take()
		if err == nil {
			err = r.record(b, line)
		}
		if err != nil {
			if b.rows > 0 && (err == io.EOF || cut(err)) {
				return nil
			}
			return err
		}
	}
	return nil
}

// take returns the next line without its end. What follows a Ctrl-Z, by which DOS ends a text, or a separator of a
// .cff file, is no record.
func (r *asciiReader) take() ([]byte, error) {
	end := bytes.IndexByte(r.have, '\n')
	if end < 0 {
		if err := r.fill(); err != nil {
			return nil, err
		}
		if end = bytes.IndexByte(r.have, '\n'); end < 0 {
			end, r.open = len(r.have), true
		}
	}
	line := r.have[:end]
	r.have = r.have[min(end+1, len(r.have)):]
	r.line++
	if at := bytes.IndexByte(line, 0x1A); at >= 0 {
		line, r.have, r.err = line[:at], nil, io.EOF
	}
	if bytes.HasPrefix(line, []byte("---")) {
		r.have, r.err = nil, io.EOF
		return nil, io.EOF
	}
	return line, nil
}

// fill reads on until there is a whole line, or the last one.
func (r *asciiReader) fill() error {
	n := copy(r.buf, r.have)
	for r.err == nil && bytes.IndexByte(r.buf[:n], '\n') < 0 {
		if n == len(r.buf) {
			return &wave.ParseError{File: r.name, Line: r.line + 1, Msg: "the line is longer than 1 MiB; the file is damaged from here on: copy it again from the recorder"}
		}
		var m int
		m, r.err = readFull(r.r, r.buf[n:])
		n += m
	}
	r.have = r.buf[:n]
	if n == 0 {
		return r.err
	}
	return nil
}

// record parses a line into the next row of b.
func (r *asciiReader) record(b *batch, line []byte) error {
	line = bytes.TrimRight(line, "\r \t\x00")
	if len(line) == 0 {
		return nil
	}
	row := b.rows
	c := cellReader{line: line}
	number, numberOK := c.number()
	stamp, stampOK := c.number()
	if !numberOK && !stampOK {
		b.odd.text.add(r.line, string(line[:min(len(line), 24)]))
		return r.tooOdd(b)
	}
	b.numbers[row], b.stamps[row] = -1, math.NaN()
	if number >= 0 && number < 1<<53 {
		b.numbers[row] = int64(number)
	}
	if missing := stamp == 999999 && r.code == 999999; !missing && math.Abs(stamp) < largestStamp { // 1991's missing stamp
		b.stamps[row] = stamp
	}
	at := 2
	for i := range r.channels {
		ch := &r.channels[i]
		for ; at < 2+ch.column; at++ {
			c.skip()
		}
		b.data[i][row] = r.value(&c, ch, b, i)
		at++
	}
	if r.ragged(&c, at) {
		if r.open {
			r.incomplete = true
			return nil
		}
		b.odd.ragged.add(r.line, "")
	}
	b.rows++
	r.rows++
	return r.tooOdd(b)
}

// ragged reports whether a line ends before its last value, of which at cells have been read. The last line of a file
// cut short may end within a number.
func (r *asciiReader) ragged(c *cellReader, at int) bool {
	for ; at < r.cells; at++ {
		c.skip()
	}
	if c.short || !r.open || r.total <= r.rows+1 {
		return c.short
	}
	for ; at < r.all; at++ {
		c.skip()
	}
	return c.short || r.all == r.cells
}

func (r *asciiReader) value(c *cellReader, ch *channel, b *batch, i int) float64 {
	x, ok := c.number()
	switch {
	case c.short:
	case !ok && c.empty():
		b.odd.missing[i].add(r.line, "")
	case !ok:
		b.odd.unreadable[i].add(r.line, string(c.cell[:min(len(c.cell), 24)]))
	case x == r.code || x == ch.missing:
		b.odd.missing[i].add(r.line, "")
	case math.Abs(x) > largestRaw:
		b.odd.unreadable[i].add(r.line, fmt.Sprint(x))
	default:
		return ch.gain*x + ch.off
	}
	return math.NaN()
}

// tooOdd ends reading when lines of another shape are no exception any more.
func (r *asciiReader) tooOdd(b *batch) error {
	odd := b.odd.text.n + b.odd.ragged.n
	if odd <= 64 || odd*20 < r.rows {
		return nil
	}
	line := b.odd.ragged.at
	if line == 0 || b.odd.text.n > 0 && b.odd.text.at < line {
		line = b.odd.text.at
	}
	return &wave.ParseError{File: r.name, Line: int(line), Msg: "the line is no record of number, time stamp and the announced analog values, and many more are like it; the configuration may belong to other data: copy both again from the recorder"}
}

// A cellReader goes through the cells of a line.
type cellReader struct {
	line  []byte
	at    int
	cell  []byte // the last cell, where it was no number
	short bool   // the line ended before a cell that was asked for
}

// number reads the next cell. It reports false where that is no number; the value is NaN then.
func (c *cellReader) number() (float64, bool) {
	if c.at > len(c.line) {
		c.short, c.cell = true, nil
		return math.NaN(), false
	}
	i := c.at
	for i < len(c.line) && c.line[i] == ' ' {
		i++
	}
	v, next, ok := table.Scan(c.line, i, '.', 0)
	for ok && next < len(c.line) && c.line[next] == ' ' {
		next++
	}
	if ok && (next == len(c.line) || c.line[next] == ',') {
		c.at = next + 1
		return v, !math.IsInf(v, 0)
	}
	start := c.at
	c.skip()
	c.cell = bytes.TrimSpace(c.line[start : c.at-1])
	if v, kind := table.Cell(c.cell, '.', 0); kind == table.Number {
		return v, true
	}
	return math.NaN(), false
}

// skip passes over the next cell.
func (c *cellReader) skip() {
	if c.at > len(c.line) {
		c.short = true
		return
	}
	if n := bytes.IndexByte(c.line[c.at:], ','); n >= 0 {
		c.at += n + 1
	} else {
		c.at = len(c.line) + 1
	}
}

// empty reports whether the last cell held nothing, or a word for it.
func (c *cellReader) empty() bool {
	_, kind := table.Cell(c.cell, '.', 0)
	return kind == table.Empty || kind == table.Missing
}
