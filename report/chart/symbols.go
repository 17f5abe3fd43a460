package chart

import (
	"math"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/harmonics/limits"
)

// Symbol fills a square with a verdict's symbol: a tick, an upright triangle, a half-filled disc, or a dash.
func Symbol(c draw.Canvas, result string) {
	size := c.Max.X - c.Min.X
	at := func(x, y float64) vg.Point {
		return vg.Point{X: c.Min.X + size*vg.Length(x), Y: c.Min.Y + size*vg.Length(y)}
	}
	switch result {
	case limits.Within:
		var tick vg.Path
		tick.Move(at(0.1, 0.52))
		tick.Line(at(0.4, 0.2))
		tick.Line(at(0.92, 0.86))
		c.SetLineStyle(solid(blue, 0.16*size))
		c.Stroke(tick)
	case limits.Exceeds:
		var up vg.Path
		up.Move(at(0.5, 0.95))
		up.Line(at(0.98, 0.1))
		up.Line(at(0.02, 0.1))
		up.Close()
		c.SetColor(Limit)
		c.Fill(up)
	case limits.Undecided:
		var half, ring vg.Path
		half.Move(at(0.5, 0.92))
		half.Arc(at(0.5, 0.5), 0.42*size, math.Pi/2, math.Pi)
		half.Close()
		c.SetColor(gray(0x55))
		c.Fill(half)
		ring.Move(at(0.92, 0.5))
		ring.Arc(at(0.5, 0.5), 0.42*size, 0, 2*math.Pi)
		ring.Close()
		c.SetLineStyle(solid(gray(0x55), 0.09*size))
		c.Stroke(ring)
	default:
		c.StrokeLine2(solid(gray(0x80), 0.14*size), at(0.15, 0.5).X, at(0, 0.5).Y, at(0.85, 0.5).X, at(0, 0.5).Y)
	}
}
