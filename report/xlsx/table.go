package xlsx

import (
	"strconv"

	"wavetally/report"
)

func itoa(n int) string { return strconv.Itoa(n) }

// wideColumn is how wide a column of sentences is, in digits.
const wideColumn = 60

// noteWidth is how long the lines of a note are.
const noteWidth = 150

// table writes one of the survey's tables: title, heads, units, rows, notes. It returns the first and last row of the
// data.
func (s *sheet) table(t report.Table) (first, last int) {
	s.part(t.Title)
	return s.untitled(t)
}

func (s *sheet) untitled(t report.Table) (first, last int) {
	units := unitColumns(t)
	var columns []column
	for i, c := range t.Columns {
		col := column{head: c.Head, unit: c.Unit}
		if c.Wide && !s.tight {
			col.width = wideColumn
		}
		columns = append(columns, col)
		if units[i] {
			columns = append(columns, column{head: "Unit"})
		}
	}
	first = s.header(columns) + 1
	for _, r := range t.Rows {
		s.add(s.tableRow(t, units, r)...)
	}
	last = s.next() - 1
	for _, n := range t.Notes {
		s.note(n, s.room(len(columns)))
	}
	return first, last
}

// room is how many letters of a note go over some columns.
func (s *sheet) room(columns int) int {
	sum := 0.0
	for i, w := range s.fit() {
		if i < columns {
			sum += w
		}
	}
	return min(max(int(1.15*sum), 100), noteWidth)
}

// unitColumns tells the columns whose rows have units of their own.
func unitColumns(t report.Table) map[int]bool {
	out := map[int]bool{}
	for _, r := range t.Rows {
		for i, c := range r {
			if c.Unit != "" {
				out[i] = true
			}
		}
	}
	return out
}

func (s *sheet) tableRow(t report.Table, units map[int]bool, r []report.Cell) []cell {
	var out []cell
	for i, c := range r {
		made := tableCell(c)
		if t.Columns[i].Wide && !s.tight {
			made.style.wrap = true
		}
		out = append(out, made)
		if units[i] {
			out = append(out, text(c.Unit))
		}
	}
	return out
}

func tableCell(c report.Cell) cell {
	switch {
	case !c.Time.IsZero():
		return moment(c.Time)
	case c.IsNum:
		return number(float64(c.Number), decimalsOf(c.Text))
	case c.Text == report.Dash:
		return none
	}
	return text(c.Text)
}

// tables writes those of the given keys that the survey has, with room between.
func (s *sheet) tables(keys ...string) (any bool) {
	for _, key := range keys {
		t, ok := s.book.tables[key]
		if !ok {
			continue
		}
		if any {
			s.gap()
		}
		s.table(t)
		any = true
	}
	return any
}
