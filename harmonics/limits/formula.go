package limits

import (
	"fmt"
	"regexp"
	"strconv"
)

// A formula is a number that depends on the order, as standards print it.
type formula struct {
	text string
	at   func(h int) float64
}

var (
	hyperbola = regexp.MustCompile(`^([0-9.]+) ?\(([0-9.]+)/h\)(?: ([+-]) ([0-9.]+))?$`)
	straight  = regexp.MustCompile(`^([0-9.]+) ([+-]) ([0-9.]+)(?:/([0-9.]+))? ?\(h - ([0-9.]+)\)$`)
)

const formulaHelp = `write it as "2.27 (17/h) - 0.27", "1.2 (17/h)" or "1.3 + 0.7/45 (h - 5)"`

// parseFormula reads the two forms that standards use for limits by order.
func parseFormula(text string) (formula, error) {
	f := formula{text: text}
	if m := hyperbola.FindStringSubmatch(text); m != nil {
		a, b, c, ok := number(m[1]), number(m[2]), number(m[4]), numeric(m[1], m[2], m[4])
		if m[3] == "-" {
			c = -c
		}
		f.at = func(h int) float64 { return a*(b/float64(h)) + c }
		if ok {
			return f, nil
		}
	}
	if m := straight.FindStringSubmatch(text); m != nil {
		a, b, d, c, ok := number(m[1]), number(m[3]), 1.0, number(m[5]), numeric(m[1], m[3], m[4], m[5])
		if m[2] == "-" {
			b = -b
		}
		if m[4] != "" {
			d = number(m[4])
		}
		f.at = func(h int) float64 { return a + b/d*(float64(h)-c) }
		if ok {
			return f, nil
		}
	}
	return formula{}, fmt.Errorf("%q is no formula that is known here; %s", text, formulaHelp)
}

// number reads what the patterns let through; an absent part is 0.
func number(text string) float64 {
	v, _ := strconv.ParseFloat(text, 64)
	return v
}

// numeric reports whether all texts that are there are numbers: the patterns also let "1.2.3" through.
func numeric(texts ...string) bool {
	for _, t := range texts {
		if t == "" {
			continue
		}
		if _, err := strconv.ParseFloat(t, 64); err != nil {
			return false
		}
	}
	return true
}
