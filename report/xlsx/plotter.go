package xlsx

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/report"
)

// A plotter lays down the numbers of every chart, and remembers where, so that native charts can be drawn from them and
// readers can find them.
type plotter struct {
	*book
	verdicts []verdictRange
	at       map[string]*plotted // by the chart's key
	all      []report.Chart
}

// A plotted chart is one whose numbers stand on a sheet.
type plotted struct {
	sheet  *sheet
	series []plottedSeries
	axis   string // the cell that names the vertical axis
}

type plottedSeries struct {
	name, x, y string // the name's text, and the ranges
	role       site.Role
	limit      bool
}

func (p *plotter) charts(kind string) []report.Chart {
	if p.all == nil {
		p.all = report.Charts(p.survey)
	}
	var out []report.Chart
	for _, c := range p.all {
		if c.Kind == kind {
			out = append(out, c)
		}
	}
	return out
}

// spectra sets the spectrum charts side by side over the orders. Bars and limits that stand on a verdict sheet are
// taken from there, so that they follow the inputs.
func (p *plotter) spectra() {
	charts := p.charts(report.SpectrumChart)
	if len(charts) == 0 {
		return
	}
	s := p.sheet("Spectra", "numbers of the spectrum charts")
	s.title("Numbers of the spectrum charts")
	names := []cell{none.as(style{fill: headFill})}
	columns := []column{{head: "Order"}}
	for _, c := range charts {
		for i, one := range spectrumColumns(c) {
			name := none
			if i == 0 {
				name = text(spectrumName(c))
			}
			names = append(names, name.as(style{bold: true, fill: headFill}))
			columns = append(columns, column{head: one.name, unit: one.unit, width: 12})
		}
	}
	for _, c := range charts {
		s.note(c.Title+". "+c.Caption, noteWidth)
	}
	s.add(names...)
	units := s.header(columns)
	s.freeze(units, 1, units-2)
	first := units + 1
	for h := 2; h <= harmonics.MaxOrder; h++ {
		row := []cell{count(h)}
		for _, c := range charts {
			row = append(row, p.spectrumCells(c, h)...)
		}
		s.add(row...)
	}
	col := 2
	for _, c := range charts {
		at := &plotted{sheet: s}
		for _, one := range spectrumColumns(c) {
			at.series = append(at.series, plottedSeries{name: one.name, role: one.role, limit: one.limit,
				x: s.span(1, first, 1, s.next()-1), y: s.span(col, first, col, s.next()-1)})
			col++
		}
		p.at[c.Key] = at
	}
}

// spectrumName is what a spectrum chart shows, short.
func spectrumName(c report.Chart) string {
	if len(c.Limits) > 0 {
		return "against the " + c.Limits[0].Name
	}
	return "no limit"
}

type spectrumColumn struct {
	name, unit string
	role       site.Role
	y          []float64
	limit      bool
}

func spectrumColumns(c report.Chart) []spectrumColumn {
	var out []spectrumColumn
	for _, one := range c.Series {
		out = append(out, spectrumColumn{name: one.Name, unit: one.Unit, role: one.Role, y: one.Y})
	}
	for _, l := range c.Limits {
		out = append(out, spectrumColumn{name: "limit", unit: c.Y.Unit, y: l.Y, limit: true})
	}
	return out
}

// spectrumCells are the numbers of one order.
func (p *plotter) spectrumCells(c report.Chart, order int) []cell {
	statistic := p.statisticOf(c)
	var out []cell
	for _, one := range spectrumColumns(c) {
		v := one.y[order-2]
		made := number(v, computedFormat)
		if ref := p.verdictCell(statistic, one, order); ref != "" && !math.IsNaN(v) {
			made = made.live(ref)
		}
		out = append(out, made)
	}
	return out
}

// A drawn statistic is what a spectrum chart holds against a limit.
type drawn struct{ set, statistic, channel string }

// statisticOf finds the rule set and statistic that a spectrum chart shows: the chart has only their numbers.
func (p *plotter) statisticOf(c report.Chart) drawn {
	if len(c.Limits) == 0 || len(c.Series) == 0 {
		return drawn{}
	}
	channel, y, limit := c.Series[0].Name, c.Series[0].Y, c.Limits[0].Y
	tried := map[drawn]bool{}
	for _, v := range p.verdicts {
		for _, l := range v.lines {
			d := drawn{l.RuleSet, l.Statistic, channel}
			if string(l.Channel) != channel || tried[d] || c.Key != chartKey(l) {
				continue
			}
			tried[d] = true
			if p.shows(d, y, limit) {
				return d
			}
		}
	}
	return drawn{}
}

// chartKey is the key of the spectrum chart that a finding is drawn in.
func chartKey(l line) string {
	if l.Channel.Voltage() {
		return "spectrum-V-" + l.RuleSet
	}
	return "spectrum-I-" + l.RuleSet
}

// shows reports whether a statistic has the values and limits of a chart.
func (p *plotter) shows(d drawn, y, limit []float64) bool {
	for i := range y {
		l, _ := p.find(d, i+2)
		switch {
		case l == nil && !math.IsNaN(y[i]):
			return false
		case l != nil && (!equal(l.Value, y[i]) || !equal(l.Limit, limit[i])):
			return false
		}
	}
	return true
}

func equal(a, b float64) bool { return a == b || math.IsNaN(a) && math.IsNaN(b) }

// find returns a finding and the sheet it stands on.
func (p *plotter) find(d drawn, order int) (*line, *verdictRange) {
	for i := range p.verdicts {
		v := &p.verdicts[i]
		if row, ok := v.row[verdictKey{d.set, d.channel, order, d.statistic}]; ok {
			return &v.lines[row-v.first], v
		}
	}
	return nil, nil
}

// verdictCell is the address of a bar's value or of a limit on a verdict sheet; "" where there is none.
func (p *plotter) verdictCell(d drawn, one spectrumColumn, order int) string {
	column := verdictLimit
	if !one.limit {
		if d.channel = string(one.role); one.name != d.channel {
			return "" // a whisker: no verdict rests on it
		}
		column = verdictValue
	}
	l, v := p.find(d, order)
	if l == nil || one.limit && !equal(l.Limit, one.y[order-2]) || !one.limit && !equal(l.Value, one.y[order-2]) {
		return ""
	}
	return v.sheet.ref(column, v.row[keyOf(l.Finding)])
}

// waveforms sets the captured window's channels side by side over time.
func (p *plotter) waveforms() {
	charts := p.charts(report.WaveformChart)
	if len(charts) == 0 {
		return
	}
	s := p.sheet("Waveform", "the captured window: as recorded, rebuilt, and what is left")
	s.title("Waveform of the captured window")
	s.note(charts[0].Caption, noteWidth)
	x := charts[0].Series[0].X
	columns := []column{{head: "Time", unit: "ms", width: 10}}
	var values [][]float64
	place := map[string]int{}
	for _, c := range charts {
		for _, one := range c.Series {
			key := string(one.Role) + " " + one.Use
			if place[key] > 0 || !slices.Equal(one.X, x) {
				continue
			}
			columns = append(columns, column{head: waveName(one), unit: one.Unit, width: 11})
			values = append(values, one.Y)
			place[key] = len(columns)
		}
	}
	units := s.header(columns)
	s.freeze(units, 1, units-1)
	for i := range x {
		row := []cell{number(x[i], "0.000")}
		for _, v := range values {
			row = append(row, number(v[i], computedFormat))
		}
		s.add(row...)
	}
	for _, c := range charts {
		at := &plotted{sheet: s}
		for _, one := range c.Series {
			col := place[string(one.Role)+" "+one.Use]
			at.series = append(at.series, plottedSeries{name: one.Name, role: one.Role, x: s.span(1, units+1, 1, s.next()-1), y: s.span(col, units+1, col, s.next()-1)})
		}
		p.at[c.Key] = at
	}
}

func waveName(s report.Series) string {
	if s.Use == report.Measured {
		return string(s.Role) + " recorded"
	}
	return string(s.Role) + " " + s.Use
}

// heatMaps stacks the heat maps: rows of time, columns of orders, shaded by their numbers.
func (p *plotter) heatMaps() {
	charts := p.charts(report.HeatMapChart)
	if len(charts) == 0 {
		return
	}
	s := p.sheet("Heat maps", "orders over time: the highest channel of each cell")
	s.title("Numbers of the heat maps")
	for _, c := range charts {
		s.note(c.Title+". "+c.Caption, noteWidth)
	}
	head, when := p.start()
	columns := []column{{head: "Heat map"}, head, {head: "Length", unit: "s", width: 9}}
	for _, h := range charts[0].Grid.Ys {
		columns = append(columns, column{head: report.Sig(h), unit: "%", width: 6.5})
	}
	units := s.header(columns)
	s.freeze(units, 3, units-1)
	for _, c := range charts {
		first := s.next()
		for i, x := range c.Grid.Xs {
			row := []cell{text(gridName(c)), when(harmonics.Interval{At: x}), measured(c.Grid.DX)}
			for _, v := range c.Grid.Value[i] {
				row = append(row, number(v, computedFormat))
			}
			s.add(row...)
		}
		s.shades = append(s.shades, shadeOf(c.Grid, at(4, first)+":"+at(len(columns), s.next()-1)))
		p.at[c.Key] = &plotted{sheet: s}
	}
	s.filter = at(1, units) + ":" + at(3, s.next()-1)
}

// shadeOf shades a grid's numbers over the scale of its chart; the middle of a logarithmic one is the geometric mean.
func shadeOf(g *report.Grid, where string) shade {
	middle := (g.Low + g.High) / 2
	if g.Log {
		middle = math.Sqrt(g.Low * g.High)
	}
	return shade{where, g.Low, middle, g.High}
}

func gridName(c report.Chart) string {
	group := "voltage"
	if len(c.Key) > 5 && c.Key[5] == 'I' {
		group = "current"
	}
	return strings.Replace(group+", "+c.Grid.Label, "share of the limit of ", "", 1)
}

// spectrograms stacks the spectrograms: rows of time, columns of lines.
func (p *plotter) spectrograms() {
	charts := p.charts(report.SpectrogramChart)
	if len(charts) == 0 {
		return
	}
	s := p.sheet("Spectrogram", "lines of about 5 Hz over time")
	s.title("Numbers of the spectrograms")
	for _, c := range charts {
		s.note(c.Title+". "+c.Caption, noteWidth)
	}
	columns := []column{{head: "Channel", width: 9}, {head: "Time", unit: "s", width: 9}}
	for _, hz := range charts[0].Grid.Ys {
		columns = append(columns, column{head: report.Sig(hz) + " Hz", unit: "% of fund.", width: 10})
	}
	units := s.header(columns)
	s.freeze(units, 2, units-1)
	s.printed = 16
	for _, c := range charts {
		first := s.next()
		for i, x := range c.Grid.Xs {
			row := []cell{text(c.Key[len("spectrogram-"):]), number(x, "0.0")}
			for _, v := range c.Grid.Value[i] {
				row = append(row, number(v, computedFormat))
			}
			s.add(row...)
		}
		s.shades = append(s.shades, shadeOf(c.Grid, at(3, first)+":"+at(len(columns), s.next()-1)))
		p.at[c.Key] = &plotted{sheet: s}
	}
	s.filter = at(1, units) + ":" + at(2, s.next()-1)
}

// phasors is the table of fundamentals.
func (p *plotter) phasors(s *sheet) bool {
	any := false
	for _, c := range p.charts(report.PhasorChart) {
		t := report.Table{Key: c.Key, Title: c.Title, Columns: []report.Column{{Key: "channel", Head: "Channel"}, numeric("angle", "Angle", "°"), numeric("rms", "Rms", ""), {Key: "unit", Head: "Unit"}}}
		for _, one := range c.Series {
			t.Rows = append(t.Rows, []report.Cell{{Text: one.Name}, {Text: fmt.Sprintf("%.1f", one.X[0]), Number: report.Number(one.X[0]), IsNum: true}, figure(one.Y[0]), {Text: one.Unit}})
		}
		s.gap()
		s.table(t)
		p.at[c.Key] = &plotted{sheet: s}
		any = true
	}
	return any
}

// trends points the trend charts at the columns of the series they were drawn from.
func (p *plotter) trends(t *totals) {
	for _, c := range p.charts(report.TrendChart) {
		if p.at[c.Key] != nil || len(c.Series[0].X) != len(t.ivs) {
			continue
		}
		quantity := map[string]string{"trend-thd-V": "thd", "trend-tdd-I": "tdd", "trend-thd-I": "thd", "trend-load": "fundamental"}[c.Key]
		at := &plotted{sheet: t.sheet}
		for _, one := range c.Series {
			if col := t.at[one.Name+" "+quantity]; col > 0 {
				at.series = append(at.series, plottedSeries{name: one.Name, role: one.Role, x: t.sheet.span(1, t.first, 1, t.last), y: t.sheet.span(col, t.first, col, t.last)})
			}
		}
		p.at[c.Key] = at
	}
}
