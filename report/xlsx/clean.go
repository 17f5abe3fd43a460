package xlsx

import (
	"strings"
	"unicode/utf8"
)

// longest is how many UTF-16 units a cell may hold.
const longest = 32767

// clean makes a text that came from a file or a person fit for a cell: without control characters, which XML cannot
// carry, and not longer than a cell may be. A text that begins with "=" needs no more: it is written as text, which no
// program takes for a formula.
func clean(s string) string {
	s = strings.Map(func(r rune) rune {
		switch {
		case r == '\n' || r == '\t':
			return r
		case r < ' ' || r >= 0x7F && r < 0xA0 || r == 0xFFFE || r == 0xFFFF:
			return -1
		}
		return r
	}, strings.ToValidUTF8(s, "\uFFFD"))
	return cut(s, longest)
}

// cut shortens a text to n UTF-16 units, and shows that it did.
func cut(s string, n int) string {
	units, last := 0, 0
	for i, r := range s {
		w := 1
		if r >= 0x10000 {
			w = 2
		}
		if units+w > n {
			return s[:last] + "…"
		}
		if units += w; units < n {
			last = i + utf8.RuneLen(r)
		}
	}
	return s
}

// fold breaks a text into lines of at most width characters, at spaces.
func fold(s string, width int) []string {
	var out []string
	for _, paragraph := range strings.Split(s, "\n") {
		line, n := "", 0
		for _, word := range strings.Fields(paragraph) {
			w := utf8.RuneCountInString(word)
			if n > 0 && n+1+w > width {
				out, line, n = append(out, line), "", 0
			}
			if n > 0 {
				line, n = line+" ", n+1
			}
			line, n = line+word, n+w
		}
		out = append(out, line)
	}
	return out
}
