package chart

import (
	"image/color"
	"sync"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	stdfont "golang.org/x/image/font"
	"golang.org/x/image/font/opentype"
	"gonum.org/v1/plot/font"
	"gonum.org/v1/plot/text"
	"gonum.org/v1/plot/vg"
	"gonum.org/v1/plot/vg/draw"
)

// typeface names the two cuts in gonum's font cache.
const typeface = "Sans"

// Sizes of text, in points.
const (
	tickSize  = 6.6
	labelSize = 7.2
)

// fonts are parsed once; gonum's own collection would parse and link twelve cuts for these two.
var fonts = sync.OnceValue(func() *font.Cache {
	return font.NewCache(font.Collection{
		{Font: font.Font{Typeface: typeface}, Face: parsed(liberationsansregular.TTF)},
		{Font: font.Font{Typeface: typeface, Weight: stdfont.WeightBold}, Face: parsed(liberationsansbold.TTF)},
	})
})

// parsed panics on a broken font, which can only come from a broken build.
func parsed(ttf []byte) *opentype.Font {
	face, err := opentype.Parse(ttf)
	if err != nil {
		panic("chart: an embedded font is broken: " + err.Error())
	}
	return face
}

// HasGlyph reports whether the embedded fonts can show a character.
func HasGlyph(r rune) bool {
	index, err := fonts().Lookup(font.Font{Typeface: typeface}, tickSize).Face.GlyphIndex(nil, r)
	return err == nil && index != 0
}

// letters is a text style: regular or bold, aligned by fractions of the text's own width and height, such as
// draw.XRight.
func letters(size vg.Length, bold bool, ink color.Color, x draw.XAlignment, y draw.YAlignment) text.Style {
	f := font.Font{Typeface: typeface, Size: size}
	if bold {
		f.Weight = stdfont.WeightBold
	}
	return text.Style{Font: f, Color: ink, XAlign: x, YAlign: y, Handler: text.Plain{Fonts: fonts()}}
}

// widthOf is the width of a text set regular at a size.
func widthOf(s string, size vg.Length) vg.Length {
	face := fonts().Lookup(font.Font{Typeface: typeface}, size)
	return face.Width(s)
}
