package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// drawPhasors draws a dial for each unit, voltages and currents apart, each scaled to its longest arrow: 0° points
// right, angles grow anticlockwise. The numbers stand beside the dials.
func drawPhasors(c draw.Canvas, ch report.Chart) {
	dials := dialsOf(ch)
	width := (c.Max.X - c.Min.X) / vg.Length(max(2, len(dials)))
	for i, d := range dials {
		left := c.Min.X + vg.Length(i)*width
		drawDial(draw.Canvas{Canvas: c.Canvas, Rectangle: vg.Rectangle{
			Min: vg.Point{X: left, Y: c.Min.Y}, Max: vg.Point{X: left + width, Y: c.Max.Y}}}, d)
	}
}

// dialsOf sorts phasors by unit.
func dialsOf(ch report.Chart) [][]report.Series {
	var dials [][]report.Series
next:
	for _, s := range ch.Series {
		if len(s.X) == 0 || len(s.Y) == 0 {
			continue
		}
		for i := range dials {
			if dials[i][0].Unit == s.Unit {
				dials[i] = append(dials[i], s)
				continue next
			}
		}
		dials = append(dials, []report.Series{s})
	}
	return dials
}

func drawDial(c draw.Canvas, d []report.Series) {
	longest := 0.0
	for _, s := range d {
		longest = math.Max(longest, s.Y[0])
	}
	if !(longest > 0) {
		return
	}
	r := min((c.Max.Y-c.Min.Y)/2-13, (c.Max.X-c.Min.X-dialList-48)/2)
	center := vg.Point{X: c.Min.X + r + 14, Y: (c.Min.Y + c.Max.Y) / 2}
	dialFace(c, center, r)
	for _, s := range d {
		if !math.IsNaN(s.X[0]) && !math.IsNaN(s.Y[0]) {
			arrow(c, center, r*vg.Length(s.Y[0]/longest), s)
		}
	}
	dialNumbers(c, vg.Point{X: center.X + r + 20, Y: center.Y}, d)
}

// dialFace draws the rim, and a cross at every 90°.
func dialFace(c draw.Canvas, center vg.Point, r vg.Length) {
	var rim vg.Path
	rim.Move(vg.Point{X: center.X + r, Y: center.Y})
	rim.Arc(center, r, 0, 2*math.Pi)
	rim.Close()
	c.SetLineStyle(solid(Rule, 0.5))
	c.Stroke(rim)
	for deg := 0; deg < 180; deg += 30 {
		sin, cos := math.Sincos(float64(deg) * math.Pi / 180)
		dx, dy := r*vg.Length(cos), r*vg.Length(sin)
		style := solid(grid, 0.4)
		if deg%90 == 0 {
			style = solid(Rule, 0.5)
		}
		c.StrokeLine2(style, center.X-dx, center.Y-dy, center.X+dx, center.Y+dy)
	}
	for i, label := range []string{"0°", "90°", "180°", "−90°"} {
		sin, cos := math.Sincos(float64(i) * math.Pi / 2)
		at := vg.Point{X: center.X + (r+8)*vg.Length(cos), Y: center.Y + (r+6)*vg.Length(sin)}
		c.FillText(letters(tickSize-0.6, false, Faint, draw.XCenter, -0.38), at, label)
	}
}

// arrow draws one phasor with its name at the tip.
func arrow(c draw.Canvas, center vg.Point, length vg.Length, s report.Series) {
	sin, cos := math.Sincos(s.X[0] * math.Pi / 180)
	along := vg.Point{X: vg.Length(cos), Y: vg.Length(sin)}
	across := vg.Point{X: -along.Y, Y: along.X}
	tip := center.Add(along.Scale(length))
	neck := center.Add(along.Scale(max(0, length-6)))
	l := lookOf(s.Role)
	c.StrokeLine2(l.line(1.3), center.X, center.Y, neck.X, neck.Y)
	var head vg.Path
	head.Move(tip)
	head.Line(neck.Add(across.Scale(2.6)))
	head.Line(neck.Sub(across.Scale(2.6)))
	head.Close()
	c.SetColor(l.ink)
	c.Fill(head)
	c.FillText(letters(tickSize, true, Ink, draw.XCenter, -0.38), center.Add(along.Scale(max(8, length-14))).Add(across.Scale(7)), s.Name)
}

// dialList is the width of the list beside a dial.
const dialList = 80

// dialNumbers lists the phasors: an arrow's length is hard to read to a per cent.
func dialNumbers(c draw.Canvas, at vg.Point, d []report.Series) {
	const step = 10
	y := at.Y + step*vg.Length(len(d)-1)/2
	for _, s := range d {
		c.FillText(letters(labelSize, true, Ink, draw.XLeft, -0.38), vg.Point{X: at.X, Y: y}, s.Name)
		c.FillText(letters(labelSize, false, Ink, draw.XRight, -0.38), vg.Point{X: at.X + 46, Y: y}, report.Quantity(s.Y[0], s.Unit))
		c.FillText(letters(labelSize, false, Ink, draw.XRight, -0.38), vg.Point{X: at.X + dialList, Y: y}, fixed(s.X[0], 1)+"°")
		y -= step
	}
}
