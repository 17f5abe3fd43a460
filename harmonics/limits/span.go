package limits

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

// A Span is a range of numbers, such as a voltage class or a row of Isc/IL. The zero Span holds every number.
type Span struct {
	Low, High float64
	LowOut    bool   // Low itself is not in it
	HighOut   bool   // High itself is not in it
	HasLow    bool   // it has a lower end
	HasHigh   bool   // it has an upper end
	Text      string // as the rule file writes it, such as "20 to <50" or ">1 kV to 69 kV"
}

// Contains reports whether x is in the span.
func (s Span) Contains(x float64) bool {
	switch {
	case math.IsNaN(x):
		return !s.HasLow && !s.HasHigh
	case s.HasLow && (x < s.Low || s.LowOut && x == s.Low):
		return false
	case s.HasHigh && (x > s.High || s.HighOut && x == s.High):
		return false
	}
	return true
}

// overlaps reports whether some number is in both.
func (s Span) overlaps(t Span) bool {
	before := func(a, b Span) bool { // all of a is below all of b
		return a.HasHigh && b.HasLow && (a.High < b.Low || a.High == b.Low && (a.HighOut || b.LowOut))
	}
	return !before(s, t) && !before(t, s)
}

// spanHelp says how a span is written.
const spanHelp = `write it as "<20", "20 to <50", "100 to 1000", ">1000", ">=50" or "up to 1 kV"`

// parseSpan reads a span. Voltages may have the unit V or kV; the numbers of the span are then in V.
func parseSpan(text string) (Span, error) {
	s := Span{Text: text}
	low, high, both := strings.Cut(text, " to ")
	var err error
	switch {
	case strings.HasPrefix(text, "up to "):
		s.High, s.HighOut, err = spanEnd(strings.TrimPrefix(text, "up to "), '<')
		s.HasHigh = true
	case both:
		if s.Low, s.LowOut, err = spanEnd(low, '>'); err == nil {
			s.High, s.HighOut, err = spanEnd(high, '<')
		}
		s.HasLow, s.HasHigh = true, true
	case strings.HasPrefix(text, "<"):
		s.High, s.HighOut, err = spanEnd(text, '<')
		s.HasHigh = true
	case strings.HasPrefix(text, ">"):
		s.Low, s.LowOut, err = spanEnd(text, '>')
		s.HasLow = true
	default:
		err = fmt.Errorf("has no end")
	}
	if err == nil && both && s.Low >= s.High {
		err = fmt.Errorf("ends before it begins")
	}
	if err != nil {
		return Span{}, fmt.Errorf("%q is no range: %w; %s", text, err, spanHelp)
	}
	return s, nil
}

// spanEnd reads one end, such as "<50", "<=50", "50" or ">1 kV". out reports that the number itself is not in the span;
// mark is the sign that says so at this end.
func spanEnd(text string, mark byte) (value float64, out bool, err error) {
	t := strings.TrimSpace(text)
	if t != "" && t[0] == mark {
		t, out = t[1:], true
		if strings.HasPrefix(t, "=") {
			t, out = t[1:], false
		}
	}
	factor := 1.0
	for _, u := range []struct {
		unit   string
		factor float64
	}{{"kV", 1000}, {"V", 1}} {
		if rest, ok := strings.CutSuffix(t, u.unit); ok {
			t, factor = rest, u.factor
			break
		}
	}
	value, err = strconv.ParseFloat(strings.TrimSpace(t), 64)
	if err != nil || math.IsNaN(value) || math.IsInf(value, 0) || value < 0 {
		return 0, false, fmt.Errorf("%q is not a number", text)
	}
	return value * factor, out, nil
}

func (s Span) String() string { return s.Text }
