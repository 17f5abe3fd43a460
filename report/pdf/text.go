package pdf

import (
	"math"
	"strings"
)

// A measure gives the width in points of a text set in a face.
type measure func(f face, s string) float64

// wrap breaks a text into lines no wider than width points: at spaces, after slashes and hyphens of long words where
// it can, inside a word where it must. It cleans the text first and returns at least one line.
func wrap(width measure, f face, s string, room float64) []string {
	var lines []string
	line := ""
	for _, word := range strings.Fields(clean(s)) {
		joined := word
		if line != "" {
			joined = line + " " + word
		}
		if width(f, joined) <= room {
			line = joined
			continue
		}
		if line != "" && width(f, word) <= room {
			lines = append(lines, line)
			line = word
			continue
		}
		pieces := breakWord(width, f, line, word, room)
		lines = append(lines, pieces[:len(pieces)-1]...)
		line = pieces[len(pieces)-1]
	}
	return append(lines, line)
}

// breakWord sets a word that is too long for a line of its own, beginning on the line that stands already.
func breakWord(width measure, f face, line, word string, room float64) []string {
	var lines []string
	if line != "" {
		line += " "
	}
	for _, part := range breakable(word) {
		if width(f, line+part) <= room {
			line += part
			continue
		}
		if strings.TrimSpace(line) != "" && width(f, part) <= room {
			lines = append(lines, strings.TrimSpace(line))
			line = part
			continue
		}
		even := room
		if line == "" { // equal pieces, not a line and a leftover
			even = width(f, part)/math.Ceil(width(f, part)/room) + f.size
		}
		for _, r := range part {
			if line != "" && width(f, line+string(r)) > min(room, even) {
				lines = append(lines, strings.TrimSpace(line))
				line = ""
			}
			line += string(r)
		}
	}
	return append(lines, line)
}

// breakable splits a word after the characters at which a reader expects a break.
func breakable(word string) []string {
	var parts []string
	start := 0
	for i, r := range word {
		if strings.ContainsRune("/-_,;:.+=", r) && i+1 < len(word) {
			parts = append(parts, word[start:i+len(string(r))])
			start = i + len(string(r))
		}
	}
	return append(parts, word[start:])
}

// shorten cuts a text to a width, ending in an ellipsis where something was left out.
func shorten(width measure, f face, s string, room float64) string {
	s = clean(s)
	if width(f, s) <= room {
		return s
	}
	runes := []rune(s)
	for len(runes) > 0 && width(f, strings.TrimSpace(string(runes))+"…") > room {
		runes = runes[:len(runes)-1]
	}
	return strings.TrimSpace(string(runes)) + "…"
}
