package pdf

import (
	"image"
	"image/color"
	"math"
	"strconv"

	"github.com/jung-kurt/gofpdf"
	stdfont "golang.org/x/image/font"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/vg"
)

// A canvas draws gonum's vector graphics onto the current page of a gofpdf document, as vectors. The document's unit
// is the point. The canvas's origin is the lower left corner of the page, as in PDF itself, so that only text has to
// pass through gofpdf, which must learn which characters to embed; paths are written as PDF operators.
type canvas struct {
	doc        *gofpdf.Fpdf
	pageHeight float64
	ops        []byte
	now        state
	stack      []state
}

// A state is what Push saves, beside what PDF's own q and Q save.
type state struct {
	width       vg.Length
	dash        []vg.Length
	offset      vg.Length
	ink         color.Color
	strokeInked color.Color // as last written to the page, so that runs of equal ink are written once
	fillInked   color.Color
}

var _ vg.Canvas = (*canvas)(nil)

func newCanvas(doc *gofpdf.Fpdf, pageHeight float64) *canvas {
	c := &canvas{doc: doc, pageHeight: pageHeight}
	c.ops = append(c.ops, "q "...)
	vg.Initialize(c)
	return c
}

// close hands what was drawn to the page and restores its state.
func (c *canvas) close() {
	c.ops = append(c.ops, "Q"...)
	c.flush()
}

func (c *canvas) flush() {
	if len(c.ops) > 0 {
		c.doc.RawWriteStr(string(c.ops))
		c.ops = c.ops[:0]
	}
}

// put writes numbers in hundredths of a point, then an operator.
func (c *canvas) put(op string, numbers ...float64) {
	for _, n := range numbers {
		c.ops = appendNumber(c.ops, n, 2)
		c.ops = append(c.ops, ' ')
	}
	c.ops = append(append(c.ops, op...), '\n')
}

// appendNumber writes a number as short as PDF allows. What is not finite has no place on paper; it is written as 0.
func appendNumber(b []byte, n float64, digits int) []byte {
	if math.IsNaN(n) || math.IsInf(n, 0) {
		n = 0
	}
	start := len(b)
	b = strconv.AppendFloat(b, n, 'f', digits, 64)
	for len(b) > start && b[len(b)-1] == '0' {
		b = b[:len(b)-1]
	}
	if b[len(b)-1] == '.' {
		b = b[:len(b)-1]
	}
	if text := string(b[start:]); text == "-0" || text == "" || text == "-" {
		return append(b[:start], '0')
	}
	return b
}

func (c *canvas) SetLineWidth(w vg.Length) {
	c.now.width = w
	c.put("w", float64(w))
}

func (c *canvas) SetLineDash(pattern []vg.Length, offset vg.Length) {
	c.now.dash, c.now.offset = pattern, offset
	c.ops = append(c.ops, '[')
	for _, d := range pattern {
		c.ops = append(appendNumber(c.ops, float64(d), 2), ' ')
	}
	c.ops = append(c.ops, "] "...)
	c.put("d", float64(offset))
}

func (c *canvas) SetColor(ink color.Color) {
	if ink == nil {
		ink = color.Black
	}
	c.now.ink = ink
}

func (c *canvas) putInk(op string) {
	r, g, b, _ := c.now.ink.RGBA()
	for _, part := range []uint32{r, g, b} {
		c.ops = append(appendNumber(c.ops, float64(part)/0xffff, 3), ' ')
	}
	c.ops = append(append(c.ops, op...), '\n')
}

func (c *canvas) strokeInk() {
	if c.now.strokeInked != c.now.ink {
		c.putInk("RG")
		c.now.strokeInked = c.now.ink
	}
}

func (c *canvas) fillInk() {
	if c.now.fillInked != c.now.ink {
		c.putInk("rg")
		c.now.fillInked = c.now.ink
	}
}

// concat multiplies the page's transformation; its entries need more digits than coordinates do.
func (c *canvas) concat(m ...float64) {
	for _, n := range m {
		c.ops = append(appendNumber(c.ops, n, 5), ' ')
	}
	c.ops = append(c.ops, "cm\n"...)
}

func (c *canvas) Rotate(rad float64) {
	sin, cos := math.Sincos(rad)
	c.concat(cos, sin, -sin, cos, 0, 0)
}

func (c *canvas) Translate(pt vg.Point) { c.concat(1, 0, 0, 1, float64(pt.X), float64(pt.Y)) }

func (c *canvas) Scale(x, y float64) { c.concat(x, 0, 0, y, 0, 0) }

func (c *canvas) Push() {
	c.stack = append(c.stack, c.now)
	c.ops = append(c.ops, "q\n"...)
}

func (c *canvas) Pop() {
	c.now = c.stack[len(c.stack)-1]
	c.stack = c.stack[:len(c.stack)-1]
	c.ops = append(c.ops, "Q\n"...)
}

func (c *canvas) Stroke(p vg.Path) {
	if c.now.width <= 0 || len(p) == 0 {
		return
	}
	c.strokeInk()
	c.trace(p)
	c.ops = append(c.ops, "S\n"...)
}

func (c *canvas) Fill(p vg.Path) {
	if len(p) == 0 {
		return
	}
	c.fillInk()
	c.trace(p)
	c.ops = append(c.ops, "f\n"...)
}

// trace writes a path. It keeps the current point, which arcs and curves of second degree need.
func (c *canvas) trace(p vg.Path) {
	var at vg.Point
	begun := false
	for _, part := range p {
		switch part.Type {
		case vg.MoveComp:
			c.put("m", float64(part.Pos.X), float64(part.Pos.Y))
			at = part.Pos
		case vg.LineComp:
			c.put("l", float64(part.Pos.X), float64(part.Pos.Y))
			at = part.Pos
		case vg.ArcComp:
			at = c.arc(part, begun)
		case vg.CurveComp:
			c.curve(at, part)
			at = part.Pos
		case vg.CloseComp:
			c.put("h")
		}
		begun = part.Type != vg.CloseComp
	}
}

// curve writes a Bézier curve; PDF has only those of third degree, so one of second degree is raised.
func (c *canvas) curve(from vg.Point, part vg.PathComp) {
	first, last := part.Control[0], part.Control[len(part.Control)-1]
	if len(part.Control) == 1 {
		first = from.Add(first.Sub(from).Scale(2.0 / 3))
		last = part.Pos.Add(last.Sub(part.Pos).Scale(2.0 / 3))
	}
	c.put("c", float64(first.X), float64(first.Y), float64(last.X), float64(last.Y), float64(part.Pos.X), float64(part.Pos.Y))
}

// arc writes a circle's arc as Bézier curves of at most an eighth of a turn, each off the circle by less than
// 0.001 % of the radius, and returns its end. A line leads to its start when the path has begun, as vg.Path asks.
func (c *canvas) arc(part vg.PathComp, begun bool) vg.Point {
	x, y, r := float64(part.Pos.X), float64(part.Pos.Y), float64(part.Radius)
	pieces := max(1, int(math.Ceil(math.Abs(part.Angle)/(math.Pi/4))))
	step := part.Angle / float64(pieces)
	k := 4.0 / 3 * math.Tan(step/4)
	sin0, cos0 := math.Sincos(part.Start)
	lead := "m"
	if begun {
		lead = "l"
	}
	c.put(lead, x+r*cos0, y+r*sin0)
	for i := range pieces {
		sin1, cos1 := math.Sincos(part.Start + float64(i+1)*step)
		c.put("c", x+r*(cos0-k*sin0), y+r*(sin0+k*cos0), x+r*(cos1+k*sin1), y+r*(sin1-k*cos1), x+r*cos1, y+r*sin1)
		sin0, cos0 = sin1, cos1
	}
	return vg.Point{X: vg.Length(x + r*cos0), Y: vg.Length(y + r*sin0)}
}

// FillString sets text at a point. gofpdf measures y from the page's top, so the point is reached by a translation and
// the text set at the lower left corner.
func (c *canvas) FillString(f font.Face, pt vg.Point, text string) {
	if f.Font.Size <= 0 {
		return
	}
	c.fillInk()
	c.ops = append(c.ops, "q "...)
	c.Translate(pt)
	c.flush()
	style := ""
	if f.Font.Weight >= stdfont.WeightSemiBold {
		style = "B"
	}
	c.doc.SetFont(family, style, f.Font.Size.Points())
	r, g, b, _ := c.now.ink.RGBA()
	c.doc.SetTextColor(int(r>>8), int(g>>8), int(b>>8))
	c.doc.Text(0, c.pageHeight, clean(text))
	c.ops = append(c.ops, "Q\n"...)
}

// DrawImage fails the document: its charts are vectors.
func (c *canvas) DrawImage(vg.Rectangle, image.Image) {
	c.doc.SetErrorf("a chart asked for a bitmap, but charts are drawn as vectors only")
}
