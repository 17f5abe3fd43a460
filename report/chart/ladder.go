package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// A Rung is one line of a ladder: how much of its limit something takes.
type Rung struct {
	Name   string
	Share  float64 // per cent of the limit
	Result string  // decides the symbol
}

// LadderSize is how high a ladder may be drawn.
func LadderSize(rungs int) Size {
	n := vg.Length(rungs)
	return Size{12*n + ladderEnds, 13*n + ladderEnds, 20*n + ladderEnds}
}

const ladderEnds = 20 // the limit's name above and the scale below

// Ladder draws shares of limits on one scale, the limit itself a line across.
func Ladder(c draw.Canvas, rungs []Rung) {
	high := 120.0
	for _, r := range rungs {
		high = math.Max(high, 1.12*r.Share)
	}
	named := vg.Length(0)
	for _, r := range rungs {
		named = max(named, widthOf(r.Name, labelSize))
	}
	named = min(named, 0.55*(c.Max.X-c.Min.X))
	x := span{high: high, from: c.Min.X + named + 8, to: c.Max.X - 4}
	top, foot := c.Max.Y-10, c.Min.Y+ladderEnds-10
	step := (top - foot) / vg.Length(max(1, len(rungs)))
	for _, t := range niceTicks(0, high, 8) {
		c.StrokeLine2(solid(grid, 0.5), x.at(t.at), foot, x.at(t.at), top)
		c.FillText(letters(tickSize, false, Faint, draw.XCenter, draw.YTop), vg.Point{X: x.at(t.at), Y: foot - 1}, t.label+" %")
	}
	c.StrokeLine2(dashed(Limit, 1.1), x.at(100), foot, x.at(100), top+1)
	c.FillText(letters(tickSize, true, Alarm, draw.XCenter, -0.38), vg.Point{X: x.at(100), Y: top + 5}, "limit")
	for i, r := range rungs {
		y := top - (vg.Length(i)+0.5)*step
		c.FillText(letters(labelSize, false, Ink, draw.XLeft, -0.38), vg.Point{X: c.Min.X, Y: y}, shortened(r.Name, named))
		rung(c, x, y, r)
	}
}

// rung draws a stem to the share, the result's symbol at its end, and the number.
func rung(c draw.Canvas, x span, y vg.Length, r Rung) {
	const size = 7
	end := x.at(r.Share)
	c.StrokeLine2(solid(gray(0x8c), 1.6), x.from, y, max(x.from, end-size/2), y)
	box := vg.Rectangle{Min: vg.Point{X: end - size/2, Y: y - size/2}, Max: vg.Point{X: end + size/2, Y: y + size/2}}
	Symbol(draw.Canvas{Canvas: c.Canvas, Rectangle: box}, r.Result)
	label := report.Sig(r.Share) + " %"
	style, at := letters(tickSize, true, Ink, draw.XLeft, -0.38), end+size/2+3
	wide := widthOf(label, tickSize) + 3
	if l := x.at(100); r.Share <= 100 && at+wide > l-2 {
		at = l + 4 // clear of the limit's line
	}
	if at+wide > x.to {
		style.XAlign, at = draw.XRight, end-size/2-3
	}
	c.FillText(style, vg.Point{X: at, Y: y}, label)
}
