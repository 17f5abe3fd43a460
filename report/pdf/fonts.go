package pdf

import (
	"bytes"
	"strings"
	"unicode"

	"codeberg.org/go-fonts/liberation/liberationsansbold"
	"codeberg.org/go-fonts/liberation/liberationsansregular"
	"github.com/jung-kurt/gofpdf"
	"golang.org/x/text/unicode/norm"

	"wavetally/report/chart"
)

// family is the one type family of the document; it is embedded as a subset.
const family = "sans"

// A face is one cut of the family at one size in points.
type face struct {
	bold bool
	size float64
}

func (f face) style() string {
	if f.bold {
		return "B"
	}
	return ""
}

// leading is the distance from one baseline to the next, in points.
func (f face) leading() float64 { return 1.32 * f.size }

// addFonts embeds the family. The font files are cloned: gofpdf's subsetter appends to slices of what it is given, and
// so may write into it.
func addFonts(doc *gofpdf.Fpdf) {
	doc.AddUTF8FontFromBytes(family, "", bytes.Clone(liberationsansregular.TTF))
	doc.AddUTF8FontFromBytes(family, "B", bytes.Clone(liberationsansbold.TTF))
}

// missingGlyph stands for every character that the fonts lack, so that a reader sees that something is missing.
const missingGlyph = '□'

// lookAlikes are characters that the fonts lack and that another one shows without loss.
var lookAlikes = strings.NewReplacer("\u2011", "-", "\u2212", "−", "\u00ad", "", "\t", " ", "\r\n", " ", "\n", " ", "\r", " ")

// clean brings a text into what the embedded fonts can show: composed characters, no controls, no format characters,
// and a visible replacement for what is missing.
func clean(s string) string {
	if plainASCII(s) {
		return s
	}
	s = norm.NFC.String(lookAlikes.Replace(strings.ToValidUTF8(s, string(missingGlyph))))
	return strings.Map(func(r rune) rune {
		switch {
		case unicode.IsControl(r) || unicode.Is(unicode.Cf, r) || unicode.Is(unicode.Variation_Selector, r):
			return -1
		case !hasGlyph(r):
			return missingGlyph
		}
		return r
	}, s)
}

func plainASCII(s string) bool {
	for i := 0; i < len(s); i++ {
		if s[i] < ' ' || s[i] > '~' {
			return false
		}
	}
	return true
}

// hasGlyph asks the regular cut; the bold one covers the same characters. gofpdf cannot encode beyond the basic plane.
func hasGlyph(r rune) bool { return r <= 0xffff && chart.HasGlyph(r) }
