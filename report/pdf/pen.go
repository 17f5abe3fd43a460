package pdf

import (
	"image/color"

	"github.com/jung-kurt/gofpdf"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/harmonics/limits"
	"wavetally/report/chart"
)

// The document's faces.
var (
	titleFace   = face{true, 21}
	verdictFace = face{true, 15}
	sectionFace = face{true, 13}
	headFace    = face{true, 9.2}
	textFace    = face{false, 9.4}
	strongFace  = face{true, 9.4}
	sideFace    = face{false, 7.6}
	sideHead    = face{true, 8.6}
	tableFace   = face{false, 7.8}
	tableStrong = face{true, 7.8}
	cellHead    = face{true, 7.4}
	cautionFace = face{false, 8.2}
	tinyFace    = face{false, 6.8}
)

// A pen sets text and rules on the current page. Lengths are points, y counts from the page's top.
type pen struct {
	doc           *gofpdf.Fpdf
	width, height float64 // of the page
}

// measure gives the width of a text. It may be asked before there is a page.
func (p *pen) measure(f face, s string) float64 {
	p.doc.SetFont(family, f.style(), f.size)
	return p.doc.GetStringWidth(s)
}

func (p *pen) color(ink color.NRGBA) {
	p.doc.SetTextColor(int(ink.R), int(ink.G), int(ink.B))
}

// text sets one line with its baseline at y.
func (p *pen) text(f face, ink color.NRGBA, x, y float64, s string) {
	p.doc.SetFont(family, f.style(), f.size)
	p.color(ink)
	p.doc.Text(x, y, s)
}

// right sets one line that ends at x.
func (p *pen) right(f face, ink color.NRGBA, x, y float64, s string) {
	p.text(f, ink, x-p.measure(f, s), y, s)
}

// lines sets lines below each other, the first one's top at y.
func (p *pen) lines(f face, ink color.NRGBA, x, y float64, lines []string) {
	for i, line := range lines {
		p.text(f, ink, x, y+f.size*0.93+float64(i)*f.leading(), line)
	}
}

// height of lines set below each other.
func textHeight(f face, lines int) float64 {
	if lines == 0 {
		return 0
	}
	return f.size*1.18 + float64(lines-1)*f.leading()
}

func (p *pen) rule(ink color.NRGBA, width, x1, x2, y float64) {
	p.doc.SetDrawColor(int(ink.R), int(ink.G), int(ink.B))
	p.doc.SetLineWidth(width)
	p.doc.Line(x1, y, x2, y)
}

func (p *pen) fill(ink color.NRGBA, x, y, w, h float64) {
	p.doc.SetFillColor(int(ink.R), int(ink.G), int(ink.B))
	p.doc.Rect(x, y, w, h, "F")
}

// vectors gives a canvas of gonum's over a rectangle of the page; done must be called when it is drawn.
func (p *pen) vectors(x, y, w, h float64) (c draw.Canvas, done func()) {
	v := newCanvas(p.doc, p.height)
	return draw.Canvas{Canvas: v, Rectangle: vg.Rectangle{
		Min: vg.Point{X: vg.Length(x), Y: vg.Length(p.height - y - h)},
		Max: vg.Point{X: vg.Length(x + w), Y: vg.Length(p.height - y)},
	}}, v.close
}

// symbol draws a verdict's symbol in a square of the given size. Each has a shape of its own, so that colour is not
// needed to tell them apart.
func (p *pen) symbol(result string, x, y, size float64) {
	c, done := p.vectors(x, y, size, size)
	chart.Symbol(c, result)
	done()
}

// verdictInk colours the word of a verdict; only what needs action is loud.
func verdictInk(result string) color.NRGBA {
	if result == limits.Exceeds {
		return chart.Alarm
	}
	return chart.Ink
}
