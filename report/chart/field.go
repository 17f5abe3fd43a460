package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// drawField draws a heat map or a spectrogram, with its colour scale on the right.
func drawField(c draw.Canvas, ch report.Chart, at Place) {
	if ch.Grid == nil || len(ch.Grid.Xs) == 0 || len(ch.Grid.Ys) == 0 {
		return
	}
	g := cropped(ch.Grid)
	top := drawKey(c, fieldName(ch.Y), nil)
	below := vg.Length(belowOneRow)
	if ch.X.Clock {
		below = 30
	}
	r := stack(c, top, 62, below, []float64{1})[0]
	p := newPanel(c, r, ch.X, fieldY(ch.Y, g))
	shades := ramp{low: g.Low, high: g.High, mark: g.Mark, log: g.Log}
	p.field(g, shades)
	p.fieldAxis(ch)
	p.axisX(p.timeTicks(ch, at), true)
	p.nameX(timeAxis(ch.X, at), below-8.5)
	drawScale(c, r, g, shades)
}

// fieldName names the rows; frequencies stay in Hz, as orders are counted in them.
func fieldName(a report.Axis) string {
	if a.Unit == "" {
		return a.Label
	}
	return a.Label + ", " + a.Unit
}

// cropped leaves out the rows above the last one that has a value, for limits often end at order 25 or 40, and makes the
// ends of the colour scale drawable.
func cropped(g *report.Grid) *report.Grid {
	rows := 1
	for j := range g.Ys {
		for i := range g.Value {
			if !math.IsNaN(cellAt(g, i, j)) {
				rows = j + 1
				break
			}
		}
	}
	out := *g
	out.Ys = g.Ys[:rows]
	out.Low, out.High = ends(report.Axis{Low: g.Low, High: g.High})
	if out.Log && out.Low <= 0 {
		out.Low = out.High / 1e4
	}
	return &out
}

// fieldY is the y axis, half a row beyond the outer rows' centres.
func fieldY(a report.Axis, g *report.Grid) report.Axis {
	ys := g.Ys
	half := 0.5
	if len(ys) > 1 {
		half = (ys[1] - ys[0]) / 2
	}
	a.Low, a.High = ys[0]-half, ys[len(ys)-1]+half
	return a
}

// fieldAxis labels the rows: odd orders where rows are orders, else round numbers.
func (p panel) fieldAxis(ch report.Chart) {
	ticks := p.yTicks(report.Scale{Factor: 1})
	if ch.Y.Unit == "" {
		ticks = orderTicks(p.y.low, p.y.high, float64(p.y.to-p.y.from)/9)
	}
	for _, t := range ticks {
		if t.label == "" {
			continue
		}
		y := p.y.at(t.at)
		p.StrokeLine2(solid(Faint, 0.5), p.Min.X-2.5, y, p.Min.X, y)
		p.FillText(letters(tickSize, false, Faint, draw.XRight, -0.38), vg.Point{X: p.Min.X - 4, Y: y}, t.label)
	}
}

// overlap of neighbouring cells, in points.
const overlap = 0.12

// field draws the cells, ink by ink; neighbours in a row that share an ink are one rectangle.
func (p panel) field(g *report.Grid, shades ramp) {
	shadeBox(p.Canvas, p.Rectangle) // shows through where there is no value
	paths := make([]vg.Path, shadesOfRamp)
	dy := (p.y.high - p.y.low) / float64(len(g.Ys))
	for j := range g.Ys {
		y0, y1 := p.y.at(p.y.low+float64(j)*dy), p.y.at(p.y.low+float64(j+1)*dy)
		for i := 0; i < len(g.Xs); {
			ink := inkOf(g, shades, i, j)
			from := i
			for i++; i < len(g.Xs) && inkOf(g, shades, i, j) == ink && g.Xs[i]-g.Xs[i-1] < 1.01*g.DX; i++ {
			}
			if ink < 0 {
				continue
			}
			x0, x1 := p.x.at(p.x.clamp(g.Xs[from])), p.x.at(p.x.clamp(g.Xs[i-1]+g.DX))
			// A hair of overlap, or viewers that smooth edges show the ground between the cells.
			x1, y1 := min(x1+overlap, p.Max.X), min(y1+overlap, p.Max.Y)
			paths[ink] = append(paths[ink], rectangle(vg.Rectangle{Min: vg.Point{X: x0, Y: y0}, Max: vg.Point{X: x1, Y: y1}})...)
		}
	}
	for ink, path := range paths {
		p.SetColor(shades.ink(ink))
		p.Fill(path)
	}
}

// inkOf is the ink of a cell, -1 where nothing was measured.
func inkOf(g *report.Grid, shades ramp, i, j int) int {
	v := cellAt(g, i, j)
	if math.IsNaN(v) || shades.log && v <= 0 {
		return -1
	}
	return shades.index(v)
}

func cellAt(g *report.Grid, i, j int) float64 {
	if i < len(g.Value) {
		return value(g.Value[i], j)
	}
	return math.NaN()
}

// drawScale draws the colour scale right of a field, with its ticks and the mark.
func drawScale(c draw.Canvas, field vg.Rectangle, g *report.Grid, shades ramp) {
	x := field.Max.X + 12
	s := span{low: g.Low, high: g.High, from: field.Min.Y, to: field.Max.Y, log: g.Log}
	const steps = 128
	height := (s.to - s.from) / steps
	for i := range steps {
		v := g.Low + (float64(i)+0.5)/steps*(g.High-g.Low)
		if g.Log {
			v = g.Low * math.Pow(g.High/g.Low, (float64(i)+0.5)/steps)
		}
		y := s.from + vg.Length(i)*height
		c.SetColor(shades.ink(shades.index(v)))
		c.Fill(rectangle(vg.Rectangle{Min: vg.Point{X: x, Y: y}, Max: vg.Point{X: x + 9, Y: y + height + 0.1}}))
	}
	ticks := niceTicks(g.Low, g.High, 6)
	if g.Log {
		ticks = logTicks(g.Low, g.High)
	}
	for _, t := range ticks {
		c.StrokeLine2(solid(Faint, 0.5), x+9, s.at(t.at), x+11.5, s.at(t.at))
		c.FillText(letters(tickSize, false, Faint, draw.XLeft, -0.38), vg.Point{X: x + 13, Y: s.at(t.at)}, t.label)
	}
	if shades.marked() && g.Mark <= g.High {
		y := s.at(g.Mark)
		c.StrokeLine2(solid(Limit, 1.2), x-2.5, y, x+11.5, y)
		c.FillText(letters(tickSize, true, Alarm, draw.XLeft, -0.38), vg.Point{X: x + 27, Y: y}, "limit")
	}
	name := g.Label
	if g.Unit != "" {
		name += ", " + g.Unit
	}
	c.FillText(letters(tickSize, false, Faint, draw.XRight, -0.38), vg.Point{X: c.Max.X, Y: field.Max.Y + 8}, name)
}
