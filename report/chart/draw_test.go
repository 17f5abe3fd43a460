package chart

import (
	"image/color"
	"math"
	"testing"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
	"gonum.org/v1/plot/vg/recorder"

	"wavetally/harmonics/limits"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// A drawing is what a chart put on paper.
type drawing struct {
	fills   map[color.Color][]vg.Path
	strokes map[color.Color][]vg.Path
	dashes  int // strokes with a dash
	texts   []recorder.FillString
}

func (d drawing) says(s string) bool {
	for _, t := range d.texts {
		if t.String == s {
			return true
		}
	}
	return false
}

const width, height = 400, 200

func record(t *testing.T, paint func(c draw.Canvas)) drawing {
	t.Helper()
	var rec recorder.Canvas
	paint(draw.Canvas{Canvas: &rec, Rectangle: vg.Rectangle{Max: vg.Point{X: width, Y: height}}})
	d := drawing{fills: map[color.Color][]vg.Path{}, strokes: map[color.Color][]vg.Path{}}
	var ink color.Color
	dashed := false
	for _, a := range rec.Actions {
		switch a := a.(type) {
		case *recorder.SetColor:
			ink = a.Color
		case *recorder.SetLineDash:
			dashed = len(a.Dashes) > 0
		case *recorder.Fill:
			d.fills[ink] = append(d.fills[ink], a.Path)
			checkPath(t, a.Path)
		case *recorder.Stroke:
			d.strokes[ink] = append(d.strokes[ink], a.Path)
			checkPath(t, a.Path)
			if dashed {
				d.dashes++
			}
		case *recorder.FillString:
			d.texts = append(d.texts, *a)
		case *recorder.DrawImage:
			t.Error("a bitmap was drawn")
		}
	}
	return d
}

// checkPath holds every point to the paper; arcs by their centres.
func checkPath(t *testing.T, p vg.Path) {
	t.Helper()
	for _, c := range p {
		x, y := float64(c.Pos.X), float64(c.Pos.Y)
		if c.Type != vg.CloseComp && !(x >= -1 && x <= width+1 && y >= -1 && y <= height+1) {
			t.Fatalf("a path reaches (%.1f, %.1f), outside %d × %d", x, y, width, height)
		}
	}
}

func spectrum(values, whiskers, limit []float64) report.Chart {
	x := []float64{2, 3, 4, 5}
	return report.Chart{Kind: report.SpectrumChart, X: report.Axis{Label: "harmonic order", Low: 1, High: 6}, Y: report.Axis{Unit: "%", High: 10},
		Series: []report.Series{{Name: "V1", Role: "V1", Use: report.Measured, X: x, Y: values}, {Role: "V1", Use: report.Highest, X: x, Y: whiskers}},
		Limits: []report.LimitLine{{Name: "limit of some rules", X: x, Y: limit}}}
}

func TestSpectrumDrawsWhatIsThere(t *testing.T) {
	nan := math.NaN()
	d := record(t, func(c draw.Canvas) {
		Draw(c, spectrum([]float64{1, 6, nan, 2}, []float64{2, 7, nan, 2}, []float64{5, 5, 5, nan}), Place{})
	})
	if n := len(d.fills[lookOf("V1").ink]); n != 3 {
		t.Errorf("%d bars, want 3: NaN has none", n)
	}
	if n := len(d.fills[color.Color(Limit)]); n != 1 {
		t.Errorf("%d triangles, want 1: only order 3 is over", n)
	}
	if n := len(d.strokes[color.Color(Limit)]); n != 3+1 { // and the key
		t.Errorf("%d limit marks, want 4", n)
	}
	if !d.says("V1") || !d.says("3") || !d.says("limit of some rules") {
		t.Errorf("texts %v", d.texts)
	}
}

// A value at its limit is within it; the next number is over.
func TestSpectrumAtTheLimit(t *testing.T) {
	for v, want := range map[float64]int{5: 0, math.Nextafter(5, 6): 1} {
		d := record(t, func(c draw.Canvas) { Draw(c, spectrum([]float64{1, v, 1, 1}, nil, []float64{5, 5, 5, 5}), Place{}) })
		if n := len(d.fills[color.Color(Limit)]); n != want {
			t.Errorf("%g against 5: %d triangles, want %d", v, n, want)
		}
	}
}

// Heights of bars are read off against the axis: a bar of 4 is twice as high as one of 2, both from 0.
func TestBarsStartAtZero(t *testing.T) {
	d := record(t, func(c draw.Canvas) { Draw(c, spectrum([]float64{2, 4, math.NaN(), math.NaN()}, nil, nil), Place{}) })
	bars := d.fills[lookOf("V1").ink]
	tall := func(p vg.Path) float64 { return float64(p[2].Pos.Y - p[0].Pos.Y) }
	if len(bars) != 2 || math.Abs(tall(bars[1])/tall(bars[0])-2) > 1e-9 {
		t.Errorf("bars %v", bars)
	}
}

// A line is broken where nothing was measured, never bridged.
func TestLinesBreakAtGaps(t *testing.T) {
	nan := math.NaN()
	ch := report.Chart{Kind: report.TrendChart, X: report.Axis{High: 9}, Y: report.Axis{Unit: "%", High: 5},
		Series: []report.Series{{Name: "V1", Role: "V1", Use: report.Measured, Unit: "%", X: []float64{0, 1, 2, 3, 4, 5, 6, 7, 8, 9}, Y: []float64{1, 2, 1, nan, 3, nan, nan, 2, 2, nan}}}}
	d := record(t, func(c draw.Canvas) { Draw(c, ch, Place{}) })
	if n := len(d.strokes[lookOf("V1").ink]); n != 3+1 { // and the sample beside the name
		t.Errorf("%d pieces of line, want 4", n)
	}
}

// Whatever a survey holds, its charts stay on the paper; with less room than axes need, nothing is drawn.
func TestChartsStayOnPaper(t *testing.T) {
	for _, s := range []*report.Survey{fixture.Week(), fixture.Short(), fixture.Tiny()} {
		for _, ch := range report.Charts(s) {
			d := record(t, func(c draw.Canvas) { Draw(c, ch, Place{}) })
			if len(d.texts) == 0 {
				t.Errorf("%s says nothing", ch.Key)
			}
			for _, text := range d.texts {
				if x := float64(text.Point.X); x < 0 || x > width {
					t.Errorf("%s: %q begins at %.1f", ch.Key, text.String, x)
				}
			}
			record(t, func(c draw.Canvas) {
				c.Max = vg.Point{X: 50, Y: 30}
				Draw(c, ch, Place{})
			})
		}
	}
}

// Charts of nothing: no series, no values, ends that are not numbers.
func TestEmptyChartsDraw(t *testing.T) {
	nan := math.NaN()
	for _, kind := range []string{report.SpectrumChart, report.WaveformChart, report.TrendChart, report.HeatMapChart, report.SpectrogramChart, report.PhasorChart} {
		for _, ch := range []report.Chart{
			{Kind: kind},
			{Kind: kind, X: report.Axis{Low: nan, High: nan}, Y: report.Axis{Low: nan, High: math.Inf(1)},
				Series: []report.Series{{Name: "V1", Role: "V1", Use: report.Measured, X: []float64{nan}, Y: []float64{nan}}},
				Grid:   &report.Grid{Xs: []float64{0}, Ys: []float64{2}, Value: [][]float64{{nan}}, High: nan, Mark: nan}},
		} {
			record(t, func(c draw.Canvas) { Draw(c, ch, Place{}) })
		}
	}
}

// Each verdict has a shape of its own, not only a colour.
func TestSymbolsDiffer(t *testing.T) {
	type shape struct{ fills, strokes, points int }
	seen := map[shape]string{}
	for _, result := range []string{limits.Within, limits.Exceeds, limits.Undecided, limits.NotAssessed} {
		var s shape
		d := record(t, func(c draw.Canvas) {
			c.Max = vg.Point{X: 10, Y: 10}
			Symbol(c, result)
		})
		for _, paths := range d.fills {
			s.fills += len(paths)
			s.points += len(paths[0])
		}
		for _, paths := range d.strokes {
			s.strokes += len(paths)
			s.points += len(paths[0])
		}
		if other, taken := seen[s]; taken {
			t.Errorf("%s looks as %s does", result, other)
		}
		seen[s] = result
	}
}

func TestLadderNamesEveryRung(t *testing.T) {
	rungs := []Rung{{"THD on V2", 63.5, limits.Within}, {"order 11 on I2", 117, limits.Exceeds}}
	d := record(t, func(c draw.Canvas) { Ladder(c, rungs) })
	for _, want := range []string{"THD on V2", "63.5 %", "order 11 on I2", "117 %", "limit"} {
		if !d.says(want) {
			t.Errorf("%q is missing", want)
		}
	}
}

// High voltages are labelled in kV, with short numbers.
func TestAxesAreLabelledInMultiples(t *testing.T) {
	ch := report.Chart{Kind: report.WaveformChart, X: report.Axis{Unit: "ms", High: 20}, Y: report.Axis{Label: "voltage", Unit: "V", Low: -200e3, High: 200e3},
		Series: []report.Series{{Name: "V1", Role: "V1", Use: report.Measured, Unit: "V", X: []float64{0, 20}, Y: []float64{-180e3, 180e3}}}}
	d := record(t, func(c draw.Canvas) { Draw(c, ch, Place{}) })
	if !d.says("voltage, kV") || !d.says("200") || d.says("200000") {
		t.Errorf("texts %v", d.texts)
	}
}

// A slow sampling rate reaches few orders: the axis ends soon after them.
func TestSpectrumEndsWhereMeasurementDoes(t *testing.T) {
	ch := spectrum([]float64{1, 2, 1, 1}, nil, nil)
	ch.X.High = 51
	d := record(t, func(c draw.Canvas) { Draw(c, ch, Place{}) })
	if !d.says("15") || d.says("17") {
		t.Errorf("texts %v", d.texts)
	}
}
