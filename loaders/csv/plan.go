package csv

import (
	"wavetally/harmonics/wave"
	"wavetally/loaders/table"
)

// A part is what a column adds to a row.
type part uint8

const (
	nothing  part = iota
	value         // a sample
	number        // the time as a number
	stamp         // the time as a stamp
	day           // the date apart from the time of day
	fraction      // the milliseconds apart from the time of day
)

// A step says what to do with one column.
type step struct {
	part  part
	out   int // row of the block, for a value
	shift int // power of ten that brings a value to V or A
}

// A plan says how to read a row. It is shared by the workers and does not change.
type plan struct {
	delimiter byte
	mark      byte // to try first
	sureMark  byte // to hold on to; 0: not known
	steps     []step
	channels  int
	clock     table.Clock
	hasTime   bool
	needed    int   // cells a row must have: up to the last that is used
	origin    int64 // in units of the clock, taken off every stamp before it becomes a float64
}

func newPlan(l table.Layout, channels []channel) *plan {
	p := &plan{delimiter: l.Delimiter, mark: l.DecimalMark(), sureMark: l.Mark, steps: make([]step, l.Width()),
		channels: len(channels), clock: l.Clock}
	for out, c := range channels {
		p.steps[c.column] = step{part: value, out: out, shift: c.shift}
	}
	switch k := l.Clock; k.Kind {
	case table.NumberClock, table.IndexClock:
		p.hasTime = true
		p.steps[k.Column].part = number
	case table.StampClock:
		p.hasTime = true
		p.steps[k.Column].part = stamp
		if k.Date >= 0 && k.Date != k.Column {
			p.steps[k.Date].part = day
		}
		if k.Fraction >= 0 {
			p.steps[k.Fraction].part = fraction
		}
	}
	for c, s := range p.steps {
		if s.part != nothing {
			p.needed = c + 1
		}
	}
	return p
}

// complete reports whether a row of so many cells is a row of this table.
func (p *plan) complete(width int) bool { return width >= p.needed && width <= len(p.steps) }

// A channel is a column that becomes a channel of the recording.
type channel struct {
	column int
	shift  int // power of ten from the column's unit to V or A
	wave.Channel
}

// unitShift returns the base unit and the power of ten to it. An unknown unit is passed on as no unit.
func unitShift(unit string) (base string, shift int) {
	base, factor, ok := wave.BaseUnit(unit)
	if !ok {
		return "", 0
	}
	for factor > 5 {
		factor /= 10
		shift++
	}
	for factor < 0.5 {
		factor *= 10
		shift--
	}
	return base, shift
}
