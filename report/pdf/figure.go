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
	b := fixedBlock(24, 24, func(y, h float64) {
		d.pen.rule(chart.Ink, 1, d.left, d.rightX(), y)
		d.pen.text(sectionFace, chart.Ink, d.left, y+17, title)
	})
	b.keep = true
	b.outline = title
	return b
}

// item is a paragraph in the main column with a label beside it and small print below it.
func (d *document) item(label, text, small string, gap float64) block {
	m := d.pen.measure
	side := wrap(m, sideHead, label, d.side)
	lines := wrap(m, textFace, text, d.main())
	var fine []string
	if small != "" {
		fine = wrap(m, sideFace, small, d.main())
	}
	body := textHeight(textFace, len(lines))
	height := body
	if fine != nil {
		height += 2 + textHeight(sideFace, len(fine))
	}
	height = max(height, textHeight(sideHead, len(side)))
	return fixedBlock(gap, height, func(y, h float64) {
		d.pen.lines(sideHead, chart.Ink, d.left, y+0.5, side)
		d.pen.lines(textFace, chart.Ink, d.mainX(), y, lines)
		d.pen.lines(sideFace, chart.Faint, d.mainX(), y+body+2, fine)
	})
}
