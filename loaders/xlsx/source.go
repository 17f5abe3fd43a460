package xlsx

import (
	"fmt"
	"iter"
	"strings"

	"wavetally/harmonics/wave"
)

// A source is a table of one worksheet.
type source struct {
	wave.Source
	name, sheet   string
	passed, after []string // worksheets before and after it
}

// Unwrap returns the table as package csv reads it.
func (s source) Unwrap() wave.Source { return s.Source }

// Header names the worksheet, and those that were not read.
func (s source) Header() wave.Header {
	h := s.Source.Header()
	h.Files = append([]wave.File(nil), h.Files...)
	h.Files[0].Reading = fmt.Sprintf("worksheet %q; %s", s.sheet, h.Files[0].Reading)
	if others := append(append([]string(nil), s.passed...), s.after...); len(others) > 0 {
		h.Notes = append([]wave.Note{{Code: "worksheets-skipped", Text: fmt.Sprintf("The table of worksheet %q is read; other worksheets are not: %s.", s.sheet, strings.Join(others, ", "))}}, h.Notes...)
	}
	return h
}

// Blocks names the worksheet in errors.
func (s source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for b, err := range s.Source.Blocks() {
			if err != nil {
				err = inSheet(err, s.name, s.sheet)
			}
			if !yield(b, err) {
				return
			}
		}
	}
}
