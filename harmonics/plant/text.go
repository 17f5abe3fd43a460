package plant

import (
	"math"
	"strconv"
	"strings"
)

// num writes a number for people: three significant digits, no exponent, no zeros at the end.
func num(v float64) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "unknown"
	}
	if v == 0 {
		return "0"
	}
	// FormatFloat rounds first, so that 9.996 takes the decimals of 10.0 and not of 9.99.
	_, exp, _ := strings.Cut(strconv.FormatFloat(math.Abs(v), 'e', 2, 64), "e")
	e, _ := strconv.Atoi(exp)
	decimals := max(0, 2-e)
	s := strconv.FormatFloat(v, 'f', decimals, 64)
	if decimals > 0 {
		s = strings.TrimRight(strings.TrimRight(s, "0"), ".")
	}
	return s
}
