package chart

import (
	"math"
	"time"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// A Place says what a chart cannot know of itself: when its time axis begins, and by which clock.
type Place struct {
	Start time.Time      // zero when the recording does not say
	Zone  *time.Location // nil is UTC
	Bare  bool           // without key and names, where the document gives them for many charts at once
}

// A Size is how high a chart may be drawn, in points: as a page has room for.
type Size struct{ Least, Natural, Most vg.Length }

// Draw draws a chart into a rectangle of a canvas. Title and caption are text, and stay with the document.
func Draw(c draw.Canvas, ch report.Chart, at Place) {
	if c.Max.X-c.Min.X < 60 || c.Max.Y-c.Min.Y < 40 {
		return // no room for axes
	}
	switch ch.Kind {
	case report.SpectrumChart:
		drawBars(c, ch)
	case report.WaveformChart, report.TrendChart:
		drawLines(c, ch, at)
	case report.HeatMapChart, report.SpectrogramChart:
		drawField(c, ch, at)
	case report.PhasorChart:
		drawPhasors(c, ch)
	}
}

// SizeOf says how high a chart should be.
func SizeOf(ch report.Chart) Size {
	natural := vg.Length(150)
	switch ch.Kind {
	case report.SpectrumChart:
		natural = stackHeight(len(measuredSeries(ch)))
	case report.WaveformChart, report.TrendChart:
		natural = stackHeight(len(rowsOf(ch)))
		if len(ch.Series) > 0 && ch.Series[0].Use == report.Other {
			natural *= 0.75
		}
	case report.HeatMapChart, report.SpectrogramChart:
		natural = 170
	case report.PhasorChart:
		natural = 146
		return Size{natural, natural, natural}
	}
	return Size{0.7 * natural, natural, 1.3 * natural}
}

// stackHeight is the height of panels that stand on each other, each lower the more there are.
func stackHeight(panels int) vg.Length {
	each := map[int]vg.Length{0: 60, 1: 110, 2: 80, 3: 64}[panels]
	if each == 0 {
		each = 50
	}
	return 34 + vg.Length(max(1, panels))*each
}

// A span is one direction of a panel: data from low to high stand between from and to on paper.
type span struct {
	low, high float64
	from, to  vg.Length
	log       bool
}

func (s span) at(v float64) vg.Length {
	share := (v - s.low) / (s.high - s.low)
	if s.log {
		share = math.Log(v/s.low) / math.Log(s.high/s.low)
	}
	return s.from + vg.Length(share)*(s.to-s.from)
}

// clamp keeps a value on the axis.
func (s span) clamp(v float64) float64 { return math.Min(math.Max(v, s.low), s.high) }

// A panel is a rectangle of data with its axes.
type panel struct {
	draw.Canvas
	x, y span
}

func newPanel(c draw.Canvas, r vg.Rectangle, x, y report.Axis) panel {
	xl, xh := ends(x)
	yl, yh := ends(y)
	return panel{draw.Canvas{Canvas: c.Canvas, Rectangle: r},
		span{low: xl, high: xh, from: r.Min.X, to: r.Max.X}, span{low: yl, high: yh, from: r.Min.Y, to: r.Max.Y}}
}

// ends are the ends of an axis, made drawable where they are equal or not numbers.
func ends(a report.Axis) (low, high float64) {
	low, high = a.Low, a.High
	if math.IsNaN(low) || math.IsInf(low, 0) {
		low = 0
	}
	if math.IsNaN(high) || math.IsInf(high, 0) || high <= low {
		high = low + 1
	}
	return low, high
}

func (p panel) point(x, y float64) vg.Point { return vg.Point{X: p.x.at(x), Y: p.y.at(y)} }

// yTicks are the ticks of the panel's y axis, as many as its height has room for, labelled in a unit's SI multiple.
func (p panel) yTicks(scale report.Scale) []tick {
	most := min(max(3, int((p.y.to-p.y.from)/15)), 7)
	ticks := scaleTicks(p.y.low*scale.Factor, p.y.high*scale.Factor, most)
	for i := range ticks {
		ticks[i].at /= scale.Factor
	}
	return ticks
}

// scaleOf is the SI multiple of its unit that an axis is labelled in: 220000 V is hard to read and takes room.
func scaleOf(a report.Axis) report.Scale {
	low, high := ends(a)
	return report.ScaleFor(a.Unit, low, high)
}

// scaleTicks are nice ticks, but at least two: one alone gives no scale.
func scaleTicks(low, high float64, most int) []tick {
	ticks := niceTicks(low, high, most)
	for extra := 1; len(ticks) < 2 && extra < 6; extra++ {
		ticks = niceTicks(low, high, most+extra)
	}
	return ticks
}

// axisY draws the y axis: labels on the left, hair lines across.
func (p panel) axisY(ticks []tick) {
	const apart = 7.5
	last := p.Min.Y - 2*apart
	for _, t := range ticks {
		y := p.y.at(t.at)
		p.StrokeLine2(solid(grid, 0.5), p.Min.X, y, p.Max.X, y)
		if y < last+apart { // a low panel has no room for all labels
			continue
		}
		last = y
		p.FillText(letters(tickSize, false, Faint, draw.XRight, -0.38), vg.Point{X: p.Min.X - 3, Y: y}, t.label)
	}
}

// axisX draws the x axis: a line and, where labelled is set, what the ticks say below it.
func (p panel) axisX(ticks []tick, labelled bool) {
	p.StrokeLine2(solid(Faint, 0.6), p.Min.X, p.Min.Y, p.Max.X, p.Min.Y)
	for _, t := range ticks {
		x := p.x.at(t.at)
		long := vg.Length(1.6)
		if t.label != "" {
			long = 3
		}
		p.StrokeLine2(solid(Faint, 0.5), x, p.Min.Y, x, p.Min.Y-long)
		if labelled && t.label != "" {
			p.FillText(letters(tickSize, false, Faint, draw.XCenter, draw.YTop), vg.Point{X: x, Y: p.Min.Y - 3.6}, t.label)
		}
	}
}

// nameX writes the x axis's name under its right end.
func (p panel) nameX(a report.Axis, below vg.Length) {
	p.FillText(letters(tickSize, false, Faint, draw.XRight, draw.YTop), vg.Point{X: p.Max.X, Y: p.Min.Y - below}, axisName(a))
}

// axisName names an axis and the unit it is labelled in.
func axisName(a report.Axis) string {
	unit := scaleOf(a).Unit
	switch {
	case unit == "":
		return a.Label
	case a.Label == "":
		return unit
	}
	return a.Label + ", " + unit
}

// Margins around the data, in points.
const (
	leftMargin  = 30
	belowOneRow = 19
	panelGap    = 6
)

// stack splits a rectangle into panels that stand on each other, with room for the axes. weights are their heights
// in relation.
func stack(c draw.Canvas, top, right, below vg.Length, weights []float64) []vg.Rectangle {
	sum := 0.0
	for _, w := range weights {
		sum += w
	}
	height := c.Max.Y - c.Min.Y - top - below - panelGap*vg.Length(len(weights)-1)
	out := make([]vg.Rectangle, len(weights))
	y := c.Max.Y - top
	for i, w := range weights {
		h := height * vg.Length(w/sum)
		out[i] = vg.Rectangle{Min: vg.Point{X: c.Min.X + leftMargin, Y: y - h}, Max: vg.Point{X: c.Max.X - right, Y: y}}
		y -= h + panelGap
	}
	return out
}
