package table

import (
	"bytes"
	"errors"
	"fmt"
	"strconv"
	"strings"

	"wavetally/harmonics/site"
)

// A FormatError says that a text is no table of numbers, or not one that could be told apart.
type FormatError struct {
	Line int // 0 when it is about the whole
	Msg  string
}

func (e *FormatError) Error() string { return e.Msg }

// ErrNoTable says that no rows of numbers were found: the text is something else.
var ErrNoTable = errors.New("no rows of numbers were found in it")

// MaxColumns is the largest number of columns that is read.
const MaxColumns = 8192

const (
	headLines   = 4000 // that the layout is guessed from
	sampleLines = 120  // of them, that the delimiter is guessed from
)

// Guess finds the layout of the table that head, decoded text, starts with. When whole is false the text goes on
// beyond head.
func Guess(head []byte, whole bool, e Encoding, declared site.File) (Layout, error) {
	lines := splitLines(head, headLines, whole)
	if declared.HeaderLines != nil && *declared.HeaderLines >= len(lines) {
		return Layout{}, &FormatError{Msg: fmt.Sprintf("header_lines = %d in the site sheet leaves no row of numbers; state the number of lines above the first row", *declared.HeaderLines)}
	}
	below := lines
	if declared.HeaderLines != nil {
		below = lines[max(0, *declared.HeaderLines):]
	}
	dialect, err := guessDialect(below, declared)
	if err != nil {
		return Layout{}, err
	}
	g := guesser{dialect: dialect, encoding: e, declared: declared, lines: lines}
	return g.layout()
}

// A dialect is how a line splits into numbers.
type dialect struct {
	delimiter byte
	mark      byte // 0: no number has a decimal mark
	width     int  // cells in a row
}

func declaredDelimiter(text string) (byte, bool, error) {
	switch strings.ToLower(text) {
	case "":
		return 0, false, nil
	case "tab", "\t", `\t`:
		return '\t', true, nil
	case "space", "blank":
		return ' ', true, nil
	case "comma":
		return ',', true, nil
	case "semicolon":
		return ';', true, nil
	case "none":
		return 0, true, nil
	}
	if len(text) != 1 || text[0] >= 0x80 || text[0]-'0' <= 9 {
		return 0, false, &FormatError{Msg: fmt.Sprintf("delimiter %q in the site sheet is not one character; use one such as \";\", or \"tab\"", text)}
	}
	return text[0], true, nil
}

func declaredMark(text string) (byte, bool, error) {
	switch text {
	case "":
		return 0, false, nil
	case ".", ",":
		return text[0], true, nil
	}
	return 0, false, &FormatError{Msg: fmt.Sprintf("decimal %q in the site sheet is not a decimal mark; use \".\" or \",\"", text)}
}

// guessDialect tries each delimiter with each decimal mark and takes the pair by which most cells are numbers.
func guessDialect(lines []line, declared site.File) (dialect, error) {
	delimiters, marks := []byte{'\t', ';', ',', '|', ' ', 0}, []byte{'.', ','}
	delimiter, delimiterSaid, err := declaredDelimiter(declared.Delimiter)
	if err != nil {
		return dialect{}, err
	}
	mark, markSaid, err := declaredMark(declared.Decimal)
	if err != nil {
		return dialect{}, err
	}
	if delimiterSaid {
		delimiters = []byte{delimiter}
	}
	if markSaid {
		marks = []byte{mark}
	}
	sample := thin(lines, sampleLines)
	var best trial
	for _, d := range delimiters {
		for _, m := range marks {
			if m != d {
				best = better(best, tryDialect(sample, dialect{delimiter: d, mark: m}))
			}
		}
	}
	if best.width == 0 {
		return dialect{}, ErrNoTable
	}
	if best.width > MaxColumns {
		return dialect{}, &FormatError{Msg: fmt.Sprintf("rows have %d columns, more than the %d that are read; export fewer", best.width, MaxColumns)}
	}
	if markSaid {
		return best.dialect, nil
	}
	return settleCommas(best, sample, delimiterSaid)
}

// settleCommas decides what the commas are in a table of whole numbers, and leaves the decimal mark open in a table
// where no number has one.
func settleCommas(best trial, sample []line, delimiterSaid bool) (dialect, error) {
	switch {
	case best.delimiter == ',' && best.width == 2 && !delimiterSaid && pairIsDecimal(sample):
		return dialect{delimiter: 0, mark: ',', width: 1}, nil
	case best.delimiter == ',' && best.marked == 0 && commasForAll(sample, best.width):
		return dialect{}, &FormatError{Line: sample[len(sample)-1].number, Msg: "commas both separate the columns and mark the decimals; export again with semicolons or tabs between columns, or with decimal points"}
	case best.marked == 0:
		best.mark = 0
	}
	return best.dialect, nil
}

// thin returns at most n of the lines, evenly taken, without the blank ones.
func thin(lines []line, n int) []line {
	var kept []line
	step := max(1, len(lines)/n)
	for i := 0; i < len(lines); i += step {
		if len(Trim(lines[i].text)) > 0 {
			kept = append(kept, lines[i])
		}
	}
	return kept
}

// A trial is how well a dialect fits.
type trial struct {
	dialect
	score  float64 // rows, each counting as far as its cells are numbers or stamps
	marked int     // cells with the decimal mark in them
}

// better prefers the one that fits more by a clear margin, else the one with more columns, else the first.
func better(a, b trial) trial {
	switch margin := 0.02 * max(a.score, b.score); {
	case b.score > a.score+margin:
		return b
	case b.score > a.score-margin && b.width > a.width:
		return b
	case b.score > a.score-margin && b.width == a.width && b.score > a.score+1e-9:
		return b
	}
	return a
}

func tryDialect(lines []line, d dialect) trial {
	scores := map[int]float64{}
	marked := map[int]int{}
	var row [][]byte
	for _, l := range lines {
		row = cells(row, l.text, d.delimiter)
		width := len(row)
		score, withMark := rowScore(row, d.mark)
		scores[width] += score
		marked[width] += withMark
	}
	best := trial{dialect: d}
	for width, score := range scores {
		if score > best.score || score == best.score && width > best.width {
			best.score, best.width, best.marked = score, width, marked[width]
		}
	}
	if best.score == 0 {
		best.width = 0
	}
	return best
}

// rowScore is the share of a row's cells that hold numbers, stamps or nothing, or 0 when less than half do or none is a
// number. A number that is one only by reading its mark as a thousands separator counts a little less.
func rowScore(row [][]byte, mark byte) (score float64, marked int) {
	numbers, good := 0, 0.0
	for _, cell := range row {
		cell = Trim(cell)
		switch kindOf(cell, mark) {
		case Number:
			numbers++
			good++
			hasMark := strings.IndexByte(string(cell), mark) >= 0
			if hasMark {
				marked++
			}
			if other := '.' + ',' - mark; !hasMark && strings.IndexByte(string(cell), other) >= 0 {
				good -= 0.01
			}
		case stampKind:
			good += 0.995 // a number is the plainer reading of "1.5"
		case Empty, Missing:
			good += 0.9
		}
	}
	if numbers == 0 || good < float64(len(row))/2 {
		return 0, 0
	}
	return good / float64(len(row)), marked
}

// stampKind is a Kind beside those of Cell.
const stampKind Kind = 100

// kindOf classifies a cell that Trim has been over.
func kindOf(cell []byte, mark byte) Kind {
	if _, next, ok := Scan(cell, 0, mark, 0); ok && next == len(cell) {
		return Number
	}
	_, kind := Cell(cell, mark, 0)
	if kind == Text || kind == Number && strings.ContainsAny(string(cell), "-./") {
		if _, ok := ParseStamp(cell, DayFirst); ok {
			return stampKind
		}
		if _, ok := ParseStamp(cell, MonthFirst); ok {
			return stampKind
		}
	}
	return kind
}

// commasForAll recognises rows such as 0,0005,229,81,-14,70: in every second cell whole numbers without sign, always of
// as many digits, some with a leading zero.
func commasForAll(lines []line, width int) bool {
	if width < 4 || width%2 != 0 {
		return false
	}
	digits := make([]int, width)
	rows, zeros := 0, 0
	var row [][]byte
	for _, l := range lines {
		row = cells(row, l.text, ',')
		if score, _ := rowScore(row, '.'); score == 0 || len(row) != width {
			continue
		}
		rows++
		for c := 1; c < width; c += 2 {
			cell := row[c]
			if len(cell) == 0 || len(bytes.Trim(cell, "0123456789")) > 0 || digits[c] > 0 && digits[c] != len(cell) {
				return false
			}
			digits[c] = len(cell)
			if len(cell) > 1 && cell[0] == '0' {
				zeros++
			}
		}
	}
	return rows >= 5 && zeros > 0
}

// pairIsDecimal tells one column with a decimal comma from two columns of whole numbers: the second number never has
// a sign, and mostly the same number of digits, and the first is no running number.
func pairIsDecimal(lines []line) bool {
	digits := map[int]int{}
	rows, running := 0, 0
	last := int64(0)
	for _, l := range lines {
		a, b, _ := strings.Cut(string(Trim(l.text)), ",")
		first, err := strconv.ParseInt(strings.TrimSpace(a), 10, 64)
		if err != nil || b == "" || strings.Trim(b, "0123456789") != "" {
			continue
		}
		if rows > 0 && first == last+1 {
			running++
		}
		rows, last = rows+1, first
		digits[len(b)]++
	}
	if rows < len(lines)/2 || running > rows/2 {
		return false
	}
	most := 0
	for _, n := range digits {
		most = max(most, n)
	}
	return most > rows*3/5
}
