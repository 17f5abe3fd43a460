package csv

import (
	"fmt"
	"strings"

	"wavetally/harmonics/wave"
	"wavetally/loaders/table"
)

// chooseChannels makes channels of the columns of values. What is neither voltage nor current is left out.
func (s *source) chooseChannels() error {
	taken := map[string]bool{}
	for c, col := range s.layout.Columns {
		switch {
		case col.Use == table.Value && table.OtherQuantity(col.Unit):
			s.leaveOut(c, fmt.Sprintf("its unit %q is neither of voltage nor of current", col.Unit))
			continue
		case col.Use != table.Value:
			if col.Why != "" && col.Name != "" {
				s.leaveOut(c, col.Why)
			}
			continue
		}
		ch := channel{column: c}
		ch.Unit, ch.shift = unitShift(col.Unit)
		if ch.FileUnit = col.Unit; col.Unit == "" {
			ch.Unit, ch.FileUnit = col.CellUnit, col.CellUnit
		}
		ch.Name = unique(taken, col.Name, len(s.channels)+1)
		s.channels = append(s.channels, ch)
	}
	switch n := len(s.channels); {
	case n == 0:
		return &wave.UnsupportedError{File: s.name, Line: s.layout.Line, Msg: fmt.Sprintf("no column holds a voltage or a current (%s); export the waveforms, one column a channel", s.whyNot())}
	case n > maxChannels:
		return &wave.UnsupportedError{File: s.name, Line: s.layout.Line, Msg: fmt.Sprintf("rows have %d channels, more than the %d that are read; export fewer, one row a sample", n, maxChannels)}
	}
	return nil
}

// whyNot says of each column why it is no channel.
func (s *source) whyNot() string {
	var all []string
	for c, col := range s.layout.Columns {
		why := col.Why
		switch {
		case col.Use == table.Time:
			why = "it tells the time"
		case why == "":
			why = fmt.Sprintf("its unit is %q", col.Unit)
		}
		all = append(all, fmt.Sprintf("column %d: %s", c+1, why))
		if c == 5 && len(s.layout.Columns) > 7 {
			all = append(all, "and so on")
			break
		}
	}
	return strings.Join(all, "; ")
}

func (s *source) leaveOut(c int, why string) {
	s.note("column-skipped", "", "Column %d %q is not read: %s.", c+1, s.layout.Columns[c].Name, why)
}

// unique gives a channel the name that its column has, or one by its number, with a number behind a name that is taken.
func unique(taken map[string]bool, name string, number int) string {
	if name == "" {
		name = fmt.Sprintf("CH%d", number)
	}
	candidate := name
	for n := 2; taken[candidate]; n++ {
		candidate = fmt.Sprintf("%s (%d)", name, n)
	}
	taken[candidate] = true
	return candidate
}
