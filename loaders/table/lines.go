package table

import "bytes"

// A line is one physical line of text.
type line struct {
	text   []byte // without its end
	offset int    // of its first byte
	number int    // from 1
}

// splitLines splits at LF, CR LF and lone CR, at most limit lines. When the text goes on beyond what is given, the last
// line may be cut and is left out.
func splitLines(text []byte, limit int, whole bool) []line {
	var lines []line
	at, number := 0, 1
	for at < len(text) && len(lines) < limit {
		n := bytes.IndexAny(text[at:], "\r\n")
		if n < 0 {
			if whole {
				lines = append(lines, line{text[at:], at, number})
			}
			break
		}
		lines = append(lines, line{text[at : at+n], at, number})
		at += n + 1
		if text[at-1] == '\r' && at < len(text) && text[at] == '\n' {
			at++
		}
		number++
	}
	return lines
}

// cells splits a line at the delimiter, but not inside quotes.
func cells(dst [][]byte, text []byte, delimiter byte) [][]byte {
	dst = dst[:0]
	if delimiter == ' ' {
		return blankCells(dst, text)
	}
	if delimiter == 0 {
		return append(dst, text)
	}
	for {
		end := FieldEnd(text, 0, delimiter)
		dst = append(dst, text[:end])
		if end == len(text) {
			return dst
		}
		text = text[end+1:]
	}
}

// blankCells splits at runs of blanks.
func blankCells(dst [][]byte, text []byte) [][]byte {
	for {
		text = bytes.TrimLeft(text, " ")
		if len(text) == 0 {
			return dst
		}
		end := FieldEnd(text, 0, ' ')
		dst = append(dst, text[:end])
		text = text[end:]
	}
}

// FieldEnd returns where the cell that starts at b[i] ends: at the delimiter, the end of the line, or the end of b. A
// cell that opens with a quotation mark holds all up to the closing one; where none follows on the line, the mark is
// an ordinary character.
func FieldEnd(b []byte, i int, delimiter byte) int {
	start := i
	for i < len(b) && b[i] == ' ' && delimiter != ' ' {
		i++
	}
	if i < len(b) && b[i] == '"' {
		for j := i + 1; j < len(b) && b[j] != '\n' && b[j] != '\r'; j++ {
			if b[j] != '"' {
				continue
			}
			if j+1 < len(b) && b[j+1] == '"' {
				j++
				continue
			}
			return plainEnd(b, j+1, delimiter)
		}
	}
	return plainEnd(b, start, delimiter)
}

func plainEnd(b []byte, i int, delimiter byte) int {
	for i < len(b) && b[i] != '\n' && b[i] != '\r' && (b[i] != delimiter || delimiter == 0) {
		i++
	}
	return i
}
