package pdf

import (
	"strings"

	"wavetally/report"
	"wavetally/report/chart"
)

// blocks sets the whole survey.
func (d *document) blocks() []block {
	d.tables = map[string]report.Table{}
	for _, t := range report.Tables(d.s) {
		d.tables[t.Key] = t
	}
	d.charts = report.Charts(d.s)
	var out []block
	out = append(out, d.opening()...)
	out = append(out, d.part("Site and recording", d.listed("site"), d.set("hook-up"), d.listed("recording"))...)
	out = append(out, d.part("Verdicts", d.verdicts(), d.set("open"), d.set("noise"))...)
	out = append(out, d.part("Spectrum", d.figures(report.SpectrumChart, ""))...)
	out = append(out, d.part("Waveform", d.figures(report.WaveformChart, "waveform-"), d.rebuilt())...)
	out = append(out, d.part("Over time", d.figures(report.TrendChart, ""), d.figures(report.HeatMapChart, ""),
		d.figures(report.SpectrogramChart, ""), d.set("statistics"), d.set("days"), d.set("events"), d.set("excluded"))...)
	out = append(out, d.part("Channels, phasors and power", d.set("channels"), d.figures(report.PhasorChart, ""), d.set("power"), d.listed("system"))...)
	out = append(out, d.part("The plant", d.plant())...)
	out = append(out, d.part("Order by order", d.set("orders-V"), d.set("orders-I"), d.set("orders-N"))...)
	out = append(out, d.part("Doubts", d.doubts())...)
	out = append(out, d.part("Method", d.method())...)
	out = append(out, d.part("Files", d.set("files"))...)
	out = append(out, d.part(report.SafetyTitle, d.cautions())...)
	return append(out, d.part("Sign-off", d.signOff())...)
}

// part is a section of the document with what there is for it; without content it is left out.
func (d *document) part(title string, contents ...[]block) []block {
	var body []block
	for _, c := range contents {
		body = append(body, c...)
	}
	if len(body) == 0 {
		return nil
	}
	body[0].gap = 6 // the section's title keeps its own distance
	return append([]block{d.section(title)}, body...)
}

// set is a table by its key.
func (d *document) set(key string) []block {
	return d.table(d.tables[key])
}

// figures are the charts of a kind whose key begins with a prefix.
func (d *document) figures(kind, prefix string) []block {
	var out []block
	for _, c := range d.charts {
		if c.Kind == kind && strings.HasPrefix(c.Key, prefix) {
			out = append(out, d.figure(c))
		}
	}
	return out
}

// listed sets a table of names and values as labels and text, which reads better than a grid of three columns.
func (d *document) listed(key string) []block {
	t := d.tables[key]
	var out []block
	for i, row := range t.Rows {
		if i == 0 {
			out = append(out, d.tableTitle(t.Title, d.mainX(), d.main(), nil))
		}
		b := d.pair(row)
		b.keep = i == 0 && len(t.Rows) > 1
		out = append(out, b)
	}
	return out
}

// pair is a name, its value, and a remark.
func (d *document) pair(row []report.Cell) block {
	m := d.pen.measure
	const nameWidth = 120.0
	x := d.mainX()
	room := d.main() - nameWidth
	name := wrap(m, tableFace, row[0].Text, nameWidth-8)
	value := wrap(m, tableStrong, row[1].Text, room)
	var remark []string
	remarkX, sameLine := x+nameWidth, false
	if row[2].Text != "" {
		used := m(tableStrong, value[len(value)-1]) + 8
		if sameLine = len(value) == 1 && used+m(sideFace, clean(row[2].Text)) <= room; sameLine {
			remarkX += used
		}
		remark = wrap(m, sideFace, row[2].Text, d.mainX()+d.main()-remarkX)
	}
	lines := max(len(name), len(value))
	height := textHeight(tableFace, lines)
	if remark != nil && !sameLine {
		height = max(height, textHeight(tableFace, len(value))+textHeight(sideFace, len(remark)))
	}
	return fixedBlock(0, height+2*pairPad, func(y, h float64) {
		d.pen.lines(tableFace, chart.Faint, x, y+pairPad, name)
		d.pen.lines(tableStrong, chart.Ink, x+nameWidth, y+pairPad, value)
		at := y + pairPad
		if !sameLine {
			at += textHeight(tableFace, len(value))
		}
		d.pen.lines(sideFace, chart.Faint, remarkX, at, remark)
		d.pen.rule(chart.Hair, 0.4, x, x+d.main(), y+h)
	})
}

const pairPad = 1.9

// method states how the numbers were made, a topic a paragraph.
func (d *document) method() []block {
	var out []block
	for _, m := range d.s.Method {
		source := ""
		if m.Source != "" {
			source = "After: " + m.Source
		}
		out = append(out, d.item(m.Topic, m.Text, source, 8))
	}
	if len(out) > 0 {
		out = append(out, d.note(report.MethodNote, d.mainX(), d.main()))
		out[len(out)-1].gap = 8
	}
	return out
}

// plant sets the screening figures, each with what it means.
func (d *document) plant() []block {
	var out []block
	topic := ""
	for _, p := range d.s.Plant {
		label := ""
		if p.Topic != topic {
			label, topic = upperFirst(p.Topic), p.Topic
		}
		out = append(out, d.item(label, p.Name+": "+report.Quantity(float64(p.Value), p.Unit), p.Text, 7))
	}
	if len(out) > 0 {
		out = append([]block{d.note("Screening, not design: a qualified engineer designs any change.", d.mainX(), d.main())}, out...)
	}
	return out
}

// doubts sets each doubt with its evidence, and with lines for the site sheet where there is something to correct.
func (d *document) doubts() []block {
	var out []block
	rows := d.tables["doubts"].Rows
	for i, doubt := range d.s.Doubts {
		where := "whole recording"
		if doubt.Channel != "" {
			where = doubt.Channel
		}
		small := doubt.Code
		if i < len(rows) && rows[i][4].Text != "" {
			small += ": " + rows[i][4].Text
		}
		out = append(out, d.item(upperFirst(doubt.Weight)+", "+where, doubt.Text, small, 8))
		if len(doubt.Proposal) > 0 {
			out[len(out)-1].keep = true
			out = append(out, d.proposal(doubt.Proposal))
		}
	}
	return out
}

// proposal sets lines for the site sheet on a tint, as they are to be copied.
func (d *document) proposal(proposed []string) block {
	var lines []string
	for _, p := range proposed {
		for _, l := range strings.Split(p, "\n") {
			lines = append(lines, wrap(d.pen.measure, tableFace, l, d.main()-16)...)
		}
	}
	height := textHeight(tableFace, len(lines)) + textHeight(sideFace, 1) + 12
	return fixedBlock(3, height, func(y, h float64) {
		d.pen.fill(chart.Tint, d.mainX(), y, d.main(), h)
		d.pen.lines(sideFace, chart.Faint, d.mainX()+8, y+4, []string{"Proposed for the site sheet"})
		d.pen.lines(tableFace, chart.Ink, d.mainX()+8, y+6+textHeight(sideFace, 1), lines)
	})
}

func (d *document) cautions() []block {
	var out []block
	for i, c := range d.s.Cautions {
		b := d.item("", c, "", 5)
		number := i + 1
		inner := b.draw
		b.draw = func(y, h float64) {
			d.pen.right(strongFace, chart.Faint, d.mainX()-8, y+textFace.size*0.93, itoa(number))
			inner(y, h)
		}
		out = append(out, b)
	}
	return out
}

func upperFirst(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}
