package xlsx

import (
	"math"
	"strings"
	"time"

	"github.com/xuri/excelize/v2"
)

// A cell is a value, or a formula with the value that it has in the survey.
type cell struct {
	value   any // string, float64 or nil
	formula string
	style   style
}

// as returns the cell in another look.
func (c cell) as(s style) cell {
	format := c.style.format
	c.style = s
	if c.style.format == "" {
		c.style.format = format
	}
	return c
}

// live makes the cell's value the result of a formula.
func (c cell) live(formula string) cell {
	c.formula = formula
	return c
}

var none = cell{}

// text is words. Empty text is an empty cell.
func text(s string) cell {
	if s = clean(s); s == "" {
		return none
	}
	return cell{value: s}
}

// number is a number in a given format; an empty cell where it was not measured.
func number(v float64, format string) cell {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return cell{style: style{format: format}}
	}
	return cell{value: v, style: style{format: format}}
}

// measured is a number shown with a few significant digits.
func measured(v float64) cell { return number(v, formatFor(v)) }

func count(n int) cell { return number(float64(n), wholeFormat) }

// result is the word a formula gave, which may be empty.
func result(s string) cell { return cell{value: s} }

// moment is a date; an empty cell where it is not known.
func moment(t time.Time) cell {
	if t.IsZero() {
		return none
	}
	return cell{value: serial(t), style: dateLook}
}

// serial is the moment as spreadsheets count it: days since the end of 1899, UTC.
func serial(t time.Time) float64 {
	const epoch = 25569 // days from there to 1970
	days := epoch + float64(t.Unix())/86400 + float64(t.Nanosecond())/86400e9
	return math.Round(days*1e10) / 1e10 // the library cuts numbers off after 15 digits, which would turn 4:00:00 into 3:59:59
}

// at is a cell's address within its sheet, such as "C12".
func at(column, row int) string {
	name, err := excelize.CoordinatesToCellName(column, row)
	if err != nil {
		panic("xlsx: " + err.Error()) // only for addresses outside a sheet
	}
	return name
}

// column1 is a column's letters.
func column1(column int) string { return strings.TrimRight(at(column, 1), "1") }

// fixed is the same with dollar signs, which keep a formula's address where it is when rows are sorted.
func fixed(column, row int) string {
	name, err := excelize.CoordinatesToCellName(column, row, true)
	if err != nil {
		panic("xlsx: " + err.Error())
	}
	return name
}
