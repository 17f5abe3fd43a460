package xlsx

import (
	"math"
	"strings"

	"github.com/xuri/excelize/v2"
)

// A style is how a cell looks. What it says never rests on colour: verdicts and inputs carry words.
type style struct {
	format string // of numbers; "" for text
	bold   bool
	italic bool
	wrap   bool
	right  bool
	left   bool // numbers too
	indent bool // room to the number on the left
	fill   string
	ink    string
	size   float64
	line   bool // beneath
	frame  bool
}

// The font is one that every system has, or one of the same widths.
const (
	font     = "Arial"
	fontSize = 10
)

const (
	grey      = "595959"
	headFill  = "E4E7EB"
	inputFill = "FFF2CC"
	linkInk   = "1F4E9E"
)

var (
	plain      = style{}
	titleLook  = style{bold: true, size: 15}
	partLook   = style{bold: true, size: 12}
	headLook   = style{bold: true, wrap: true, fill: headFill}
	unitLook   = style{italic: true, ink: grey, fill: headFill, line: true}
	noteLook   = style{ink: grey}
	boldLook   = style{bold: true}
	wrapLook   = style{wrap: true}
	linkLook   = style{ink: linkInk}
	dateLook   = style{format: "yyyy-mm-dd hh:mm:ss"}
	momentLook = style{format: "yyyy-mm-dd hh:mm:ss.0"} // for intervals of some seconds
	inputLook  = style{fill: inputFill, frame: true}
)

// Formats of numbers that formulas compute: as many decimals as show three or four significant digits. Formats know no
// significant digits, but two thresholds.
const (
	computedFormat = "[>=99.95]0.0;[>=9.995]0.00;0.000"
	wholeFormat    = "0"
	limitFormat    = "General" // limits are round numbers, but for those computed
)

// digits is how many significant digits a number that is not computed is shown with.
const digits = 4

// formatFor is the format that shows a number with few significant digits. The cell keeps the number as it is.
func formatFor(v float64) string {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return wholeFormat
	}
	return decimals(digits - 1 - int(math.Floor(math.Log10(math.Abs(v)))))
}

// decimals is the format with n decimals.
func decimals(n int) string {
	n = max(n, 0)
	if n > 7 {
		return "0.00E+00"
	}
	if n == 0 {
		return wholeFormat
	}
	return "0." + strings.Repeat("0", n)
}

// decimalsOf is the format that shows a number with the decimals of a text, as the other documents show it.
func decimalsOf(text string) string {
	_, after, ok := strings.Cut(text, ".")
	if !ok {
		return wholeFormat
	}
	n := 0
	for n < len(after) && after[n] >= '0' && after[n] <= '9' {
		n++
	}
	return decimals(n)
}

// bare reports whether an empty cell of the style shows nothing.
func (s style) bare() bool { return s.fill == "" && !s.line && !s.frame }

// excel is the style in the library's terms.
func (s style) excel() *excelize.Style {
	out := &excelize.Style{Font: &excelize.Font{Bold: s.bold, Italic: s.italic, Color: s.ink, Size: s.size, Family: font}}
	if out.Font.Size == 0 {
		out.Font.Size = fontSize
	}
	if s.format != "" {
		out.CustomNumFmt = &s.format
	}
	if s.fill != "" {
		out.Fill = excelize.Fill{Type: "pattern", Pattern: 1, Color: []string{s.fill}}
	}
	out.Alignment = &excelize.Alignment{WrapText: s.wrap, Vertical: "top"}
	switch {
	case s.right:
		out.Alignment.Horizontal = "right"
	case s.indent:
		out.Alignment.Horizontal, out.Alignment.Indent = "left", 1
	case s.left:
		out.Alignment.Horizontal = "left"
	}
	if s.line {
		out.Border = []excelize.Border{{Type: "bottom", Color: "7F7F7F", Style: 1}}
	}
	if s.frame {
		for _, side := range []string{"left", "right", "top", "bottom"} {
			out.Border = append(out.Border, excelize.Border{Type: side, Color: "7F6000", Style: 1})
		}
	}
	return out
}
