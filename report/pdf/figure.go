package pdf

import (
	"wavetally/report"
	"wavetally/report/chart"
)

// figure sets a chart in the main column under its title, its caption beside it.
func (d *document) figure(c report.Chart) block {
	m := d.pen.measure
	title := wrap(m, headFace, c.Title, d.main())
	caption := wrap(m, sideFace, c.Caption, d.side)
	size := chart.SizeOf(c)
	head := textHeight(headFace, len(title)) + 4
	beside := textHeight(sideFace, len(caption)) + head
	return block{
		gap:   16,
		least: max(head+float64(size.Least), beside), natural: max(head+float64(size.Natural), beside), most: max(head+float64(size.Most), beside),
		draw: func(y, h float64) {
			d.pen.lines(headFace, chart.Ink, d.mainX(), y, title)
			d.pen.lines(sideFace, chart.Faint, d.left, y+1, caption)
			v, done := d.pen.vectors(d.mainX(), y+head, d.main(), h-head)
			chart.Draw(v, c, d.place)
			done()
		},
	}
}

// section begins a part of the document: a rule over the whole width and its title.
func (d *document) section(title string) block {
	b := fixedBlock(22, 22, func(y, h float64) {
		d.pen.rule(chart.Ink, 1, d.left, d.rightX(), y)
		d.pen.text(sectionFace, chart.Ink, d.left, y+17, title)
	})
	b.keep = true
	b.outline = title
	return b
}

// mostLines is how many lines of a paragraph stay together; a longer one may go on on the next page.
const mostLines = 14

// item is a paragraph in the main column with a label beside it and small print below it.
func (d *document) item(label, text, small string, gap float64) []block {
	m := d.pen.measure
	var fine []string
	if small != "" {
		fine = wrap(m, sideFace, small, d.main())
	}
	return d.paragraph(label, wrap(m, textFace, text, d.main()), textFace, fine, gap)
}

// paragraph sets lines in the main column, in as many blocks as it takes: the label beside the first, small print below
// the last.
func (d *document) paragraph(label string, lines []string, f face, fine []string, gap float64) []block {
	var out []block
	side := wrap(d.pen.measure, sideHead, label, d.side)
	for first := 0; first < len(lines); first += mostLines {
		piece := lines[first:min(first+mostLines, len(lines))]
		height := float64(len(piece)) * f.leading()
		var beside, below []string
		if first == 0 {
			beside = side
		}
		if first+mostLines >= len(lines) {
			below, height = fine, textHeight(f, len(piece))
		}
		fineAt := height + 2
		if below != nil {
			height = fineAt + textHeight(sideFace, len(below))
		}
		height = max(height, textHeight(sideHead, len(beside)))
		out = append(out, fixedBlock(gap, height, func(y, h float64) {
			d.pen.lines(sideHead, chart.Ink, d.left, y+(f.size-sideHead.size)*0.6, beside)
			d.pen.lines(f, chart.Ink, d.mainX(), y, piece)
			d.pen.lines(sideFace, chart.Faint, d.mainX(), y+fineAt, below)
		}))
		gap = 0
	}
	return out
}
