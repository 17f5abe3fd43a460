package csv

import (
	"bytes"
	"math"
	"strconv"

	"wavetally/loaders/table"
)

// An instant is a row's time, put together from one or more cells. Whole units and fractions are kept apart until the
// origin has been taken off, since a float64 of seconds since 1970 resolves no more than a quarter of a microsecond.
type instant struct {
	set    bool
	whole  int64 // units of the clock
	part   float64
	digits int // decimals as written, in the clock's unit
	zoned  bool
	text   bool // a cell for the time holds a word
}

// seconds is the time from the plan's origin.
func (t instant) seconds(p *plan) float64 {
	scale := p.clock.Seconds
	if p.clock.Kind != table.NumberClock {
		scale = 1
	}
	return (float64(t.whole-p.origin) + t.part) * scale
}

// time reads a cell that is not a value, adds what it says to t, and returns the cell's end.
func (p *plan) time(b []byte, i int, what part, t *instant) int {
	if what == number {
		if end, ok := t.scan(b, i, p.mark); ok {
			for b[end] == ' ' {
				end++
			}
			if p.ends(b, end) {
				t.set = true
				return end
			}
		}
	}
	end := table.FieldEnd(b, i, p.delimiter)
	cell := b[i:end]
	t.text = t.text || what != nothing && startsWord(cell)
	switch what {
	case number:
		t.number(cell, p.sureMark)
	case stamp, day:
		if s, ok := table.ParseStamp(cell, p.clock.Order); ok {
			t.set = t.set || what == stamp
			t.zoned = t.zoned || s.HasZone
			t.whole += s.Sec
			t.part += s.Frac
			t.digits = max(t.digits, s.Digits)
		}
	case fraction:
		if v, kind := table.Cell(cell, p.sureMark, 0); kind == table.Number {
			t.part += v * 1e-3
			t.digits = max(t.digits, 3+decimals(table.Trim(cell)))
		}
	}
	return end
}

// startsWord reports whether a cell starts with two letters, as those of captions do and those of times do not, names
// of months aside.
func startsWord(cell []byte) bool {
	cell = table.Trim(cell)
	if len(cell) < 2 || !letter(cell[0]) || !letter(cell[1]) {
		return false
	}
	_, stamp := table.ParseStamp(cell, table.DayFirst)
	_, kind := table.Cell(cell, 0, 0)
	return !stamp && kind == table.Text
}

func letter(c byte) bool { return c|0x20 >= 'a' && c|0x20 <= 'z' }

// scan reads a plain number without an exponent as whole and part.
func (t *instant) scan(b []byte, i int, mark byte) (int, bool) {
	negative := b[i] == '-'
	if negative || b[i] == '+' {
		i++
	}
	start := i
	var whole int64
	for b[i]-'0' <= 9 {
		whole = whole*10 + int64(b[i]-'0')
		i++
	}
	digits := i - start
	part, decimals := 0.0, 0
	if b[i] == mark {
		i++
		start = i
		var fraction uint64
		for b[i]-'0' <= 9 {
			fraction = fraction*10 + uint64(b[i]-'0')
			i++
		}
		if decimals = i - start; decimals > 18 {
			return 0, false
		}
		part = float64(fraction) / tens[decimals]
	}
	if digits > 18 || digits+decimals == 0 || b[i]|0x20 == 'e' {
		return 0, false
	}
	if negative {
		whole, part = -whole, -part
	}
	t.whole, t.part, t.digits = whole, part, decimals
	return i, true
}

var tens = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18}

// number reads any other number.
func (t *instant) number(cell []byte, mark byte) {
	v, kind := table.Cell(cell, mark, 0)
	if kind != table.Number || math.Abs(v) > 1e18 {
		return
	}
	whole := math.Trunc(v)
	t.set, t.whole, t.part = true, int64(whole), v-whole
	t.digits = decimals(table.Trim(cell))
}

// decimals counts the digits behind the decimal mark, those that an exponent shifts there included.
func decimals(cell []byte) int {
	exponent := 0
	if at := bytes.IndexAny(cell, "eE"); at >= 0 {
		exponent, _ = strconv.Atoi(string(bytes.TrimPrefix(cell[at+1:], []byte{'+'})))
		cell = cell[:at]
	}
	n := 0
	if at := bytes.LastIndexAny(cell, ".,"); at >= 0 {
		n = len(cell) - at - 1
	}
	return min(max(0, n-exponent), 18)
}
