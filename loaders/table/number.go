package table

import (
	"bytes"
	"cmp"
	"math"
	"strconv"

	"wavetally/harmonics/wave"
)

// pow10 holds the powers of ten that a float64 represents exactly.
var pow10 = [...]float64{1e0, 1e1, 1e2, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16,
	1e17, 1e18, 1e19, 1e20, 1e21, 1e22}

// Scan reads the decimal number that starts at b[i], with mark as its decimal mark, and multiplies it by ten to the
// power of shift before rounding, once, to the nearest float64. It returns the index of the first byte after the
// number. It reports false, and no more, where it finds no digit or more digits than its fast ways hold; [Cell] then
// decides.
//
// The fast way is exact: a mantissa up to 2^53 and a power of ten up to 10^22 are both float64 values, and their
// quotient or product is rounded once (Clinger, "How to read floating point numbers accurately", 1990).
func Scan(b []byte, i int, mark byte, shift int) (float64, int, bool) {
	s := b[i:]
	j := 0
	negative := false
	if len(s) > 0 && (s[0] == '-' || s[0] == '+') {
		negative = s[0] == '-'
		j = 1
	}
	var mantissa uint64
	digits := -j
	for ; j < len(s) && s[j]-'0' <= 9; j++ {
		mantissa = mantissa*10 + uint64(s[j]-'0')
	}
	digits += j
	if j < len(s) && s[j] == mark {
		j++
		start := j
		for ; j < len(s) && s[j]-'0' <= 9; j++ {
			mantissa = mantissa*10 + uint64(s[j]-'0')
		}
		digits += j - start
		shift -= j - start
	}
	if digits == 0 || digits > 19 { // 19 digits fit into a uint64, more may not
		return 0, i, false
	}
	if j < len(s) && s[j]|0x20 == 'e' {
		exponent, next, ok := scanExponent(s, j+1)
		if !ok {
			return 0, i, false
		}
		shift += exponent
		j = next
	}
	value, ok := float64(mantissa), true
	if mantissa <= 1<<53 && uint(-shift) < uint(len(pow10)) {
		value /= pow10[-shift]
	} else {
		value, ok = compose(mantissa, shift)
	}
	if negative {
		value = -value
	}
	return value, i + j, ok
}

// compose returns mantissa × 10^exponent, rounded once, for what does not go by one division.
func compose(mantissa uint64, exponent int) (float64, bool) {
	if mantissa <= 1<<53 && exponent > 0 && exponent < len(pow10) {
		return float64(mantissa) * pow10[exponent], true
	}
	if mantissa == 0 {
		return 0, true
	}
	var text [32]byte
	s := strconv.AppendUint(text[:0], mantissa, 10)
	s = append(s, 'e')
	s = strconv.AppendInt(s, int64(exponent), 10)
	value, err := strconv.ParseFloat(string(s), 64)
	return value, err == nil
}

// scanExponent reads the signed integer at b[i]. Exponents of more than four digits are no number that anybody measured.
func scanExponent(b []byte, i int) (exponent, next int, ok bool) {
	negative := false
	if i < len(b) && (b[i] == '-' || b[i] == '+') {
		negative = b[i] == '-'
		i++
	}
	start := i
	for i < len(b) && b[i]-'0' <= 9 && i-start < 5 {
		exponent = exponent*10 + int(b[i]-'0')
		i++
	}
	if negative {
		exponent = -exponent
	}
	return exponent, i, i > start && i-start < 5
}

// A Kind is what a cell of a table holds.
type Kind uint8

// Kinds of cells.
const (
	Empty   Kind = iota
	Missing      // a mark such as "---", "OVER" or "NaN"
	Number
	Text
)

// missing holds the marks, in lower case and without blanks around, that instruments write where they have no value.
var missing = map[string]bool{"-": true, "--": true, "---": true, "----": true, "-----": true, "nan": true, "-nan": true,
	"+nan": true, "nan(ind)": true, "-nan(ind)": true, "1.#qnan": true, "-1.#ind": true, "1.#inf": true, "-1.#inf": true,
	"n/a": true, "na": true, "n.a.": true, "null": true, "nil": true, "none": true, "inf": true, "+inf": true,
	"-inf": true, "infinity": true, "+infinity": true, "-infinity": true, "∞": true, "-∞": true, "+∞": true, "over": true,
	"under": true, "+over": true, "-over": true, "ovr": true, "ovl": true, "ovld": true, "ovrng": true, "ol": true, "+ol": true,
	"-ol": true, "o.l": true, "o.l.": true, "overrange": true, "over range": true, "overload": true, "overflow": true,
	"underflow": true, "clip": true, "clipped": true, "invalid": true, "bad": true, "missing": true, "no data": true,
	"nodata": true, "error": true, "err": true, "fault": true, "?": true, "??": true, "???": true,
	"*": true, "**": true, "***": true, "****": true, "*****": true, ".": true, "..": true, "...": true,
	"…": true, "–": true, "—": true}

// Cell reads one cell, quotes and blanks around it included, the slow and lenient way: thousands separators, a
// Unicode minus, a unit behind the number, marks for missing values. A mark of 0 says that the decimal mark is not
// known: a single comma or point then is one. The value is NaN unless the kind is Number.
func Cell(cell []byte, mark byte, shift int) (float64, Kind) {
	cell = Trim(cell)
	if len(cell) == 0 {
		return math.NaN(), Empty
	}
	if v, next, ok := Scan(cell, 0, cmp.Or(mark, '.'), shift); ok && next == len(cell) && !math.IsInf(v, 0) {
		return v, Number
	}
	if missing[string(bytes.ToLower(cell))] || spreadsheetError(cell) {
		return math.NaN(), Missing
	}
	var room [64]byte
	plain, rest, ok := normalise(room[:0], cell, mark)
	if !ok {
		return math.NaN(), Text
	}
	factor := 1.0
	if rest = Trim(rest); len(rest) > 0 {
		if len(rest) > 8 {
			return math.NaN(), Text
		}
		if _, f, known := wave.BaseUnit(string(rest)); known {
			factor = f
		} else if string(rest) != "%" {
			return math.NaN(), Text
		}
	}
	if shift != 0 && bytes.IndexByte(plain, 'e') < 0 {
		plain = strconv.AppendInt(append(plain, 'e'), int64(shift), 10)
		shift = 0
	}
	value, err := strconv.ParseFloat(string(plain), 64)
	if err != nil || math.IsInf(value, 0) {
		return math.NaN(), Missing // digits alone can fail only by being beyond a float64's range
	}
	return value * math.Pow10(shift) * factor, Number
}

// spreadsheetError recognises #DIV/0!, #VALUE!, #NAME?, #N/A and the like, and ##### for a cell that was too narrow.
func spreadsheetError(cell []byte) bool {
	if cell[0] != '#' || len(cell) < 3 {
		return false
	}
	last := cell[len(cell)-1]
	return last == '!' || last == '?' || last == '#' || bytes.EqualFold(cell, []byte("#N/A")) || bytes.EqualFold(cell, []byte("#NV"))
}

// Trim takes blanks, no-break spaces, NUL bytes and one pair of quotes off both ends.
func Trim(cell []byte) []byte {
	for range 2 {
		cell = trimBlanks(cell)
		n := len(cell)
		if n < 2 || cell[0] != cell[n-1] || cell[0] != '"' && cell[0] != '\'' {
			break
		}
		cell = cell[1 : n-1]
	}
	return cell
}

func trimBlanks(b []byte) []byte {
	for len(b) > 0 {
		switch c := b[0]; {
		case c <= ' ', c == 0xA0:
			b = b[1:]
		case len(b) >= 2 && c == 0xC2 && b[1] == 0xA0:
			b = b[2:]
		default:
			goto tail
		}
	}
tail:
	for len(b) > 0 {
		switch c := b[len(b)-1]; {
		case c == 0xA0 && len(b) >= 2 && b[len(b)-2] == 0xC2:
			b = b[:len(b)-2]
		case c <= ' ', c == 0xA0 && (len(b) < 2 || b[len(b)-2] < 0x80):
			b = b[:len(b)-1]
		default:
			return b
		}
	}
	return b
}

// normalise appends to dst the number that cell starts with, as strconv reads it, and returns what follows it.
func normalise(dst, cell []byte, mark byte) (plain, rest []byte, ok bool) {
	if bytes.HasPrefix(cell, []byte("−")) { // U+2212
		dst = append(dst, '-')
		cell = cell[len("−"):]
	} else if cell[0] == '-' || cell[0] == '+' {
		dst = append(dst, cell[0])
		cell = cell[1:]
	}
	end := bodyEnd(cell)
	body := cell[:end]
	if mark == 0 {
		mark = guessMark(body)
	}
	digits := 0
	whole, fraction, marked := bytes.Cut(body, []byte{mark})
	groups, ok := ungroup(whole, mark)
	if !ok {
		return nil, nil, false
	}
	for _, g := range groups {
		dst = append(dst, g...)
		digits += len(g)
	}
	if marked {
		for _, c := range fraction {
			if c-'0' > 9 {
				return nil, nil, false
			}
		}
		dst = append(append(dst, '.'), fraction...)
		digits += len(fraction)
	}
	if digits == 0 {
		return nil, nil, false
	}
	rest = cell[end:]
	if len(rest) > 1 && rest[0]|0x20 == 'e' {
		if e, next, ok := scanExponent(rest, 1); ok {
			dst = strconv.AppendInt(append(dst, 'e'), int64(e), 10)
			rest = rest[next:]
		}
	}
	return dst, rest, true
}

// bodyEnd is the length of the run of digits, marks and thousands separators that b starts with. A blank belongs to
// it only between digits.
func bodyEnd(b []byte) int {
	for i := 0; i < len(b); {
		width := separatorWidth(b[i:])
		switch {
		case b[i]-'0' <= 9:
			i++
		case width > 0 && (b[i] == '.' || b[i] == ','):
			i++
		case width > 0 && i+width < len(b) && b[i+width]-'0' <= 9:
			i += width
		default:
			return i
		}
	}
	return len(b)
}

// separatorWidth is the number of bytes of the decimal mark or thousands separator that b starts with, else 0.
func separatorWidth(b []byte) int {
	switch {
	case b[0] == '.' || b[0] == ',' || b[0] == '\'' || b[0] == ' ' || b[0] == 0xA0:
		return 1
	case bytes.HasPrefix(b, []byte("\u00a0")):
		return 2
	case bytes.HasPrefix(b, []byte("\u202f")), bytes.HasPrefix(b, []byte("’")):
		return 3
	}
	return 0
}

// guessMark finds the decimal mark of one number: the last of point and comma, unless it occurs twice.
func guessMark(body []byte) byte {
	point, comma := bytes.LastIndexByte(body, '.'), bytes.LastIndexByte(body, ',')
	switch {
	case comma > point && bytes.Count(body, []byte{','}) == 1:
		return ','
	case point < comma && point >= 0:
		return '.' // 1.234,567,890 is nonsense that ungroup refuses
	case comma >= 0 && point < 0:
		return '.' // 1,234,567
	case bytes.Count(body, []byte{'.'}) > 1:
		return ','
	}
	return '.'
}

// ungroup splits the digits before the decimal mark at their thousands separators. Groups must be of three digits,
// all separators the same, and none the decimal mark.
func ungroup(whole []byte, mark byte) ([][]byte, bool) {
	var groups [][]byte
	var separator string
	for {
		n := 0
		for n < len(whole) && whole[n]-'0' <= 9 {
			n++
		}
		groups = append(groups, whole[:n])
		if len(groups) > 1 && (n != 3 || len(groups[0]) > 3 || len(groups[0]) > 0 && groups[0][0] == '0') {
			return nil, false // 0,123 is no number of thousands
		}
		if n == len(whole) {
			return groups, len(groups) == 1 || len(groups[0]) > 0
		}
		width := separatorWidth(whole[n:])
		if width == 0 || whole[n] == mark {
			return nil, false
		}
		if s := string(whole[n : n+width]); separator != "" && s != separator {
			return nil, false
		} else {
			separator = s
		}
		whole = whole[n+width:]
	}
}
