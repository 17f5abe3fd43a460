package chart

import (
	"math"
	"strconv"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/harmonics/site"
	"wavetally/report"
)

// drawBars draws a spectrum: a panel a channel, bars over orders, a thin whisker to the highest value, a mark a slot
// wide at each order's limit. All panels share the y axis.
func drawBars(c draw.Canvas, ch report.Chart) {
	channels := measuredSeries(ch)
	ch.Y.High *= 1.06 // room for a bar's name
	ch.X.High = math.Min(ch.X.High, topOrder(ch)+1)
	weights := make([]float64, len(channels))
	for i := range weights {
		weights[i] = 1
	}
	top := drawKey(c, axisName(ch.Y), barKeys(ch, channels))
	for i, r := range stack(c, top, nameRoom, belowOneRow, weights) {
		p := newPanel(c, r, ch.X, ch.Y)
		p.axisY(p.yTicks(scaleOf(ch.Y)))
		p.bars(channels[i], highestOf(ch, channels[i].Role), ch.Limits)
		last := i == len(channels)-1
		p.axisX(orderTicks(p.x.low+1, p.x.high-1, float64(p.x.to-p.x.from)/12), last)
		if last {
			p.nameX(ch.X, 11)
		}
		p.FillText(letters(labelSize, true, Ink, draw.XLeft, draw.YTop), vg.Point{X: p.Max.X + 4, Y: p.Max.Y + 1}, channels[i].Name)
	}
}

// fewestOrders is how far a spectrum's axis reaches at least.
const fewestOrders = 15

// topOrder is the highest order that has a value or a limit: a slow sampling rate shows few.
func topOrder(ch report.Chart) float64 {
	top := float64(fewestOrders)
	for _, s := range ch.Series {
		for i, h := range s.X {
			if !math.IsNaN(value(s.Y, i)) {
				top = math.Max(top, h)
			}
		}
	}
	for _, l := range ch.Limits {
		for i, h := range l.X {
			if !math.IsNaN(value(l.Y, i)) {
				top = math.Max(top, h)
			}
		}
	}
	return top
}

// nameRoom is the space right of a panel for its channel's name.
const nameRoom = 20

func measuredSeries(ch report.Chart) []report.Series {
	var out []report.Series
	for _, s := range ch.Series {
		if s.Use == report.Measured {
			out = append(out, s)
		}
	}
	return out
}

func highestOf(ch report.Chart, role site.Role) []float64 {
	for _, s := range ch.Series {
		if s.Use == report.Highest && s.Role == role {
			return s.Y
		}
	}
	return nil
}

func barKeys(ch report.Chart, channels []report.Series) []keyItem {
	var items []keyItem
	for _, s := range channels {
		if highestOf(ch, s.Role) != nil {
			items = append(items, keyItem{"highest value", func(c draw.Canvas, at vg.Point) {
				c.SetColor(gray(0x50))
				c.Fill(rectangle(vg.Rectangle{Min: vg.Point{X: at.X + 5, Y: at.Y - 3.5}, Max: vg.Point{X: at.X + 9, Y: at.Y}}))
				c.StrokeLine2(solid(gray(0x50), 0.6), at.X+7, at.Y, at.X+7, at.Y+4)
			}})
			break
		}
	}
	for _, l := range ch.Limits {
		items = append(items, lineKey(l.Name, solid(Limit, 1.3)))
	}
	return items
}

// bars draws one channel. What is over its limit carries a triangle; the order nearest to its limit, or the largest
// where there is none, carries its name.
func (p panel) bars(s report.Series, highest []float64, limits []report.LimitLine) {
	slot := p.x.at(1) - p.x.at(0)
	l := lookOf(s.Role)
	named := p.worst(s, limits)
	for i, h := range s.X {
		v, most := value(s.Y, i), value(highest, i)
		if math.IsNaN(v) || h < p.x.low || h > p.x.high {
			continue
		}
		x, top := p.x.at(h), p.y.at(p.y.clamp(v))
		reach := top
		if most > v {
			reach = p.y.at(p.y.clamp(most))
			p.StrokeLine2(solid(gray(0x50), 0.6), x, top, x, reach)
		}
		p.SetColor(l.ink)
		p.Fill(rectangle(vg.Rectangle{Min: vg.Point{X: x - 0.31*slot, Y: p.Min.Y}, Max: vg.Point{X: x + 0.31*slot, Y: top}}))
		limit := limitAt(limits, h)
		if v > limit {
			p.over(x, reach)
		}
		if i == named {
			p.name(h, x, reach, limit)
		}
	}
	for _, line := range limits {
		p.limitMarks(line, slot)
	}
}

// value is v[i], NaN where there is none.
func value(v []float64, i int) float64 {
	if i < len(v) {
		return v[i]
	}
	return math.NaN()
}

// worst finds the bar to name.
func (p panel) worst(s report.Series, limits []report.LimitLine) int {
	best, index := 0.0, -1
	for i, h := range s.X {
		rank := value(s.Y, i)
		if len(limits) > 0 {
			rank /= limitAt(limits, h)
		}
		if rank > best && h >= p.x.low && h <= p.x.high {
			best, index = rank, i
		}
	}
	return index
}

// limitAt is the lowest limit of an order; +Inf where there is none.
func limitAt(limits []report.LimitLine, h float64) float64 {
	lowest := math.Inf(1)
	for _, l := range limits {
		if l.X == nil && len(l.Y) == 1 {
			lowest = math.Min(lowest, l.Y[0])
		}
		for i, x := range l.X {
			if v := value(l.Y, i); x == h && !math.IsNaN(v) {
				lowest = math.Min(lowest, v)
			}
		}
	}
	return lowest
}

// over marks a bar that exceeds, by shape as well as colour.
func (p panel) over(x, y vg.Length) {
	var t vg.Path
	t.Move(vg.Point{X: x, Y: y + 6})
	t.Line(vg.Point{X: x + 2.6, Y: y + 1.6})
	t.Line(vg.Point{X: x - 2.6, Y: y + 1.6})
	t.Close()
	p.SetColor(Limit)
	p.Fill(t)
}

// name writes an order over its bar, clear of the limit's mark and of the triangle.
func (p panel) name(h float64, x, top vg.Length, limit float64) {
	y := top + 4.5
	if l := p.y.at(p.y.clamp(limit)); l > top-1 && l < y+4 {
		y = l + 4.5
	}
	style := letters(tickSize, true, Ink, draw.XCenter, -0.38)
	if limit < math.Inf(1) && top > p.y.at(p.y.clamp(limit)) {
		style.XAlign, x = draw.XLeft, x+4
	}
	p.FillText(style, vg.Point{X: x, Y: min(y, p.Max.Y)}, strconv.Itoa(int(h)))
}

func (p panel) limitMarks(line report.LimitLine, slot vg.Length) {
	if line.X == nil && len(line.Y) == 1 {
		y := p.y.at(p.y.clamp(line.Y[0]))
		p.StrokeLine2(solid(Limit, 1.1), p.Min.X, y, p.Max.X, y)
		return
	}
	for i, h := range line.X {
		if v := value(line.Y, i); v >= p.y.low && v <= p.y.high && h >= p.x.low && h <= p.x.high {
			x, y := p.x.at(h), p.y.at(v)
			p.StrokeLine2(solid(Limit, 1.1), x-0.5*slot, y, x+0.5*slot, y)
		}
	}
}
