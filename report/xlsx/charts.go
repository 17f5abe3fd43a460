package xlsx

import (
	"math"
	"slices"
	"strings"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/site"
	"wavetally/report"
)

// Sizes of a native chart: two fill a landscape page.
const (
	chartWidth  = 1370 // pixels
	chartHeight = 370
	chartRows   = 20 // that it stands on
	chartsAPage = 2
)

// draw lists all charts with where their numbers are, then draws those that a spreadsheet can.
func (p *plotter) draw(s *sheet) {
	s.title("Charts, and where their numbers stand")
	s.header([]column{{head: "Chart", width: 62}, {head: "Kind", width: 13}, {head: "Numbers on sheet", width: 19}, {head: "Vertical axis", width: 28}, {head: "What is shown", width: 58}})
	for _, c := range p.all {
		where := p.at[c.Key]
		if where == nil {
			continue
		}
		n := s.add(text(c.Title).as(wrapLook), text(c.Kind), text(where.sheet.name).as(style{ink: linkInk}), text(axisName(c.Y)), text(c.Caption).as(wrapLook))
		where.axis = s.ref(4, n)
		s.links = append(s.links, link{at(3, n), where.sheet.quoted() + "!A1"})
	}
	lines := p.limitLines(s)
	s.freeze(1, 0, 0)
	s.repeat = 0
	drawn := 0
	for _, c := range p.all {
		if made := p.native(c, lines[c.Key]); made != nil {
			if drawn%chartsAPage == 0 {
				s.breaks = append(s.breaks, s.next())
			}
			s.charts = append(s.charts, placedChart{at(1, s.next()), made})
			for range chartRows {
				s.height(s.next(), rowHeight) // what a chart's size in rows is reckoned with
				s.gap()
			}
			drawn++
		}
	}
}

// limitLines lays down the ends of the limit lines of trends, which follow the verdicts' limits.
func (p *plotter) limitLines(s *sheet) map[string][]plottedSeries {
	out := map[string][]plottedSeries{}
	for _, c := range p.charts(report.TrendChart) {
		where := p.at[c.Key]
		if where == nil || len(where.series) == 0 {
			continue
		}
		for _, l := range c.Limits {
			if len(out) == 0 {
				s.gap()
				s.add(heads("Limit line of a trend", "End", "Time", "Limit")...)
			}
			v := number(l.Y[0], limitFormat)
			if ref := p.limitRef(c, l.Y[0]); ref != "" {
				v = v.live(ref)
			}
			v.style.left, v.style.indent = true, true
			n := s.add(text(l.Name), text("from"), p.x(c.X.Low), v)
			s.add(none, text("to"), p.x(c.X.High), v)
			out[c.Key] = append(out[c.Key], plottedSeries{name: l.Name, limit: true, x: s.span(3, n, 3, n+1), y: s.span(4, n, 4, n+1)})
		}
	}
	return out
}

// x is a time of the recording as the series have it.
func (p *plotter) x(at float64) cell {
	if start := p.survey.Recording.Start; start != nil {
		return moment(start.Add(seconds(at)))
	}
	return number(at, "0.0")
}

// limitRef is where the limit of a trend's total stands on a verdict sheet; for the load, the demand current.
func (p *plotter) limitRef(c report.Chart, limit float64) string {
	if c.Key == "trend-load" {
		return nameIL
	}
	for _, v := range p.verdicts {
		for _, l := range v.lines {
			if l.Order == 0 && l.Limit == limit && c.Key == "trend-"+l.Quantity+"-"+string(l.Channel[0]) {
				return v.sheet.ref(verdictLimit, v.row[keyOf(l.Finding)])
			}
		}
	}
	return ""
}

// native is the chart as the spreadsheet program draws it; nil for a kind that it has no chart for.
func (p *plotter) native(c report.Chart, lines []plottedSeries) []*excelize.Chart {
	where := p.at[c.Key]
	if where == nil || len(where.series) == 0 {
		return nil
	}
	switch {
	case c.Kind == report.SpectrumChart:
		return spectrumNative(c, where)
	case c.Kind == report.TrendChart:
		made := lineNative(c, where, lines)
		if p.survey.Recording.Start != nil {
			made.XAxis.NumFmt = excelize.ChartNumFmt{CustomNumFmt: clockFormat(c.X.High - c.X.Low)}
			made.XAxis.Title = axisTitle("time, UTC")
			low, high := serial(p.survey.Recording.Start.Add(seconds(c.X.Low))), serial(p.survey.Recording.Start.Add(seconds(c.X.High)))
			made.XAxis.Minimum, made.XAxis.Maximum = &low, &high
		}
		return []*excelize.Chart{made}
	case c.Kind == report.WaveformChart && strings.HasPrefix(c.Key, "waveform-"):
		return []*excelize.Chart{lineNative(c, where, nil)}
	}
	return nil
}

// clockFormat shows times along an axis of so many seconds.
func clockFormat(span float64) string {
	switch {
	case span < 2*3600:
		return "hh:mm:ss"
	case span < 2*86400:
		return "hh:mm"
	}
	return "mm-dd hh:mm"
}

func frame(c report.Chart, from *plotted, kind excelize.ChartType) *excelize.Chart {
	return &excelize.Chart{
		Type: kind, Dimension: excelize.ChartDimension{Width: chartWidth, Height: chartHeight}, Legend: excelize.ChartLegend{Position: "top"},
		Title:        excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{Text: cut(clean(c.Title), 250), Font: &excelize.Font{Size: 12, Bold: true, Color: "262626"}}}},
		XAxis:        excelize.ChartAxis{Title: axisTitle(axisName(c.X)), Font: *axisFont(), TickLabelPosition: excelize.ChartTickLabelLow},
		YAxis:        excelize.ChartAxis{Title: axisTitle(axisName(c.Y)), Font: *axisFont(), MajorGridLines: true},
		ShowBlanksAs: "gap", Format: excelize.GraphicOptions{AltText: cut(clean(c.Title+". "+c.Caption), 1000)},
	}
}

func axisFont() *excelize.Font { return &excelize.Font{Size: 9, Color: "404040"} }

func axisName(a report.Axis) string {
	if a.Unit == "" {
		return a.Label
	}
	return a.Label + ", " + a.Unit
}

func axisTitle(words string) excelize.ChartTitle {
	return excelize.ChartTitle{Paragraph: []excelize.RichTextRun{{Text: words, Font: axisFont()}}}
}

// spectrumNative are bars for the measured values and lines for whiskers' ends and limits.
func spectrumNative(c report.Chart, from *plotted) []*excelize.Chart {
	bars, lines := frame(c, from, excelize.Col), frame(c, from, excelize.Line)
	gap, overlap := uint(40), 0
	bars.GapWidth, bars.Overlap = &gap, &overlap
	for i, s := range from.series {
		switch {
		case s.limit:
			lines.Series = append(lines.Series, excelize.ChartSeries{Name: quote(s.name), Categories: s.x, Values: s.y, Line: limitLine(), Fill: ink(limitInk), Marker: excelize.ChartMarker{Symbol: "none"}})
		case c.Series[i].Use == report.Measured:
			bars.Series = append(bars.Series, excelize.ChartSeries{Name: quote(s.name), Categories: s.x, Values: s.y, Fill: ink(inkOf(s.role))})
		}
	}
	zero := 0.0
	bars.YAxis.Minimum = &zero
	if len(lines.Series) == 0 {
		return []*excelize.Chart{bars}
	}
	return []*excelize.Chart{bars, lines}
}

func lineNative(c report.Chart, from *plotted, lines []plottedSeries) *excelize.Chart {
	out := frame(c, from, excelize.Scatter)
	for _, s := range slices.Concat(from.series, lines) {
		look, fill := lineOf(s.role), ink(inkOf(s.role))
		if s.limit {
			look, fill = limitLine(), ink(limitInk)
		}
		out.Series = append(out.Series, excelize.ChartSeries{Name: quote(cut(clean(s.name), 120)), Categories: s.x, Values: s.y, Line: look, Fill: fill, Marker: excelize.ChartMarker{Symbol: "none"}})
	}
	if c.Y.Low >= 0 {
		zero := 0.0
		out.YAxis.Minimum = &zero
	}
	if c.Kind == report.WaveformChart {
		low, high := c.X.Low, math.Ceil(c.X.High)
		out.XAxis.Minimum, out.XAxis.Maximum = &low, &high
		out.XAxis.NumFmt = excelize.ChartNumFmt{CustomNumFmt: "0"}
	}
	return out
}

// Inks and dashes of the phases, the same as in the other documents: told apart by both.
var inks = [4]string{"6E6E6E", "0072B2", "E69F00", "009E73"}

var dashes = [4]excelize.LineDashType{excelize.LineDashLgDashDot, excelize.LineDashSolid, excelize.LineDashDash, excelize.LineDashSysDot}

func inkOf(r site.Role) string { return inks[r.Phase()] }

func lineOf(r site.Role) excelize.LineOptions {
	return excelize.LineOptions{Type: excelize.LineSolid, Width: 1.25, Dash: dashes[r.Phase()]}
}

const limitInk = "D55E00"

func limitLine() excelize.LineOptions {
	return excelize.LineOptions{Type: excelize.LineSolid, Width: 1.75, Dash: excelize.LineDashDash}
}

// ink is a plain colour; the library draws lines in it too.
func ink(color string) excelize.Fill {
	return excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{color}}
}
