package pdf

import (
	"fmt"
	"image"
	"math"
	"strings"
	"testing"

	"github.com/jung-kurt/gofpdf"
	"gonum.org/v1/plot/vg"
)

func blankCanvas() *canvas {
	doc := gofpdf.NewCustom(&gofpdf.InitType{UnitStr: "pt", Size: papers["a4"]})
	doc.AddPage()
	c := newCanvas(doc, papers["a4"].Ht)
	c.ops = nil
	return c
}

// PDF numbers have no exponent (ISO 32000-1, 7.3.3), and what is no number at all must not be written.
func TestNumbers(t *testing.T) {
	for in, want := range map[float64]string{
		0: "0", 1: "1", -1.5: "-1.5", 100: "100", 0.004: "0", -0.004: "0", 12.345: "12.35", 1e9: "1000000000",
		math.Inf(1): "0", math.NaN(): "0", 10.10: "10.1",
	} {
		if got := string(appendNumber([]byte("x "), in, 2)); got != "x "+want {
			t.Errorf("%g is written as %q", in, got)
		}
	}
}

// An arc as Bézier curves stays within 0.001 % of its radius, whatever its length and direction.
func TestArcsAreRound(t *testing.T) {
	for _, sweep := range []float64{0.01, 1, -2, math.Pi, 2 * math.Pi, -7} {
		var p vg.Path
		p.Arc(vg.Point{X: 300, Y: 400}, 200, 0.3, sweep)
		c := blankCanvas()
		c.trace(p)
		var x, y float64
		curves := 0
		for _, line := range strings.Split(string(c.ops), "\n") {
			var x1, y1, x2, y2, x3, y3 float64
			if strings.HasSuffix(line, " m") {
				fmt.Sscan(line, &x, &y)
			}
			if !strings.HasSuffix(line, " c") {
				continue
			}
			fmt.Sscan(line, &x1, &y1, &x2, &y2, &x3, &y3)
			curves++
			for _, s := range []float64{0.25, 0.5, 0.75, 1} {
				b := [4]float64{(1 - s) * (1 - s) * (1 - s), 3 * s * (1 - s) * (1 - s), 3 * s * s * (1 - s), s * s * s}
				px, py := b[0]*x+b[1]*x1+b[2]*x2+b[3]*x3, b[0]*y+b[1]*y1+b[2]*y2+b[3]*y3
				// Coordinates are written to a hundredth of a point.
				if r := math.Hypot(px-300, py-400); math.Abs(r-200) > 0.002+0.015 {
					t.Fatalf("sweep %g: a point lies %.4f from the centre", sweep, r)
				}
			}
			x, y = x3, y3
		}
		end := vg.Point{X: vg.Length(300 + 200*math.Cos(0.3+sweep)), Y: vg.Length(400 + 200*math.Sin(0.3+sweep))}
		if curves == 0 || math.Abs(x-float64(end.X)) > 0.01 || math.Abs(y-float64(end.Y)) > 0.01 {
			t.Errorf("sweep %g ends at (%.2f, %.2f), not at %v", sweep, x, y, end)
		}
	}
}

// A curve of second degree is raised to third: its middle is (P0 + 2 P1 + P2) / 4.
func TestQuadraticCurves(t *testing.T) {
	var p vg.Path
	p.Move(vg.Point{X: 0, Y: 0})
	p.QuadTo(vg.Point{X: 30, Y: 60}, vg.Point{X: 60, Y: 0})
	c := blankCanvas()
	c.trace(p)
	if got, want := string(c.ops), "0 0 m\n20 40 40 40 60 0 c\n"; got != want {
		t.Errorf("%q, want %q", got, want)
	}
}

// An arc within a path is led to by a line; one that begins a path is not.
func TestArcsJoin(t *testing.T) {
	var p vg.Path
	p.Move(vg.Point{X: 5, Y: 5})
	p.Arc(vg.Point{X: 0, Y: 0}, 10, 0, 1)
	c := blankCanvas()
	c.trace(p)
	if !strings.HasPrefix(string(c.ops), "5 5 m\n10 0 l\n") {
		t.Errorf("%q", c.ops)
	}
}

func TestBitmapsAreRefused(t *testing.T) {
	c := blankCanvas()
	c.DrawImage(vg.Rectangle{}, image.NewGray(image.Rect(0, 0, 1, 1)))
	if err := c.doc.Error(); err == nil || !strings.Contains(err.Error(), "bitmap") {
		t.Errorf("error %v", err)
	}
}

// Ink is written when it changes and not else, also after what Pop takes back.
func TestInkIsWrittenOnce(t *testing.T) {
	c := blankCanvas()
	line := vg.Path{{Type: vg.MoveComp}, {Type: vg.LineComp, Pos: vg.Point{X: 1}}}
	c.SetLineWidth(1)
	c.Stroke(line)
	c.Push()
	c.SetColor(image.White)
	c.Stroke(line)
	c.Stroke(line)
	c.Pop()
	c.Stroke(line)
	if n := strings.Count(string(c.ops), "RG"); n != 2 {
		t.Errorf("ink was written %d times, want twice:\n%s", n, c.ops)
	}
}
