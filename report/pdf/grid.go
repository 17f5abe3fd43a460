package pdf

import (
	"math"
	"slices"
	"strings"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

// narrowest is how far a column of wrapped text is narrowed, in points.
const narrowest = 46

// A grid is a table, or a part of one, laid out: the widths of its columns and the faces they fit in.
type grid struct {
	t          report.Table
	face, head face
	widths     []float64
}

// layOut finds the largest of three sizes in which the table fits a width without wrapping what is not meant to wrap.
// If none does, it is divided by columns.
func (d *document) layOut(t report.Table, room float64) []grid {
	var g grid
	for _, size := range []float64{7.8, 7.2, 6.6} {
		g = grid{t: t, face: face{false, size}, head: face{true, size}, widths: make([]float64, len(t.Columns))}
		for i := range t.Columns {
			g.widths[i] = d.columnWidth(g, i)
		}
		if g.squeeze(room, func(c report.Column) bool { return c.Wide }) {
			return []grid{g}
		}
	}
	if g.squeeze(room, func(c report.Column) bool { return !c.Right }) { // a long name, where a short one was expected
		return []grid{g}
	}
	// Parts of about equal width, not a full one and a leftover.
	parts := math.Ceil(g.total() / room)
	first := max(g.fitting(min(room, g.total()/parts+narrowest)), min(2, g.fitting(room)))
	if first < 2 || first == len(t.Columns) {
		g.force(room)
		return []grid{g}
	}
	return append(d.layOut(columns(t, 0, first), room), d.layOut(columns(t, first, len(t.Columns)), room)...)
}

// columns is a table of some of the columns; one that does not begin with the first has that before them.
func columns(t report.Table, from, to int) report.Table {
	pick := func(n int) []int {
		var out []int
		if from > 0 {
			out = append(out, 0)
		}
		for i := from; i < n; i++ {
			out = append(out, i)
		}
		return out
	}
	out := report.Table{Key: t.Key}
	for _, i := range pick(to) {
		out.Columns = append(out.Columns, t.Columns[i])
	}
	for _, row := range t.Rows {
		var cells []report.Cell
		for _, i := range pick(to) {
			cells = append(cells, row[i])
		}
		out.Rows = append(out.Rows, cells)
	}
	return out
}

// fitting counts the leading columns that fit a width, cut where no channel's columns are torn apart if possible.
func (g grid) fitting(room float64) int {
	sum, n := -cellGap, 0
	for n < len(g.widths) && sum+g.widths[n]+cellGap <= room {
		sum += g.widths[n] + cellGap
		n++
	}
	whole := n
	for whole > 2 && whole < len(g.widths) && owner(g.t.Columns[whole]) == owner(g.t.Columns[whole-1]) {
		whole--
	}
	if whole > 2 {
		return whole
	}
	return n
}

// owner is the channel that a column's key begins with: "V1" of "V1_rms".
func owner(c report.Column) string {
	name, _, _ := strings.Cut(c.Key, "_")
	return name
}

// columnWidth is what a column takes unwrapped.
func (d *document) columnWidth(g grid, i int) float64 {
	w := 0.0
	for _, line := range headLines(g.t.Columns[i]) {
		w = max(w, d.pen.measure(g.head, clean(line)))
	}
	for _, row := range g.t.Rows {
		mark := 0.0
		if row[i].Result != "" {
			mark = markRoom
		}
		w = max(w, mark+d.pen.measure(g.faceOf(row[i]), clean(row[i].Text)))
	}
	return w
}

// faceOf is the face a cell is set in: what exceeds stands out.
func (g grid) faceOf(c report.Cell) face {
	f := g.face
	f.bold = c.Result == limits.Exceeds
	return f
}

// headLines are a column's name, and its unit on a line of its own.
func headLines(c report.Column) []string {
	if c.Unit == "" {
		return []string{c.Head}
	}
	return []string{c.Head, c.Unit}
}

func (g grid) total() float64 {
	sum := cellGap * float64(len(g.widths)-1)
	for _, w := range g.widths {
		sum += w
	}
	return sum
}

// squeeze narrows columns that may wrap until the table fits, always the widest, and reports whether it does.
func (g grid) squeeze(room float64, may func(report.Column) bool) bool {
	for over := g.total() - room; over > 0; {
		widest := -1
		for i, c := range g.t.Columns {
			if may(c) && g.widths[i] > narrowest && (widest < 0 || g.widths[i] > g.widths[widest]) {
				widest = i
			}
		}
		if widest < 0 {
			return false
		}
		cut := min(over, 4, g.widths[widest]-narrowest)
		g.widths[widest] -= cut
		over -= cut
	}
	return true
}

// force scales all columns so that the table fits; cells then wrap wherever they must.
func (g grid) force(room float64) {
	gaps := cellGap * float64(len(g.widths)-1)
	share := (room - gaps) / (g.total() - gaps)
	for i := range g.widths {
		g.widths[i] *= share
	}
}

// widen spreads a table over its room, so that tables above each other end alike. Numbers alone are not torn apart by
// more than a third of it.
func (g grid) widen(room float64) {
	spare := room - g.total()
	wide := 0
	for _, c := range g.t.Columns {
		if c.Wide {
			wide++
		}
	}
	if spare <= 0 || wide == 0 && spare > 0.35*room {
		return
	}
	g.spread(spare, wide)
}

// spread gives spare room to the columns of text that wrap, and without any to all columns but the last.
func (g grid) spread(spare float64, wide int) {
	for i, c := range g.t.Columns {
		switch {
		case wide > 0 && c.Wide:
			g.widths[i] += spare / float64(wide)
		case wide == 0 && i < len(g.widths)-1:
			g.widths[i] += spare / float64(len(g.widths)-1)
		}
	}
}

// dense reports whether the table is a long one of numbers alone.
func (g grid) dense() bool {
	return len(g.t.Rows) > longTable && !slices.ContainsFunc(g.t.Columns, func(c report.Column) bool { return !c.Right })
}

func (g grid) pad() float64 {
	if g.dense() {
		return densePad
	}
	return loosePad
}

// folds reports whether the table is long and narrow enough to stand twice beside itself.
func (g grid) folds(room float64) bool {
	return len(g.t.Rows) > longTable && 2*g.total()+2*gutter <= room
}
