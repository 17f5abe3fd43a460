package chart

import (
	"image/color"

	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"

	"wavetally/harmonics/site"
)

// Inks. The phase colours and the limit's are the 2002 Color Universal Design set (Okabe and Ito).
var (
	Ink       = gray(0x1d)
	Faint     = gray(0x66)
	Rule      = gray(0xc9)
	Hair      = gray(0xe2)
	Tint      = gray(0xf3)
	grid      = gray(0xe6)
	shade     = gray(0xdd)
	blue      = color.NRGBA{0x00, 0x72, 0xb2, 0xff}
	orange    = color.NRGBA{0xe6, 0x9f, 0x00, 0xff}
	green     = color.NRGBA{0x00, 0x9e, 0x73, 0xff}
	vermilion = color.NRGBA{0xd5, 0x5e, 0x00, 0xff}
)

func gray(v uint8) color.NRGBA { return color.NRGBA{v, v, v, 0xff} }

// Alarm is darker than the limit lines, so that words set in it can be read.
var Alarm = color.NRGBA{0xa8, 0x42, 0x00, 0xff}

// Limit is the ink of everything that is a limit, and of what exceeds one.
var Limit = vermilion

// A look tells one conductor from another, by colour and by dash.
type look struct {
	ink    color.NRGBA
	dashes []vg.Length
}

var phaseLooks = [4]look{
	0: {ink: gray(0x6e), dashes: []vg.Length{7, 1.8, 1.2, 1.8}}, // the neutral
	1: {ink: blue},
	2: {ink: orange, dashes: []vg.Length{4.5, 1.6}},
	3: {ink: green, dashes: []vg.Length{1.3, 1.3}},
}

// lookOf gives a role's look. A series without a role is drawn in plain ink.
func lookOf(r site.Role) look {
	if r == "" {
		return look{ink: gray(0x3c)}
	}
	return phaseLooks[r.Phase()]
}

// tint is an ink half way to white, to draw upon.
func tint(c color.NRGBA) color.NRGBA {
	half := func(v uint8) uint8 { return v/2 + 128 }
	return color.NRGBA{half(c.R), half(c.G), half(c.B), c.A}
}

func (l look) line(width vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: l.ink, Width: width, Dashes: l.dashes}
}

func solid(ink color.Color, width vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: ink, Width: width}
}

func dashed(ink color.Color, width vg.Length) draw.LineStyle {
	return draw.LineStyle{Color: ink, Width: width, Dashes: []vg.Length{3.2, 2}}
}
