package chart

import (
	"strings"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// A keyItem explains one kind of mark that cannot be labelled where it stands.
type keyItem struct {
	name string
	mark func(c draw.Canvas, at vg.Point) // draws a sample keyMark wide, its middle left at a point
}

const (
	keyMark = 15
	keyRow  = 10
	keyGap  = 10
)

// drawKey sets the y axis's name and the key in rows at the top of a chart and returns the height they took. Items
// that have no room beside each other go to the next row.
func drawKey(c draw.Canvas, name string, items []keyItem) vg.Length {
	x, y := c.Min.X, c.Max.Y-keyRow/2
	c.FillText(letters(tickSize, false, Faint, draw.XLeft, -0.38), vg.Point{X: x, Y: y}, name)
	x += widthOf(name, tickSize) + keyGap + 4
	for _, it := range items {
		wide := keyMark + 4 + widthOf(it.name, tickSize)
		if x+wide > c.Max.X && x > c.Min.X {
			x, y = c.Min.X, y-keyRow
		}
		it.mark(c, vg.Point{X: x, Y: y})
		c.FillText(letters(tickSize, false, Faint, draw.XLeft, -0.38), vg.Point{X: x + keyMark + 4, Y: y}, shortened(it.name, c.Max.X-x-keyMark-4))
		x += wide + keyGap
	}
	return c.Max.Y - y + keyRow/2 + 2
}

// shortened cuts a text that has no room, ending in an ellipsis.
func shortened(s string, room vg.Length) string {
	if widthOf(s, tickSize) <= room {
		return s
	}
	runes := []rune(s)
	for len(runes) > 0 && widthOf(string(runes)+"…", tickSize) > room {
		runes = runes[:len(runes)-1]
	}
	return strings.TrimSpace(string(runes)) + "…"
}

// lineKey is the key of a line.
func lineKey(name string, sty draw.LineStyle) keyItem {
	return keyItem{name, func(c draw.Canvas, at vg.Point) {
		c.StrokeLine2(sty, at.X, at.Y, at.X+keyMark, at.Y)
	}}
}

// boxKey is the key of a filled shape.
func boxKey(name string, fill func(c draw.Canvas, r vg.Rectangle)) keyItem {
	return keyItem{name, func(c draw.Canvas, at vg.Point) {
		fill(c, vg.Rectangle{Min: vg.Point{X: at.X + 3, Y: at.Y - 3}, Max: vg.Point{X: at.X + keyMark - 2, Y: at.Y + 3}})
	}}
}

// rectangle is a closed path.
func rectangle(r vg.Rectangle) vg.Path {
	var p vg.Path
	p.Move(r.Min)
	p.Line(vg.Point{X: r.Max.X, Y: r.Min.Y})
	p.Line(r.Max)
	p.Line(vg.Point{X: r.Min.X, Y: r.Max.Y})
	p.Close()
	return p
}
