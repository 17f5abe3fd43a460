package chart

import (
	"cmp"
	"image/color"
	"math"
	"slices"
	"time"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// A row is one panel of a chart of lines.
type row struct {
	series []report.Series
	main   bool // carries the limits and the chart's own y axis
}

// rowsOf sorts a chart's lines into panels: what was measured in the first, and in lower ones, each to a scale of its
// own, what would vanish there or has another unit: a waveform's residual, the load under a trend.
func rowsOf(ch report.Chart) []row {
	var rows []row
	for _, s := range ch.Series {
		i := slices.IndexFunc(rows, func(r row) bool { return sharesRow(r.series[0], s) })
		if i < 0 {
			i = len(rows)
			rows = append(rows, row{main: i == 0})
		}
		rows[i].series = append(rows[i].series, s)
	}
	return rows
}

func sharesRow(a, b report.Series) bool {
	apart := func(s report.Series) bool { return s.Use == report.Residual || s.Use == report.Other }
	return a.Unit == b.Unit && (a.Use == b.Use || !apart(a) && !apart(b))
}

// drawLines draws lines over time.
func drawLines(c draw.Canvas, ch report.Chart, at Place) {
	rows := rowsOf(ch)
	weights := make([]float64, len(rows))
	for i, r := range rows {
		weights[i] = 1
		if u := r.series[0].Use; !r.main && (u == report.Residual || u == report.Other) {
			weights[i] = 0.45
		}
	}
	keys, right := lineKeys(ch), labelRoom(ch)
	if at.Bare {
		keys, right = nil, 4
	}
	top := drawKey(c, axisName(ch.Y), keys)
	below := vg.Length(belowOneRow)
	if ch.X.Clock {
		below = 30
	}
	for i, r := range stack(c, top, right, below, weights) {
		y := rowAxis(ch, rows[i])
		p := newPanel(c, r, ch.X, y)
		p.axisY(p.yTicks(scaleOf(y)))
		p.shades(ch.Shades)
		xticks := p.timeTicks(ch, at)
		p.axisX(xticks, i == len(rows)-1)
		p.lines(ch, rows[i], at.Bare)
		if !rows[i].main {
			p.FillText(letters(tickSize, false, Faint, draw.XLeft, draw.YTop), vg.Point{X: c.Min.X, Y: p.Max.Y + 3}, scaleOf(y).Unit)
		}
		if i == len(rows)-1 {
			p.nameX(timeAxis(ch.X, at), below-8.5)
		}
	}
}

// timeAxis is a time axis as it is labelled: by the clock and its zone, or from the recording's start.
func timeAxis(a report.Axis, at Place) report.Axis {
	switch {
	case !a.Clock:
		return a
	case at.Start.IsZero():
		return report.Axis{Label: "time from the recording's start"}
	case at.Zone == nil || at.Zone == time.UTC:
		return report.Axis{Label: "time, UTC"}
	}
	return report.Axis{Label: "time in " + at.Zone.String()}
}

func (p panel) timeTicks(ch report.Chart, at Place) []tick {
	room := max(2, int((p.x.to-p.x.from)/42))
	if ch.X.Clock {
		return clockTicks(p.x.low, p.x.high, at, room)
	}
	return scaleTicks(p.x.low, p.x.high, room)
}

// rowAxis is the y axis of a row: the chart's own, or one that holds what a lower panel shows.
func rowAxis(ch report.Chart, r row) report.Axis {
	if r.main {
		return ch.Y
	}
	a := report.Axis{Unit: r.series[0].Unit}
	for _, s := range r.series {
		for _, v := range s.Y {
			if !math.IsNaN(v) {
				a.Low, a.High = math.Min(a.Low, 1.1*v), math.Max(a.High, 1.1*v)
			}
		}
	}
	return a
}

// labelRoom is how much space the names at the lines' right ends take; usual names take the same, so that charts under
// each other have their time axes in line.
func labelRoom(ch report.Chart) vg.Length {
	room := vg.Length(usualName)
	for _, s := range ch.Series {
		room = max(room, widthOf(endName(s), tickSize))
	}
	return min(room+20, 110)
}

const usualName = 26

func endName(s report.Series) string {
	switch s.Use {
	case report.Rebuilt, report.Residual, report.Highest:
		return ""
	}
	if s.Role != "" {
		return string(s.Role)
	}
	return s.Name
}

func lineKeys(ch report.Chart) []keyItem {
	var items []keyItem
	for _, use := range []string{report.Measured, report.Rebuilt, report.Residual} {
		if len(rowsOf(ch)) < 2 {
			break
		}
		if i := slices.IndexFunc(ch.Series, func(s report.Series) bool { return s.Use == use }); i >= 0 {
			items = append(items, lineKey(useNames[use], lineStyle(report.Series{Use: use}, true)))
		}
	}
	for _, l := range ch.Limits {
		items = append(items, lineKey(l.Name, dashed(Limit, 1)))
	}
	var whys []string
	for _, s := range ch.Shades {
		if !slices.Contains(whys, s.Why) {
			whys = append(whys, s.Why)
		}
	}
	for i, why := range whys {
		if i == 0 {
			why = "left out: " + why
		}
		items = append(items, boxKey(why, shadeBox))
	}
	return items
}

var useNames = map[string]string{report.Measured: "as recorded", report.Rebuilt: "rebuilt from the lines above noise",
	report.Residual: "difference"}

// compared reports whether a row shows one channel as recorded and as rebuilt, one upon the other.
func (r row) compared() bool {
	return slices.ContainsFunc(r.series, func(s report.Series) bool { return s.Use == report.Rebuilt })
}

// lineStyle is how a series is drawn. Where it is compared with what was rebuilt, the recorded line is a broad
// light one without dashes, and the dashes over it are the rebuilt one's.
func lineStyle(s report.Series, compared bool) draw.LineStyle {
	l := lookOf(s.Role)
	switch s.Use {
	case report.Measured:
		if compared {
			return solid(tint(l.ink), 1.9)
		}
		return l.line(0.9)
	case report.Rebuilt:
		return draw.LineStyle{Color: Ink, Width: 0.5, Dashes: []vg.Length{2.4, 1.6}}
	case report.Residual:
		return solid(gray(0x8c), 0.5)
	case report.Highest:
		return draw.LineStyle{Color: l.ink, Width: 0.4, Dashes: l.dashes}
	}
	return l.line(0.7)
}

// shades marks stretches that were left out.
func (p panel) shades(shades []report.Shade) {
	for _, s := range shades {
		from, to := p.x.at(p.x.clamp(s.From)), p.x.at(p.x.clamp(s.To))
		if to-from < 0.8 { // a 10 min interval of a week would vanish
			from, to = (from+to)/2-0.4, (from+to)/2+0.4
		}
		shadeBox(p.Canvas, vg.Rectangle{Min: vg.Point{X: from, Y: p.Min.Y}, Max: vg.Point{X: to, Y: p.Max.Y}})
	}
}

func shadeBox(c draw.Canvas, r vg.Rectangle) {
	c.SetColor(shade)
	c.Fill(rectangle(r))
}

func (p panel) lines(ch report.Chart, r row, bare bool) {
	p.Push()
	for _, s := range r.series {
		p.line(s, lineStyle(s, r.compared()))
	}
	var limits []report.LimitLine
	if r.main && len(r.series) > 0 {
		limits = ch.Limits
	}
	for _, l := range limits {
		p.limitLine(l)
	}
	if !bare {
		p.endNames(r.series, limits)
	}
	p.Pop()
}

// line draws a series, broken where it has no value.
func (p panel) line(s report.Series, style draw.LineStyle) {
	var run []vg.Point
	end := func() {
		if len(run) == 1 { // a lone value would leave no trace
			run = append(run, vg.Point{X: run[0].X + 0.6, Y: run[0].Y})
		}
		if len(run) > 1 {
			p.StrokeLines(style, thinned(run))
		}
		run = run[:0]
	}
	for i := range s.X {
		x, y := s.X[i], value(s.Y, i)
		if math.IsNaN(x) || math.IsNaN(y) {
			end()
			continue
		}
		run = append(run, p.point(p.x.clamp(x), p.y.clamp(y)))
	}
	end()
}

// thinned keeps of the points that fall within a fifth of a point on paper the first, the lowest, the highest and the
// last: no printer shows a difference, and the file stays small.
func thinned(pts []vg.Point) []vg.Point {
	const bin = 0.2
	var out []vg.Point
	for i := 0; i < len(pts); {
		j := i
		low, high := i, i
		for j < len(pts) && pts[j].X < pts[i].X+bin {
			if pts[j].Y < pts[low].Y {
				low = j
			}
			if pts[j].Y > pts[high].Y {
				high = j
			}
			j++
		}
		keep := []int{i, min(low, high), max(low, high), j - 1}
		for k, index := range keep {
			if k == 0 || index != keep[k-1] {
				out = append(out, pts[index])
			}
		}
		i = j
	}
	return out
}

func (p panel) limitLine(l report.LimitLine) {
	if l.X == nil {
		if len(l.Y) == 1 && l.Y[0] >= p.y.low && l.Y[0] <= p.y.high {
			y := p.y.at(l.Y[0])
			p.StrokeLine2(dashed(Limit, 1), p.Min.X, y, p.Max.X, y)
		}
		return
	}
	var pts []vg.Point
	for i := range l.X {
		if v := value(l.Y, i); !math.IsNaN(v) {
			pts = append(pts, p.point(p.x.clamp(l.X[i]), p.y.clamp(v)))
		}
	}
	p.StrokeLines(dashed(Limit, 1), pts)
}

// An ending is a line's name at its right end.
type ending struct {
	y    vg.Length
	name string
	ink  color.Color
	line draw.LineStyle
}

// endNames writes the lines' names at their right ends, with a piece of the line, moved apart where they would touch.
func (p panel) endNames(series []report.Series, limits []report.LimitLine) {
	var ends []ending
	for _, s := range series {
		if y, ok := lastValue(s.Y); ok && endName(s) != "" {
			ends = append(ends, ending{p.y.at(p.y.clamp(y)), endName(s), Ink, lineStyle(s, false)})
		}
	}
	for _, l := range limits {
		y, ok := lastValue(l.Y)
		e := ending{p.y.at(p.y.clamp(y)), limitName(y, series), Alarm, dashed(Limit, 1)}
		if same := func(o ending) bool { return o.name == e.name && o.y == e.y }; ok && !slices.ContainsFunc(ends, same) {
			ends = append(ends, e)
		}
	}
	slices.SortStableFunc(ends, func(a, b ending) int { return cmp.Compare(a.y, b.y) })
	ys := make([]vg.Length, len(ends))
	for i := range ends {
		ys[i] = ends[i].y
	}
	spread(ys, 7.6, p.Min.Y+3, p.Max.Y-1)
	for i, e := range ends {
		x := p.Max.X + 3
		p.StrokeLine2(e.line, x, ys[i], x+13, ys[i])
		p.FillText(letters(tickSize, true, e.ink, draw.XLeft, -0.38), vg.Point{X: x + 16, Y: ys[i]}, shortened(e.name, 92))
	}
}

// limitName is a limit's value: what it limits is said in the key.
func limitName(v float64, series []report.Series) string {
	return report.Quantity(v, series[0].Unit)
}

func lastValue(v []float64) (float64, bool) {
	for i := len(v) - 1; i >= 0; i-- {
		if !math.IsNaN(v[i]) {
			return v[i], true
		}
	}
	return 0, false
}

// spread moves sorted positions apart to at least a distance, within low and high as far as there is room.
func spread(ys []vg.Length, apart, low, high vg.Length) {
	for i := range ys {
		ys[i] = max(ys[i], low)
		if i > 0 {
			ys[i] = max(ys[i], ys[i-1]+apart)
		}
	}
	for i := len(ys) - 1; i >= 0; i-- {
		limit := high
		if i < len(ys)-1 {
			limit = ys[i+1] - apart
		}
		ys[i] = min(ys[i], limit)
	}
}
