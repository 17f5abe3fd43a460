package table

import (
	"bytes"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// A guesser finds the columns of a table whose dialect is known.
type guesser struct {
	dialect
	encoding Encoding
	declared site.File
	lines    []line

	first  int         // index in lines of the first row
	kinds  []Kind      // of each column
	values [][]float64 // [column][row] of the first rows, NaN where there is no number
	texts  [][]string  // [column][row] where kinds is stampKind
}

func (g *guesser) layout() (Layout, error) {
	g.classify()
	if err := g.findFirst(); err != nil {
		return Layout{}, err
	}
	g.readRows()
	l := Layout{Encoding: g.encoding, Delimiter: g.delimiter, Mark: g.mark, Offset: int64(g.lines[g.first].offset), Line: g.lines[g.first].number}
	l.Columns = g.headings()
	if err := g.clock(&l); err != nil {
		return Layout{}, err
	}
	l.Facts = readFacts(g.lines[:g.first], g.encoding, l.Clock.Order)
	g.chooseValues(&l)
	return l, nil
}

// row splits lines[i].
func (g *guesser) row(i int) [][]byte { return cells(nil, g.lines[i].text, g.delimiter) }

// used is the number of columns up to the last that holds anything.
func (g *guesser) used() int {
	n := g.width
	for n > 1 && g.kinds[n-1] == Empty {
		n--
	}
	return n
}

// keptRows is the number of rows that columns are classified by: enough to see a time advance.
const keptRows = 1000

// classify finds what each column mostly holds, over all rows that look like data.
func (g *guesser) classify() {
	counts := make([]map[Kind]int, g.width)
	for i := range counts {
		counts[i] = map[Kind]int{}
	}
	for i := 0; i < len(g.lines); i += max(1, len(g.lines)/keptRows) {
		row := g.row(i)
		if len(row) != g.width {
			continue
		}
		if score, _ := rowScore(row, g.mark); score == 0 {
			continue
		}
		for c, cell := range row {
			counts[c][kindOf(Trim(cell), g.mark)]++
		}
	}
	g.kinds = make([]Kind, g.width)
	for c, n := range counts {
		g.kinds[c] = dominant(n)
	}
}

// dominant is what a column holds: nothing when four cells in five are empty, else the commonest of number, stamp and
// text. Marks for missing values say nothing about a column unless there is nothing else.
func dominant(n map[Kind]int) Kind {
	filled := n[Number] + n[stampKind] + n[Text] + n[Missing]
	switch {
	case filled*5 <= n[Empty]:
		return Empty
	case n[stampKind] > n[Number] && n[stampKind] >= n[Text]:
		return stampKind
	case n[Number] >= n[Text] && n[Number] > 0:
		return Number
	case n[Text] > 0:
		return Text
	}
	return Missing
}

// findFirst finds the first row: every column holds in it what it holds elsewhere.
func (g *guesser) findFirst() error {
	if g.declared.HeaderLines != nil {
		g.first = max(0, *g.declared.HeaderLines)
		return nil
	}
	for i := range g.lines {
		if g.fits(g.row(i)) {
			g.first = i
			return nil
		}
	}
	return ErrNoTable
}

func (g *guesser) fits(row [][]byte) bool {
	if len(row) != g.width {
		return false
	}
	found := false
	for c, cell := range row {
		cell = Trim(cell)
		switch kind := kindOf(cell, g.mark); g.kinds[c] {
		case Number:
			if kind == Text || kind == stampKind && !bytes.ContainsAny(cell, ".") {
				return false
			}
			found = found || kind == Number
		case stampKind:
			if kind != stampKind && kind != Number {
				return false
			}
		}
	}
	return found
}

// readRows keeps the numbers and stamps of the first rows.
func (g *guesser) readRows() {
	g.values = make([][]float64, g.width)
	g.texts = make([][]string, g.width)
	for i := g.first; i < min(len(g.lines), g.first+keptRows); i++ {
		row := g.row(i)
		if len(row) != g.width {
			continue
		}
		for c, cell := range row {
			if g.kinds[c] == stampKind || g.kinds[c] == Text {
				g.texts[c] = append(g.texts[c], string(Trim(cell)))
			}
			v, _ := Cell(cell, g.mark, 0)
			g.values[c] = append(g.values[c], v)
		}
	}
}

// chooseValues marks what holds measured values, and says of the rest why it is not read.
func (g *guesser) chooseValues(l *Layout) {
	for c := range l.Columns {
		col := &l.Columns[c]
		switch {
		case col.Use == Time || col.Why != "":
		case g.kinds[c] == Empty:
			col.Why = "it is empty"
		case g.kinds[c] == Text || g.kinds[c] == stampKind:
			col.Why = "it holds text"
			if l.badTime == "" && isTimeWord(col.Name) {
				l.badTime = firstText(g.texts[c])
			}
		default:
			col.Use = Value
			col.CellUnit = g.cellUnit(c)
		}
	}
}

// cellUnit finds the unit that a column's cells carry themselves, as in "230.1 V".
func (g *guesser) cellUnit(c int) string {
	for i := g.first; i < min(len(g.lines), g.first+20); i++ {
		row := g.row(i)
		if c >= len(row) {
			continue
		}
		cell := string(Trim(row[c]))
		at := strings.LastIndexAny(cell, "0123456789., ")
		if base, _, ok := wave.BaseUnit(cell[at+1:]); ok && at >= 0 {
			return base
		}
	}
	return ""
}

// falls reports whether a column goes down more often than the rare resets of a clock do. A coarse time may well stand
// still over all the rows looked at.
func falls(values []float64) bool {
	up, down := 0, 0
	last := math.NaN()
	for _, v := range values {
		if v > last {
			up++
		} else if v < last {
			down++
		}
		if !math.IsNaN(v) {
			last = v
		}
	}
	return down > 0 && down*50 > up
}

// evenSteps reports whether the steps of a column are alike, as of a time or a running number and of no waveform.
func evenSteps(values []float64) bool {
	if len(values) < 4 {
		return false
	}
	steps := make([]float64, 0, len(values)-1)
	for i := 1; i < len(values); i++ {
		steps = append(steps, values[i]-values[i-1])
	}
	sorted := slices.Clone(steps)
	slices.Sort(sorted)
	middle := sorted[len(sorted)/2]
	if !(middle > 0) {
		return false
	}
	even := 0
	for _, s := range steps {
		if math.Abs(s-middle) < 0.6*middle {
			even++
		}
	}
	return even*10 >= len(steps)*9
}

// whole reports whether all values are whole and rise by the same whole step.
func whole(values []float64) bool {
	if len(values) < 2 {
		return false
	}
	step := values[1] - values[0]
	if step != math.Trunc(step) || step <= 0 {
		return false
	}
	even := 0
	for i, v := range values {
		if v != math.Trunc(v) {
			return false
		}
		if i > 0 && v-values[i-1] == step {
			even++
		}
	}
	return even*10 >= (len(values)-1)*9
}

// columnCalled finds the column that the site sheet names, by its heading or its number from 1.
func columnCalled(columns []Column, called string) (int, error) {
	for c, col := range columns {
		if col.Name != "" && strings.EqualFold(col.Name, called) {
			return c, nil
		}
	}
	if n, err := strconv.Atoi(called); err == nil && n >= 1 && n <= len(columns) {
		return n - 1, nil
	}
	return 0, &FormatError{Msg: fmt.Sprintf("time_column = %q in the site sheet is no column of this table (it has %s); name one, or \"none\"", called, list(columns))}
}

// list names the columns for a message.
func list(columns []Column) string {
	var names []string
	for c, col := range columns {
		if c == 12 {
			names = append(names, "…")
			break
		}
		if col.Name == "" {
			names = append(names, strconv.Itoa(c+1))
		} else {
			names = append(names, strconv.Quote(col.Name))
		}
	}
	return strings.Join(names, ", ")
}
