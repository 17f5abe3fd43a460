package table

import (
	"bytes"
	"slices"
	"strings"
)

// headings takes names and units from the lines right above the first row.
func (g *guesser) headings() []Column {
	names, units := g.headingRows()
	splitPairs(names)
	columns := make([]Column, g.width)
	for c := range columns {
		if c < len(names) {
			columns[c].Name, columns[c].Unit = splitUnit(names[c])
		}
		if c >= len(units) {
			continue
		}
		u := bareUnit(units[c])
		if u == "" || u == "-" {
			continue
		}
		if own := columns[c].Unit; own != "" && !strings.EqualFold(own, u) {
			columns[c].Name = names[c] // what looked like a unit in the name is none
		}
		columns[c].Unit = u
	}
	return columns
}

// headingRows finds the row of names and, below or above it, the row of units. Either is nil when there is none.
func (g *guesser) headingRows() (names, units []string) {
	looked := 0
	for i := g.first - 1; i >= 0 && looked < 6; i-- {
		if len(Trim(g.lines[i].text)) == 0 {
			continue
		}
		looked++
		text, used := g.quotedLines(i)
		i -= used
		row := g.headingRow(text)
		switch {
		case row == nil && names == nil:
		case row != nil && units == nil && isUnitRow(row):
			units = row
		case row != nil && names == nil && g.isNameRow(row):
			names = row
		case row != nil && !distinct(names) && g.isNameRow(row) && distinct(row) && filled(row) >= filled(names):
			return row, units // what stands below describes channels by more than their names
		case names != nil:
			return names, units
		}
	}
	return names, units
}

// quotedLines returns line i, put together with those before it when a quoted heading has line breaks in it, and the
// number of those.
func (g *guesser) quotedLines(i int) (text []byte, used int) {
	text = g.lines[i].text
	for bytes.Count(text, []byte{'"'})%2 == 1 {
		if used++; used > 5 || used > i {
			return g.lines[i].text, 0
		}
		text = slices.Concat(g.lines[i-used].text, []byte{' '}, text)
	}
	return text, used
}

// headingRow returns the cells of a line above the first row as text, nil when it has not about the table's width.
func (g *guesser) headingRow(text []byte) []string {
	row := cells(nil, text, g.delimiter)
	for len(row) > g.width && len(Trim(row[len(row)-1])) == 0 {
		row = row[:len(row)-1]
	}
	if len(row) > g.width || len(row) < g.used()-1 || len(row) < 2 && g.width > 1 {
		return nil
	}
	texts := make([]string, len(row))
	for c, cell := range row {
		texts[c] = strings.ReplaceAll(g.encoding.String(Trim(cell)), `""`, `"`)
		if c == 0 {
			texts[c] = strings.TrimSpace(strings.TrimLeft(texts[c], "#%!;"))
		}
		texts[c] = strings.Trim(texts[c], `"`) // of a quote that is not closed
	}
	return texts
}

func isUnitRow(row []string) bool {
	known, other := 0, 0
	for _, cell := range row {
		switch u := bareUnit(cell); {
		case u == "" || u == "-":
		case knownUnit(u):
			known++
		default:
			other++
		}
	}
	return known > 0 && other*3 <= known && (known > 1 || len(row) < 3)
}

// isNameRow asks for mostly text: a line of settings above the table has a number behind its word.
func (g *guesser) isNameRow(row []string) bool {
	text, number := 0, 0
	for _, cell := range row {
		switch kind := kindOf([]byte(cell), 0); {
		case kind == Text:
			text++
		case kind != Empty:
			number++
		}
	}
	if isTimeWord(row[0]) && len(row) > 2 { // "time,1,2,3" names channels by their numbers
		return true
	}
	return text > 0 && text > number && (len(row) > 2 || number == 0)
}

// distinct reports whether no two cells are the same, empty ones aside.
func distinct(row []string) bool {
	seen := map[string]bool{}
	for _, cell := range row {
		if cell != "" && seen[cell] {
			return false
		}
		seen[cell] = true
	}
	return true
}

// filled counts the cells that hold something.
func filled(row []string) int {
	n := 0
	for _, cell := range row {
		if cell != "" {
			n++
		}
	}
	return n
}

// splitPairs adds units in brackets where a heading is there once with V and once with A behind it, as in "Line 1 V"
// and "Line 1 A": such letters are no phases.
func splitPairs(names []string) {
	seen := map[string]bool{}
	for _, n := range names {
		seen[n] = true
	}
	for i, n := range names {
		rest, isV := strings.CutSuffix(n, " V")
		if !isV {
			var isA bool
			if rest, isA = strings.CutSuffix(n, " A"); !isA {
				continue
			}
		}
		if seen[rest+" V"] && seen[rest+" A"] && !seen[rest+" B"] && !seen[rest+" U"] {
			names[i] = n + " (" + n[len(n)-1:] + ")"
		}
	}
}
