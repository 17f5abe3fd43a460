package pdf

import (
	"slices"
	"strconv"
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
	site := d.part("Site and recording", d.listed("site"), d.set("hook-up"), d.listed("recording"))
	site[0].fresh = 0.6 // the answers stand alone, unless they are few
	out = append(out, site...)
	out = append(out, d.part("Verdicts", d.verdicts(), d.set("open"), d.set("noise"))...)
	out = append(out, d.part("Spectrum", d.figures(report.SpectrumChart, ""))...)
	out = append(out, d.part("Waveform", d.figures(report.WaveformChart, "waveform-"), d.rebuilt())...)
	out = append(out, d.part("Over time", d.figures(report.TrendChart, ""), d.figures(report.HeatMapChart, ""),
		d.figures(report.SpectrogramChart, ""), d.set("statistics"), d.set("days"), d.set("events"), d.set("excluded"))...)
	out = append(out, d.part("Channels, phasors and power", d.set("channels"), d.figures(report.PhasorChart, ""), d.set("power"), d.listed("system"))...)
	out = append(out, d.part("The plant", d.plant())...)
	out = append(out, d.part("Order by order", d.orders("orders-V"), d.orders("orders-I"), d.orders("orders-N"))...)
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

// orders is a table of orders by its key, without the orders that the sampling rate does not reach.
func (d *document) orders(key string) []block {
	t := d.tables[key]
	measured := func(row []report.Cell) bool {
		return slices.ContainsFunc(row[min(2, len(row)):], func(c report.Cell) bool { return c.IsNum && c.Number.Known() })
	}
	last := len(t.Rows)
	for last > 1 && !measured(t.Rows[last-1]) {
		last--
	}
	if last < len(t.Rows) {
		t.Notes = append([]string{"Orders above " + t.Rows[last-1][0].Text + ": not measured."}, t.Notes...)
		t.Rows = t.Rows[:last]
	}
	return d.table(t)
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
		pair := d.pair(row)
		pair[0].keep = i == 0 && len(t.Rows) > 1
		out = append(out, pair...)
	}
	return out
}

// pair is a name, its value, and a remark: on the value's line where it has room, else below it.
func (d *document) pair(row []report.Cell) []block {
	m := d.pen.measure
	const nameWidth = 120.0
	x, valueX, room := d.mainX(), d.mainX()+nameWidth, d.main()-nameWidth
	name := wrap(m, tableFace, row[0].Text, nameWidth-8)
	value := wrap(m, tableStrong, row[1].Text, room)
	remarkX, beside := valueX, false
	if used := m(tableStrong, value[0]) + 8; len(value) == 1 && used+m(sideFace, clean(row[2].Text)) <= room {
		remarkX, beside = valueX+used, true
	}
	var out []block
	for first := 0; first < len(value); first += mostLines {
		piece := value[first:min(first+mostLines, len(value))]
		last := first+mostLines >= len(value)
		var names, remark []string
		if first == 0 {
			names = name
		}
		if last && row[2].Text != "" {
			remark = wrap(m, sideFace, row[2].Text, d.rightX()-remarkX)
		}
		height := textHeight(tableFace, len(piece))
		below := height
		if beside {
			below = 0
		} else if remark != nil {
			height += textHeight(sideFace, len(remark))
		}
		height = max(height, textHeight(tableFace, len(names))) + 2*pairPad
		out = append(out, fixedBlock(0, height, func(y, h float64) {
			y += pairPad
			d.pen.lines(tableFace, chart.Faint, x, y, names)
			d.pen.lines(tableStrong, chart.Ink, valueX, y, piece)
			d.pen.lines(sideFace, chart.Faint, remarkX, y+below, remark)
			if last {
				d.pen.rule(chart.Hair, 0.4, x, d.rightX(), y-pairPad+h)
			}
		}))
	}
	return out
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
		out = append(out, d.item(m.Topic, m.Text, source, 8)...)
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
		out = append(out, d.item(label, p.Name+": "+report.Quantity(float64(p.Value), p.Unit), p.Text, 7)...)
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
		out = append(out, d.item(upperFirst(doubt.Weight)+", "+where, doubt.Text, small, 8)...)
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

// cautions are set in two columns, so that they and the signatures mostly share a page.
func (d *document) cautions() []block {
	const number = 14.0
	f := cautionFace
	width := (d.full() - 2*gutter) / 2
	half := (len(d.s.Cautions) + 1) / 2
	var out []block
	for i := range half {
		var sets [2][]string
		height := 0.0
		for c, k := range []int{i, i + half} {
			if k < len(d.s.Cautions) {
				sets[c] = wrap(d.pen.measure, f, d.s.Cautions[k], width-number)
				height = max(height, textHeight(f, len(sets[c])))
			}
		}
		out = append(out, fixedBlock(5, height, func(y, h float64) {
			for c, lines := range sets {
				if lines != nil {
					x := d.left + float64(c)*(width+2*gutter)
					d.pen.lines(face{true, f.size}, chart.Faint, x, y, []string{strconv.Itoa(i + c*half + 1)})
					d.pen.lines(f, chart.Ink, x+number, y, lines)
				}
			}
		}))
	}
	return out
}

func upperFirst(s string) string {
	if s == "" {
		return s
	}
	return strings.ToUpper(s[:1]) + s[1:]
}
