package pdf

import (
	"wavetally/report"
	"wavetally/report/chart"
)

// Measures of tables, in points.
const (
	cellGap   = 9.0 // between columns
	loosePad  = 2.3 // above and below a row's text
	densePad  = 1.2 // the same in a long table of numbers
	markSize  = 6.2 // a verdict's symbol
	markRoom  = 9.5
	tableGap  = 14.0
	noteGap   = 4.0 // between notes beside a table
	longTable = 24  // rows from which a table of numbers is set densely, and a narrow one folded
	firstRows = 6   // rows of such a table that stay together at its ends: a page should not end in a stub
)

// table makes the blocks of a table: title, head, rows, notes. Rows may go to another page, under the head again. A
// table too wide for the page is set in parts, each with the first column; a long narrow one is folded into two.
func (d *document) table(t report.Table) []block {
	if len(t.Rows) == 0 {
		return nil
	}
	parts := d.layOut(t, d.full())
	x, room := d.left, d.full()
	if len(parts) == 1 && parts[0].total() <= d.main() && !parts[0].folds(d.full()) {
		x, room = d.mainX(), d.main()
	}
	var body []block
	for i, g := range parts {
		rows := d.gridBlocks(g, x, room)
		if i > 0 {
			rows[0].gap = tableGap
		}
		body = append(body, rows...)
	}
	if _, high := heights(body, true); x == d.mainX() && d.besideHeight(t.Notes) <= high {
		return append([]block{d.tableTitle(t.Title, x, room, t.Notes)}, d.holdTogether(body, t.Notes)...)
	}
	out := append([]block{d.tableTitle(t.Title, x, room, nil)}, body...)
	for _, n := range t.Notes {
		out[len(out)-1].keep = true
		out = append(out, d.note(n, x, room))
	}
	return out
}

// besideHeight is the height that notes take in the side column.
func (d *document) besideHeight(notes []string) float64 {
	sum := 0.0
	for _, n := range notes {
		sum += textHeight(sideFace, len(wrap(d.pen.measure, sideFace, n, d.side))) + noteGap
	}
	return sum
}

// holdTogether keeps as many rows with a table's title as the notes beside them are high.
func (d *document) holdTogether(body []block, notes []string) []block {
	need := d.besideHeight(notes)
	for i := range body {
		need -= body[i].natural
		body[i].keep = body[i].keep || need > 0 && i < len(body)-1
	}
	return body
}

// gridBlocks are the head and the rows of one part of a table.
func (d *document) gridBlocks(g grid, x, room float64) []block {
	strips := []float64{x}
	rows := len(g.t.Rows)
	if g.folds(room) {
		strips = append(strips, 0)
		rows = (rows + 1) / 2
		g.spread((room-2*gutter)/2-g.total(), 0)
		strips[1] = x + room - g.total()
	} else {
		g.widen(room)
	}
	ends := 2
	if g.dense() {
		ends = firstRows
	}
	head := d.headBlock(g, strips)
	out := []block{head}
	for i := range rows {
		row := d.rowBlocks(g, strips, i, rows)
		for k := range row {
			row[k].head = &head
		}
		row[len(row)-1].keep = i < min(ends, rows)-1 || i < rows-1 && i >= rows-ends // nor begins one with a stub
		out = append(out, row...)
	}
	return out
}

// tableTitle is a table's title, with its notes beside it where the table leaves the side column free.
func (d *document) tableTitle(title string, x, room float64, side []string) block {
	lines := wrap(d.pen.measure, headFace, title, room)
	var notes [][]string
	for _, n := range side {
		notes = append(notes, wrap(d.pen.measure, sideFace, n, d.side))
	}
	b := fixedBlock(tableGap, textHeight(headFace, len(lines))+3, func(y, h float64) {
		d.pen.lines(headFace, chart.Ink, x, y, lines)
		at := y + 1
		for _, n := range notes {
			d.pen.lines(sideFace, chart.Faint, d.left, at, n)
			at += textHeight(sideFace, len(n)) + noteGap
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

// headBlock is the head of a table, at each strip it is set in; the names stand at the bottom of their cells.
func (d *document) headBlock(g grid, strips []float64) block {
	cells := make([][]string, len(g.t.Columns))
	most := 0
	for i, c := range g.t.Columns {
		for _, line := range headLines(c) {
			cells[i] = append(cells[i], wrap(d.pen.measure, g.head, line, g.widths[i]+0.5)...)
		}
		most = max(most, len(cells[i]))
	}
	b := fixedBlock(0, textHeight(g.head, most)+2*loosePad, func(y, h float64) {
		for _, x := range strips {
			at := x
			for i, c := range g.t.Columns {
				top := y + loosePad + textHeight(g.head, most) - textHeight(g.head, len(cells[i]))
				d.headCell(g, c, cells[i], at, top, g.widths[i])
				at += g.widths[i] + cellGap
			}
			d.pen.rule(chart.Ink, 0.7, x, x+g.total(), y+h)
		}
	})
	b.keep = true
	return b
}

// headCell sets a column's name bold and its unit, on the last line, light.
func (d *document) headCell(g grid, c report.Column, lines []string, x, y, width float64) {
	for k, line := range lines {
		f := g.head
		if c.Unit != "" && k == len(lines)-1 {
			f = g.face
		}
		base := y + f.size*0.93 + float64(k)*f.leading()
		if c.Right {
			d.pen.right(f, chart.Ink, x+width, base, line)
		} else {
			d.pen.text(f, chart.Ink, x, base, line)
		}
	}
}

// A setRow is a row of a table at its place across, its cells broken into lines.
type setRow struct {
	x     float64
	row   []report.Cell
	texts [][]string
}

// rowBlocks sets one row in each strip: row i in the first, and in a folded table the row half way on in the second. A
// row of very many lines takes several blocks.
func (d *document) rowBlocks(g grid, strips []float64, i, perStrip int) []block {
	var set []setRow
	most := 1
	for s, x := range strips {
		if k := i + s*perStrip; k < len(g.t.Rows) {
			texts, n := d.wrapRow(g, g.t.Rows[k])
			set = append(set, setRow{x, g.t.Rows[k], texts})
			most = max(most, n)
		}
	}
	ruled := !g.dense() || i%5 == 4 || i == perStrip-1
	var out []block
	for first := 0; first < most; first += mostLines {
		n := min(mostLines, most-first)
		last := first+n == most
		out = append(out, fixedBlock(0, textHeight(g.face, n)+2*g.pad(), func(y, h float64) {
			for _, r := range set {
				d.setRow(g, r, first, n, y+g.pad())
				if ruled && last {
					d.pen.rule(chart.Hair, 0.4, r.x, r.x+g.total(), y+h)
				}
			}
		}))
	}
	return out
}

// setRow sets n lines of a row, from a first one on.
func (d *document) setRow(g grid, r setRow, first, n int, y float64) {
	at := r.x
	for k, c := range r.row {
		lines := r.texts[k][min(first, len(r.texts[k])):min(first+n, len(r.texts[k]))]
		if first > 0 {
			c.Result = "" // the symbol stands on the first line
		}
		d.cell(g, k, c, lines, at, y)
		at += g.widths[k] + cellGap
	}
}

// wrapRow breaks the cells of a row into lines and returns how many the highest has.
func (d *document) wrapRow(g grid, row []report.Cell) (texts [][]string, most int) {
	for i, c := range row {
		room := g.widths[i] + 0.5
		if c.Result != "" {
			room -= markRoom
		}
		texts = append(texts, wrap(d.pen.measure, g.faceOf(c), c.Text, room))
		most = max(most, len(texts[i]))
	}
	return texts, most
}

// cell sets one cell; a verdict has its symbol before the word.
func (d *document) cell(g grid, i int, c report.Cell, lines []string, x, y float64) {
	f, ink := g.faceOf(c), chart.Ink
	if c.Result != "" {
		d.pen.symbol(c.Result, x, y+(f.size*1.18-markSize)/2, markSize)
		x += markRoom
		ink = verdictInk(c.Result)
	}
	if !g.t.Columns[i].Right {
		d.pen.lines(f, ink, x, y, lines)
		return
	}
	for k, line := range lines {
		d.pen.right(f, ink, x+g.widths[i], y+f.size*0.93+float64(k)*f.leading(), line)
	}
}
