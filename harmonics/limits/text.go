package limits

import (
	"math"
	"strconv"
	"strings"
)

// sig writes a number for people: at most so many significant digits, no exponent, no zeros at the end.
func sig(v float64, digits int) string {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		return "unknown"
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

// apart writes two numbers with as many digits as tell them apart: 5.004 against a limit of 5 must not read as 5.
func apart(a, b float64) (string, string) {
	for digits := 3; digits < 6; digits++ {
		if s, t := sig(a, digits), sig(b, digits); s != t || a == b {
			return s, t
		}
	}
	return sig(a, 6), sig(b, 6)
}

// length writes a length of time in the unit people would use.
func length(seconds float64) string {
	for _, u := range []struct {
		size float64
		name string
	}{{2 * 86400, " days"}, {2 * 3600, " h"}, {120, " min"}} {
		scale := map[string]float64{" days": 86400, " h": 3600, " min": 60}[u.name]
		if seconds >= u.size {
			return sig(seconds/scale, 3) + u.name
		}
	}
	return sig(seconds, 3) + " s"
}

// nearest returns the word that is most like the given one, "" when none is near: about a third of its letters may
// differ.
func nearest(word string, among []string) string {
	best, distance := "", len(word)/3+2
	for _, w := range among {
		if d := edits(strings.ToLower(word), strings.ToLower(w)); d < distance {
			best, distance = w, d
		}
	}
	return best
}

// edits counts the letters to insert, delete or change to turn a into b (Levenshtein's distance).
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			change := diagonal
			if a[i-1] != b[j-1] {
				change++
			}
			diagonal = row[j]
			row[j] = min(change, row[j]+1, row[j-1]+1)
		}
	}
	return row[len(b)]
}

// shorten takes the middle out of a message that quotes too much of a file.
func shorten(msg string) string {
	const most = 400
	r := []rune(msg)
	if len(r) <= most {
		return msg
	}
	return string(r[:most/2]) + " … " + string(r[len(r)-most/2:])
}
