// Package table understands tables of numbers as instruments and spreadsheets export them: how the bytes stand for
// text, what separates cells, where the header ends, which column tells the time and which units the others have.
// It guesses from the first lines, and what the site sheet's file table declares overrules each guess.
package table

import (
	"fmt"
	"strings"
)

// A Use is what a column serves for.
type Use uint8

// Uses of columns.
const (
	Skip  Use = iota // not read; Column.Why says why
	Value            // measured values
	Time             // the time, or the part of it that Clock names
)

// A Column describes one column.
type Column struct {
	Name string // without its unit; "" when the header has none
	Unit string // as written; "" when the header has none
	Use  Use
	Why  string // why the column is not read

	// CellUnit is the base unit that the cells carry themselves; their values come out in it.
	CellUnit string
}

// A ClockKind says in what form rows carry their time.
type ClockKind uint8

// Kinds of clocks.
const (
	NoClock      ClockKind = iota
	StampClock             // dates and times of day
	NumberClock            // a number of seconds or of another unit of time
	IndexClock             // a running number of samples
	NoClockAsked           // the site sheet says that no column tells the time
)

// A Clock says where and how a row tells its time.
type Clock struct {
	Kind       ClockKind
	Column     int     // of the stamp, number or index; -1 without a clock
	Date       int     // of the date when it stands apart; -1 if it does not
	Fraction   int     // of the milliseconds when they stand apart; -1 if they do not
	Unit       string  // of a number, as understood: "s", "ms", "us", "ns", "min", "h" or "d"
	Seconds    float64 // of one such unit
	UnitStated bool    // by the header or the site sheet; else seconds are assumed
	Epoch      bool    // a number counts from 1970-01-01 UTC
	Order      Order   // of dates
	OrderSaid  bool    // by the site sheet, or by a date that can be read in one way only
}

// A Layout says how a table is written.
type Layout struct {
	Encoding  Encoding
	Delimiter byte  // 0: a single column; ' ': one or more blanks
	Mark      byte  // decimal mark; 0 when no number seen so far has one
	Offset    int64 // of the first row's first byte, in the decoded text
	Line      int   // of the first row, from 1
	Columns   []Column
	Clock     Clock
	Facts     Facts // stated in the lines above the table

	badTime string // the first cell of a column that is called a time but holds text
}

// Unread says which column should tell the time but cannot be read; "" when there is none.
func (l Layout) Unread() string {
	if l.badTime == "" {
		return ""
	}
	return fmt.Sprintf("%q is no time that can be read; export times as seconds or as 2026-03-01 10:00:00.000, or state sampling_rate and time_column = \"none\" under [file] in the site sheet", l.badTime)
}

// Width is the number of cells in a row.
func (l Layout) Width() int { return len(l.Columns) }

// DecimalMark is the decimal mark to try first.
func (l Layout) DecimalMark() byte {
	if l.Mark == 0 {
		return '.'
	}
	return l.Mark
}

// String says in one line how the table was understood.
func (l Layout) String() string {
	var parts []string
	add := func(format string, args ...any) { parts = append(parts, fmt.Sprintf(format, args...)) }
	if l.Encoding.Name != "" {
		add("%s", l.Encoding.Name)
	}
	switch l.Delimiter {
	case 0:
		add("one column")
	case '\t':
		add("columns separated by tabs")
	case ' ':
		add("columns separated by blanks")
	default:
		add("columns separated by %q", string(l.Delimiter))
	}
	if l.Mark == ',' {
		add("decimal comma")
	}
	parts = append(parts, l.Rows())
	return strings.Join(parts, "; ")
}

// Rows says in one line where the rows are and what tells their time.
func (l Layout) Rows() string {
	return fmt.Sprintf("first row of numbers in line %d; %s", l.Line, l.clockText())
}

func (l Layout) clockText() string {
	c := l.Clock
	name := func(i int) string {
		if n := l.Columns[i].Name; n != "" {
			return fmt.Sprintf("column %d %q", i+1, n)
		}
		return fmt.Sprintf("column %d", i+1)
	}
	switch c.Kind {
	case StampClock:
		text := "time stamps in " + name(c.Column)
		if c.Date >= 0 && c.Date != c.Column {
			text = "dates in " + name(c.Date) + ", times in " + name(c.Column)
		}
		if c.Fraction >= 0 {
			text += ", milliseconds in " + name(c.Fraction)
		}
		return text
	case NumberClock:
		if !c.UnitStated {
			return fmt.Sprintf("time in %s, which does not say its unit, taken as seconds", name(c.Column))
		}
		if c.Epoch {
			return fmt.Sprintf("time in %s, in %s since 1970-01-01 UTC", name(c.Column), c.Unit)
		}
		return fmt.Sprintf("time in %s, in %s", name(c.Column), c.Unit)
	case IndexClock:
		return "sample numbers in " + name(c.Column)
	}
	return "no column tells the time"
}
