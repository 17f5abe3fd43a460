package pdf

import (
	"strings"

	"wavetally/report"
	"wavetally/report/chart"
)

// rebuilt sets the charts that compare each channel with what its lines above noise rebuild, three beside each other:
// they answer one question, and the shapes are what is compared.
func (d *document) rebuilt() []block {
	var charts []report.Chart
	for _, c := range d.charts {
		if c.Kind == report.WaveformChart && strings.HasPrefix(c.Key, "rebuilt-") {
			charts = append(charts, c)
		}
	}
	var out []block
	across := acrossFor(len(charts))
	for i := 0; i < len(charts); i += across {
		out = append(out, d.rebuiltRow(charts[i:min(i+across, len(charts))], across, i == 0))
	}
	return out
}

// acrossFor chooses three or four charts a row, so that no last row holds one alone.
func acrossFor(n int) int {
	switch {
	case n <= 2:
		return 2
	case n%3 == 1:
		return 4
	}
	return 3
}

// rebuiltKey says in words what the marks are, once for all.
const rebuiltKey = "Coloured line: as recorded. Fine dashes over it: rebuilt. Lower panel, to a scale of its own: the difference. "

func (d *document) rebuiltRow(charts []report.Chart, across int, first bool) block {
	m := d.pen.measure
	width := (d.full() - float64(across-1)*gutter) / float64(across)
	titles := make([][]string, len(charts))
	head := 0.0
	for i, c := range charts {
		titles[i] = wrap(m, cellHead, c.Title, width)
		head = max(head, textHeight(cellHead, len(titles[i]))+3)
	}
	var caption []string
	top := 0.0
	if first {
		caption = wrap(m, sideFace, rebuiltKey+charts[0].Caption, d.full())
		top = textHeight(sideFace, len(caption)) + 6
	}
	const natural = 104.0
	place := d.place
	place.Bare = true
	return block{gap: 12, least: top + head + 0.9*natural, natural: top + head + natural, most: top + head + 1.25*natural, draw: func(y, h float64) {
		d.pen.lines(sideFace, chart.Faint, d.left, y, caption)
		for i, c := range charts {
			x := d.left + float64(i)*(width+gutter)
			d.pen.lines(cellHead, chart.Ink, x, y+top, titles[i])
			v, done := d.pen.vectors(x, y+top+head, width, h-top-head)
			chart.Draw(v, c, place)
			done()
		}
	}}
}
