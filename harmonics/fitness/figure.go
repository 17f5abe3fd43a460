package fitness

import (
	"math"
	"strconv"
)

// figure writes a number with three significant digits, the way it is read aloud.
func figure(v float64) string {
	switch {
	case math.IsNaN(v):
		return "unknown"
	case v == 0:
		return "0"
	case math.Abs(v) >= 1000:
		return strconv.FormatFloat(v, 'f', 0, 64)
	}
	digits := 2 - int(math.Floor(math.Log10(math.Abs(v))))
	s := strconv.FormatFloat(v, 'f', min(max(digits, 0), 9), 64)
	if digits > 0 { // no zeros that say nothing
		for s[len(s)-1] == '0' {
			s = s[:len(s)-1]
		}
		if s[len(s)-1] == '.' {
			s = s[:len(s)-1]
		}
	}
	return s
}
