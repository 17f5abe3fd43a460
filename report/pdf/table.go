package pdf

import (
	"wavetally/report"
	"wavetally/report/chart"
)

// Measures of tables, in points.
const (
	cellGap   = 9.0 // between columns
	rowPad    = 2.6 // above and below a row's text
	narrowest = 46  // a column of wrapped text
	markSize  = 6.2 // a verdict's symbol
	markRoom  = 9.5
)

// A grid is a table laid out: widths of its columns and the face they fit in.
type grid struct {
	t      report.Table
	face   face
	head   face
	widths []float64
}

// layOut finds the largest face of three in which the table fits a width without wrapping what is not meant to wrap;
// text columns give way first, and if nothing else helps, every column does.
func (d *document) layOut(t report.Table, room float64) grid {
	var g grid
	for _, size := range []float64{7.8, 7.2, 6.6} {
		g = grid{t: t, face: face{false, size}, head: face{true, size}}
		g.widths = make([]float64, len(t.Columns))
		for i := range t.Columns {
			g.widths[i] = d.columnWidth(g, i)
		}
		if g.squeeze(d, room) {
			return g
		}
	}
	g.force(room)
	return g
}

// columnWidth is what a column would take unwrapped.
func (d *document) columnWidth(g grid, i int) float64 {
	w := d.headWidth(g, i)
	for _, row := range g.t.Rows {
		cw := d.pen.measure(g.face, clean(row[i].Text))
		if row[i].Result != "" {
			cw += markRoom
		}
		w = max(w, cw)
	}
	return w
}

// headWidth is the width of a column's head, its unit on a line of its own.
func (d *document) headWidth(g grid, i int) float64 {
	w := 0.0
	for _, line := range headLines(g.t.Columns[i]) {
		w = max(w, d.pen.measure(g.head, clean(line)))
	}
	return w
}

func headLines(c report.Column) []string {
	if c.Unit == "" {
		return []string{c.Head}
	}
	return []string{c.Head, c.Unit}
}

func (g *grid) total() float64 {
	sum := cellGap * float64(len(g.widths)-1)
	for _, w := range g.widths {
		sum += w
	}
	return sum
}

// squeeze narrows the columns that may wrap until the table fits, the widest first, and reports whether it does.
func (g *grid) squeeze(d *document, room float64) bool {
	over := g.total() - room
	for over > 0 {
		widest, next := -1, 0.0
		for i, c := range g.t.Columns {
			if !c.Wide || g.widths[i] <= narrowest {
				continue
			}
			switch {
			case widest < 0 || g.widths[i] > g.widths[widest]:
				if widest >= 0 {
					next = g.widths[widest]
				}
				widest = i
			default:
				next = max(next, g.widths[i])
			}
		}
		if widest < 0 {
			return false
		}
		cut := min(over, max(1, g.widths[widest]-max(next, narrowest)))
		g.widths[widest] -= cut
		over -= cut
	}
	return true
}

// force scales what is left so that the table fits; cells then wrap wherever they must.
func (g *grid) force(room float64) {
	space := room - cellGap*float64(len(g.widths)-1)
	sum := g.total() - cellGap*float64(len(g.widths)-1)
	for i := range g.widths {
		g.widths[i] *= space / sum
	}
}

// table makes the blocks of a table: title, header, rows, notes. Rows may go to another page, under the header again.
func (d *document) table(t report.Table) []block {
	if len(t.Rows) == 0 {
		return nil
	}
	g := d.layOut(t, d.full())
	x, room := d.left, d.full()
	if g.total() <= d.main() {
		x, room = d.mainX(), d.main()
	}
	g.widen(room)
	var out []block
	side := t.Notes
	if x == d.left {
		side = nil
	}
	out = append(out, d.tableTitle(t.Title, x, room, side))
	head := d.headBlock(g, x)
	out = append(out, head)
	for i, row := range t.Rows {
		b := d.rowBlock(g, x, row)
		b.head = &head
		// Neither the first nor the last row stands alone on a page.
		b.keep = i == 0 && len(t.Rows) > 1 || i == len(t.Rows)-2
		out = append(out, b)
	}
	if x == d.left {
		for _, n := range t.Notes {
			out[len(out)-1].keep = true
			out = append(out, d.note(n, x, room))
		}
	}
	return out
}

// widen spreads a table that nearly fills its room over all of it, so that tables above each other end alike.
func (g *grid) widen(room float64) {
	spare := room - g.total()
	if spare <= 0 {
		return
	}
	wide := 0
	for _, c := range g.t.Columns {
		if c.Wide {
			wide++
		}
	}
	if wide == 0 && spare > 0.35*room {
		return
	}
	for i, c := range g.t.Columns {
		switch {
		case wide > 0 && c.Wide:
			g.widths[i] += spare / float64(wide)
		case wide == 0 && i < len(g.widths)-1:
			g.widths[i] += spare / float64(len(g.widths)-1)
		}
	}
}

func (d *document) tableTitle(title string, x, room float64, side []string) block {
	lines := wrap(d.pen.measure, headFace, title, room)
	var notes [][]string
	for _, n := range side {
		notes = append(notes, wrap(d.pen.measure, sideFace, n, d.side))
	}
	b := fixedBlock(14, textHeight(headFace, len(lines))+3, func(y, h float64) {
		d.pen.lines(headFace, chart.Ink, x, y, lines)
		at := y + 1
		for _, n := range notes {
			d.pen.lines(sideFace, chart.Faint, d.left, at, n)
			at += textHeight(sideFace, len(n)) + 4
		}
	})
	b.keep = true
	return b
}

func (d *document) note(text string, x, room float64) block {
	lines := wrap(d.pen.measure, sideFace, text, room)
	return fixedBlock(3, textHeight(sideFace, len(lines)), func(y, h float64) {
		d.pen.lines(sideFace, chart.Faint, x, y, lines)
	})
}

// headBlock is the header of a table, heads at the bottom of their cells.
func (d *document) headBlock(g grid, x float64) block {
	cells := make([][]string, len(g.t.Columns))
	most := 0
	for i, c := range g.t.Columns {
		for _, line := range headLines(c) {
			cells[i] = append(cells[i], wrap(d.pen.measure, g.head, line, g.widths[i]+cellGap/2)...)
		}
		most = max(most, len(cells[i]))
	}
	height := textHeight(g.head, most) + 2*rowPad
	b := fixedBlock(0, height, func(y, h float64) {
		at := x
		for i, c := range g.t.Columns {
			top := y + rowPad + textHeight(g.head, most) - textHeight(g.head, len(cells[i]))
			for k, line := range cells[i] {
				f := g.head
				if c.Unit != "" && k == len(cells[i])-1 {
					f = g.face
				}
				d.cellLine(f, c.Right, at, top+f.size*0.93+float64(k)*f.leading(), g.widths[i], line)
			}
			at += g.widths[i] + cellGap
		}
		d.pen.rule(chart.Ink, 0.7, x, x+g.total(), y+h)
	})
	b.keep = true
	return b
}

func (d *document) cellLine(f face, right bool, x, y, width float64, line string) {
	if right {
		d.pen.right(f, chart.Ink, x+width, y, line)
		return
	}
	d.pen.text(f, chart.Ink, x, y, line)
}

func (d *document) rowBlock(g grid, x float64, row []report.Cell) block {
	cells := make([][]string, len(row))
	most := 1
	for i, c := range row {
		room := g.widths[i] + 0.5
		if c.Result != "" {
			room -= markRoom
		}
		cells[i] = wrap(d.pen.measure, g.face, c.Text, room)
		most = max(most, len(cells[i]))
	}
	return fixedBlock(0, textHeight(g.face, most)+2*rowPad, func(y, h float64) {
		at := x
		for i, c := range row {
			d.cell(g, i, c, cells[i], at, y+rowPad)
			at += g.widths[i] + cellGap
		}
		d.pen.rule(chart.Hair, 0.4, x, x+g.total(), y+h)
	})
}

func (d *document) cell(g grid, i int, c report.Cell, lines []string, x, y float64) {
	f, ink := g.face, chart.Ink
	if c.Result != "" {
		d.pen.symbol(c.Result, x, y+(f.size*1.18-markSize)/2, markSize)
		x += markRoom
		ink = verdictInk(c.Result)
		f.bold = c.Result == "exceeds"
	}
	if g.t.Columns[i].Right {
		for k, line := range lines {
			d.pen.right(f, ink, x+g.widths[i], y+f.size*0.93+float64(k)*f.leading(), line)
		}
		return
	}
	d.pen.lines(f, ink, x, y, lines)
}
