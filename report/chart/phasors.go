package chart

import (
	"math"
	"slices"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/report"
)

// drawPhasors draws a dial for each unit, voltages and currents apart, each scaled to its longest arrow: 0° points
// right, angles grow anticlockwise. The numbers stand in a list beside the dials: an arrow's length is hard to read to
// a per cent.
func drawPhasors(c draw.Canvas, ch report.Chart) {
	dials := dialsOf(ch)
	if len(dials) == 0 {
		return
	}
	r := min((c.Max.Y-c.Min.Y)/2-12, (c.Max.X-c.Min.X-dialList)/vg.Length(2*len(dials))-dialRim)
	x := c.Min.X
	for _, d := range dials {
		drawDial(c, vg.Point{X: x + dialRim, Y: (c.Min.Y + c.Max.Y) / 2}.Add(vg.Point{X: r}), r, d)
		x += 2 * (r + dialRim)
	}
	dialNumbers(c, vg.Point{X: x + 14, Y: (c.Min.Y + c.Max.Y) / 2}, dials)
}

// dialRim is the room for the degrees around a dial, dialList the list's width.
const (
	dialRim  = 19
	dialList = 106
)

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

func drawDial(c draw.Canvas, center vg.Point, r vg.Length, d []report.Series) {
	longest := 0.0
	for _, s := range d {
		longest = math.Max(longest, s.Y[0])
	}
	dialFace(c, center, r)
	var taken []vg.Point
	for _, s := range d {
		if !math.IsNaN(s.X[0]) && s.Y[0] > 0 {
			length := r * vg.Length(s.Y[0]/longest)
			along := arrow(c, center, length, s)
			at := freePlace(center, along, length, taken)
			taken = append(taken, at)
			c.FillText(letters(tickSize, true, Ink, draw.XCenter, -0.38), at, s.Name)
		}
	}
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

// arrow draws one phasor and returns its direction.
func arrow(c draw.Canvas, center vg.Point, length vg.Length, s report.Series) vg.Point {
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
	return along
}

// freePlace finds where an arrow's name stands clear of those before: beside the arrow near its tip, on the other side,
// or nearer to the centre.
func freePlace(center, along vg.Point, length vg.Length, taken []vg.Point) vg.Point {
	across := vg.Point{X: -along.Y, Y: along.X}
	var place vg.Point
	for _, back := range []vg.Length{14, 24, 34, 44} {
		for _, side := range []vg.Length{7, -7} {
			place = center.Add(along.Scale(max(8, length-back))).Add(across.Scale(side))
			if !slices.ContainsFunc(taken, func(t vg.Point) bool {
				return math.Abs(float64(t.X-place.X)) < 14 && math.Abs(float64(t.Y-place.Y)) < 8
			}) {
				return place
			}
		}
	}
	return place
}

func dialNumbers(c draw.Canvas, at vg.Point, dials [][]report.Series) {
	const step = 10.5
	rows := len(dials) - 1 // a gap between the lists
	for _, d := range dials {
		rows += len(d)
	}
	y := at.Y + step*vg.Length(rows-1)/2
	for _, d := range dials {
		for _, s := range d {
			c.FillText(letters(labelSize, true, Ink, draw.XLeft, -0.38), vg.Point{X: at.X, Y: y}, s.Name)
			c.FillText(letters(labelSize, false, Ink, draw.XRight, -0.38), vg.Point{X: at.X + 52, Y: y}, report.Quantity(s.Y[0], s.Unit))
			c.FillText(letters(labelSize, false, Ink, draw.XRight, -0.38), vg.Point{X: at.X + dialList - 16, Y: y}, fixed(s.X[0], 1)+"°")
			y -= step
		}
		y -= step
	}
}
