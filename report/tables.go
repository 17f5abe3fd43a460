package report

import (
	"math"
	"strconv"
	"strings"
	"time"
)

// Tables lists the survey's tables in the order of the documents; those without rows are left out. Tables that only a
// spreadsheet has room for are in [FullTables].
func Tables(s *Survey) []Table {
	return filled(
		verdictTable(s), openTable(s),
		siteTable(s), hookUpTable(s), recordingTable(s), fileTable(s),
		channelTable(s), statisticsTable(s), dayTable(s), powerTable(s), systemTable(s), plantTable(s),
		orderTable(s, groups[0]), orderTable(s, groups[1]), orderTable(s, groups[2]),
		doubtTable(s), noiseTable(s), eventTable(s), excludedTable(s),
		methodTable(s),
	)
}

// FullTables are the long tables behind the short ones: every finding, every order with all its statistics, every
// interharmonic.
func FullTables(s *Survey) []Table {
	return filled(findingTable(s), spectrumTable(s), interharmonicTable(s))
}

func filled(tables ...Table) []Table {
	var out []Table
	for _, t := range tables {
		if len(t.Rows) > 0 {
			out = append(out, t)
		}
	}
	return out
}

// TableByKey returns the table of that key, from Tables and FullTables.
func TableByKey(s *Survey, key string) (Table, bool) {
	for _, t := range append(Tables(s), FullTables(s)...) {
		if t.Key == key {
			return t, true
		}
	}
	return Table{}, false
}

// text is a column of words; wide ones wrap.
func text(key, head string) Column { return Column{Key: key, Head: head} }
func wide(key, head string) Column { return Column{Key: key, Head: head, Wide: true} }

// number is a column of numbers in the given unit.
func number(key, head, unit string) Column {
	return Column{Key: key, Head: head, Unit: unit, Right: true}
}

func word(s string) Cell { return Cell{Text: s} }

// value is a number as Sig writes it.
func value(n Number) Cell { return Cell{Text: Sig(float64(n)), Number: n, IsNum: true} }

// degrees is an angle, to a tenth of a degree.
func degrees(n Number) Cell {
	if !n.Known() {
		return value(n)
	}
	return Cell{Text: fixed(float64(n), 1), Number: n, IsNum: true}
}

// whole is a count.
func whole(n int) Cell { return Cell{Text: strconv.Itoa(n), Number: Number(n), IsNum: true} }

// moment is when something at a time of the recording happened.
func (r Recording) moment(at float64) Cell {
	c := word(r.Clock(at))
	if r.Start != nil {
		c.Time = r.Start.Add(time.Duration(at * float64(time.Second)))
	}
	return c
}

// blank is a cell of a number that does not apply, as against one that was not measured.
var blank = Cell{}

func result(r string) Cell { return Cell{Text: r, Result: r} }

// column writes numbers that stand under each other with the same decimals, so that they can be compared by eye: as
// many as give the largest three significant digits. What then would read as zero is shown as less than the last digit.
func column(values []Number) []Cell {
	largest := 0.0
	for _, v := range values {
		if v.Known() {
			largest = math.Max(largest, math.Abs(float64(v)))
		}
	}
	decimals := 0
	if largest > 0 {
		decimals = max(0, min(4, Digits-1-int(math.Floor(math.Log10(largest)))))
	}
	out := make([]Cell, len(values))
	for i, v := range values {
		out[i] = Cell{Text: fixed(float64(v), decimals), Number: v, IsNum: true}
	}
	return out
}

func fixed(v float64, decimals int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return Dash
	}
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if v != 0 && strings.Trim(s, "-0.") == "" {
		return "<" + strconv.FormatFloat(math.Pow(10, -float64(decimals)), 'f', decimals, 64)
	}
	return s
}

// addColumns appends formatted columns to rows, cell by cell.
func addColumns(rows [][]Cell, columns ...[]Cell) {
	for _, c := range columns {
		for i := range rows {
			rows[i] = append(rows[i], c[i])
		}
	}
}

// named are tables of a name and a value, such as the site's.
func named(key, title string) Table {
	return Table{Key: key, Title: title, Columns: []Column{text("name", "What"), wide("value", "Value"), wide("source", "Source or remark")}}
}

func (t *Table) add(name, value, remark string) {
	t.Rows = append(t.Rows, []Cell{word(name), word(value), word(remark)})
}

// addNumber adds a declared or measured number, which stays a number in a spreadsheet.
func (t *Table) addNumber(name string, v float64, unit, remark string) {
	t.Rows = append(t.Rows, []Cell{word(name), {Text: Quantity(v, unit), Number: Number(v), IsNum: true, Unit: unit}, word(remark)})
}
