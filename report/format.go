package report

import (
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"
)

// Dash stands in tables for what was not measured; sentences say it.
const Dash = "–"

// Digits is how many significant digits people are shown at most: more than the best sensors justify is noise.
const Digits = 3

// Sig writes a number for people: at most three significant digits, no exponent, no zeros at the end. Whole digits are
// never rounded away. NaN is a dash.
func Sig(v float64) string { return sig(v, Digits) }

func sig(v float64, digits int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return Dash
	}
	if v == 0 {
		return "0"
	}
	// FormatFloat rounds first, so that 9.996 takes the decimals of 10.0 and not of 9.99.
	_, exp, _ := strings.Cut(strconv.FormatFloat(math.Abs(v), 'e', digits-1, 64), "e")
	e, _ := strconv.Atoi(exp)
	decimals := max(0, digits-1-e)
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if decimals > 0 {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}

// Apart writes two numbers with as many digits as tell them apart, at least as Sig does and at most six: a value of
// 5.004 against a limit of 5 must not read "5 exceeds 5".
func Apart(a, b float64) (string, string) {
	for digits := Digits; digits < 6; digits++ {
		if s, t := sig(a, digits), sig(b, digits); s != t || a == b {
			return s, t
		}
	}
	return sig(a, 6), sig(b, 6)
}

// A Scale is a unit with an SI prefix: a value times Factor is in Unit.
type Scale struct {
	Factor float64
	Unit   string
}

var prefixes = []struct {
	from   float64
	factor float64
	prefix string
}{{1e9, 1e-9, "G"}, {1e6, 1e-6, "M"}, {1e3, 1e-3, "k"}, {1, 1, ""}, {1e-3, 1e3, "m"}, {0, 1e6, "µ"}}

// ScaleFor chooses one SI prefix for values that stand together: that of the largest magnitude. Per cent, degrees and
// the like take none.
func ScaleFor(unit string, values ...float64) Scale {
	largest := 0.0
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			largest = math.Max(largest, math.Abs(v))
		}
	}
	if largest == 0 || !prefixed[unit] {
		return Scale{1, unit}
	}
	for _, p := range prefixes {
		if largest >= p.from {
			return Scale{p.factor, p.prefix + unit}
		}
	}
	return Scale{1, unit}
}

var prefixed = map[string]bool{"V": true, "A": true, "W": true, "var": true, "VA": true, "Hz": true, "H": true, "F": true, "Ω": true}

// Quantity writes one value with its unit: "12.5 kA", "4.8 %".
func Quantity(v float64, unit string) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "not measured"
	}
	if unit == "" {
		return Sig(v)
	}
	s := ScaleFor(unit, v)
	return Sig(v*s.Factor) + " " + s.Unit
}

// Duration writes a length of time in the two largest units that matter: "7 d", "25 min 12 s", "0.05 s".
func Duration(seconds float64) string {
	if math.IsNaN(seconds) {
		return "an unknown time"
	}
	if seconds < 60 {
		return Sig(seconds) + " s"
	}
	rest := math.Round(seconds)
	var parts []string
	for _, u := range []struct {
		s    float64
		name string
	}{{86400, "d"}, {3600, "h"}, {60, "min"}, {1, "s"}} {
		n := math.Floor(rest / u.s)
		rest -= n * u.s
		if n > 0 {
			parts = append(parts, fmt.Sprintf("%.0f %s", n, u.name))
		} else if len(parts) > 0 {
			break // "1 d 5 s" helps nobody
		}
		if len(parts) == 2 {
			break
		}
	}
	return strings.Join(parts, " ")
}

// Clock writes when something at a time of the recording happened: by the clock where its start is known, else from
// its start on.
func (r Recording) Clock(at float64) string {
	if r.Start == nil {
		return "at " + Duration(at)
	}
	t := r.Start.Add(time.Duration(at * float64(time.Second)))
	return t.Format("2006-01-02 15:04:05 ") + zoneName(t)
}

// zoneName is "UTC", or the offset to it.
func zoneName(t time.Time) string {
	if _, offset := t.Zone(); offset == 0 {
		return "UTC"
	}
	return t.Format("-07:00")
}

// ruleNames are the parts of rule set names that are not written as they are.
var ruleNames = map[string]string{"ieee": "IEEE", "iec": "IEC", "en": "EN"}

// RuleTitle is how a rule set's name is written for people: "ieee-519-2022" is IEEE 519-2022. Names of users' own rule
// sets stay as they are.
func RuleTitle(name string) string {
	org, rest, ok := strings.Cut(name, "-")
	if !ok || ruleNames[org] == "" {
		return name
	}
	number, class, _ := strings.Cut(rest, "-class")
	if class != "" {
		class = " class " + class
	}
	return ruleNames[org] + " " + number + class
}

// QuantityName names what a finding limits: "order 5", "THD", "TDD".
func QuantityName(quantity string, order int) string {
	if order > 0 {
		return fmt.Sprintf("order %d", order)
	}
	return strings.ToUpper(quantity)
}
