package pdf

import (
	"strings"
	"testing"
	"unicode/utf8"

	"github.com/jung-kurt/gofpdf"
)

// plainMeasure takes every character as half as wide as it is high.
func plainMeasure(f face, s string) float64 { return float64(utf8.RuneCountInString(s)) * f.size / 2 }

func TestWrap(t *testing.T) {
	f := face{size: 2} // a character is 1 wide
	for _, c := range []struct {
		text string
		room float64
		want string
	}{
		{"", 10, ""},
		{"one two three", 7, "one two|three"},
		{"one  two\nthree\t", 100, "one two three"},
		{"a/very/long/path", 7, "a/very/|long/|path"},
		{"abcdefghij", 4, "abcd|efgh|ij"},
		{"x abcdefghij", 4, "x ab|cdef|ghij"},
		{"日本", 1, "□|□"},
	} {
		if got := strings.Join(wrap(plainMeasure, f, c.text, c.room), "|"); got != c.want {
			t.Errorf("%q in %g: %q, want %q", c.text, c.room, got, c.want)
		}
	}
}

// A hash that needs two lines gets two of about equal length, not a line and a leftover.
func TestWrapHalvesAHash(t *testing.T) {
	lines := wrap(plainMeasure, face{size: 2}, strings.Repeat("0123456789abcdef", 4), 60)
	if len(lines) != 2 || len(lines[1]) < 28 {
		t.Errorf("%q", lines)
	}
}

// No line is wider than its room, and no character is lost, whatever the text.
func FuzzWrap(f *testing.F) {
	f.Add("Kestrel Lane bakery, board MB-1", 9.0)
	f.Add("a-b/c_d.e,f;g:h", 3.0)
	f.Add("Größe 漢字 \U0001F600 \x00\u200b", 5.0)
	f.Add("\xff\xfe broken", 4.0)
	f.Fuzz(func(t *testing.T, s string, room float64) {
		if !(room >= 1 && room < 200) || len(s) > 2000 {
			t.Skip()
		}
		lines := wrap(plainMeasure, face{size: 2}, s, room)
		if len(lines) == 0 {
			t.Fatal("no line at all")
		}
		for _, l := range lines {
			if plainMeasure(face{size: 2}, l) > room+1e-9 {
				t.Errorf("%q is wider than %g", l, room)
			}
		}
		squeeze := func(s string) string { return strings.Join(strings.Fields(s), "") }
		if got, want := squeeze(strings.Join(lines, " ")), squeeze(clean(s)); got != want {
			t.Errorf("%q became %q", want, got)
		}
	})
}

func TestClean(t *testing.T) {
	for in, want := range map[string]string{
		"plain":          "plain",
		"Zo\u0065\u0308": "Zoë", // composed
		"µΩ° ≤ ≥ ± √ − … ½ ² № Ж ё": "µΩ° ≤ ≥ ± √ − … ½ ² № Ж ё",
		"漢字":                   "□□",
		"\U0001F600":           "□",    // beyond what the font embedding can encode
		"a\u200bb\ufeffc\x07d": "abcd", // format characters and controls show nothing
		"line\nbreak\ttab":     "line break tab",
		"non\u2011breaking":    "non-breaking",
		"\xffbad":              "□bad",
	} {
		if got := clean(in); got != want {
			t.Errorf("clean(%q) = %q, want %q", in, got, want)
		}
	}
}

func TestShorten(t *testing.T) {
	f := face{size: 2}
	for in, want := range map[string]string{"short": "short", "a long name": "a long…", "abcdefgh": "abcdef…"} {
		if got := shorten(plainMeasure, f, in, 7); got != want {
			t.Errorf("shorten(%q) = %q, want %q", in, got, want)
		}
	}
}

// The widths that lines are broken by are those of the embedded fonts. Advance widths of Liberation Sans, in
// thousandths of the size: A 667, W 944, i 222, zero 556; bold A 722 (the same as those of Helvetica, whose metrics
// Adobe published and Liberation matches).
func TestMeasureIsTheFonts(t *testing.T) {
	doc := gofpdf.NewCustom(&gofpdf.InitType{UnitStr: "pt", Size: papers["a4"]})
	addFonts(doc)
	p := &pen{doc: doc}
	for _, c := range []struct {
		f    face
		text string
		want float64
	}{{face{false, 1000}, "A", 667}, {face{false, 1000}, "W", 944}, {face{false, 1000}, "i", 222}, {face{false, 1000}, "0", 556}, {face{true, 1000}, "A", 722}} {
		if got := p.measure(c.f, c.text); got < c.want-1 || got > c.want+1 {
			t.Errorf("%q in %v is %g wide, want %g", c.text, c.f, got, c.want)
		}
	}
}
