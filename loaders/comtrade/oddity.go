package comtrade

import (
	"fmt"
	"math"

	"wavetally/harmonics/wave"
)

// A tally counts one kind of oddity and keeps its first place.
type tally struct {
	n    int64
	at   int64 // line, or record from 1
	text string
}

func (t *tally) add(line int, text string) {
	if t.n++; t.n == 1 {
		t.at, t.text = int64(line), text
	}
}

// many counts the n values that are NaN in dst, whose first is of the record behind the given one.
func (t *tally) many(n int, record int64, dst []float64) {
	if t.n == 0 {
		for i, v := range dst {
			if math.IsNaN(v) {
				t.at = record + int64(i) + 1
				break
			}
		}
	}
	t.n += int64(n)
}

// oddities are what reading the records finds odd in them.
type oddities struct {
	missing, unreadable []tally // by channel
	text, ragged        tally
}

// jumps are where records do not follow on.
type jumps struct {
	gaps, backs, off int64
	lost             float64 // s, over all gaps
	gapAt, gapLength float64 // s, of the first
	backAt, offAt    int64   // record
	breaks           int64
	breakAt          float64 // s
}

func (s *source) addNote(code, channel, text string, args ...any) {
	s.notes = append(s.notes, wave.Note{Code: code, Channel: channel, Text: fmt.Sprintf(text, args...)})
}

// place says where in the data a tally began.
func (s *source) place(t tally) string {
	if s.form == ASCII {
		return fmt.Sprintf("%s:%d", s.data.name(), t.at)
	}
	return fmt.Sprintf("record %d of %s", t.at, s.data.name())
}

func (s *source) noteOddities(o *oddities, rows int64) {
	for c, ch := range s.channels {
		if t := o.missing[c]; t.n > 0 {
			s.addNote("missing-samples", ch.Name, "%d of %d samples are marked as missing, first in %s.", t.n, rows, s.place(t))
		}
		if t := o.unreadable[c]; t.n > 0 {
			s.addNote("unreadable-samples", ch.Name, "%d of %d samples are no numbers, first %q in %s; they count as missing.", t.n, rows, t.text, s.place(t))
		}
	}
	if t := o.text; t.n > 0 {
		s.addNote("lines-skipped", "", "%d %s no record, first %s (%q).", t.n, plural(t.n, "line is", "lines are"), s.place(t), t.text)
	}
	if t := o.ragged; t.n > 0 {
		s.addNote("ragged-rows", "", "%d %s fewer values than there are channels, first %s; %s missing.", t.n, plural(t.n, "record has", "records have"), s.place(t), plural(t.n, "its last count as", "their last count as"))
	}
}

func (s *source) noteJumps(j *jumps) {
	switch {
	case j.gaps == 1:
		s.addNote("gap", "", "Records are missing: the sample numbers jump by %.6g s at %.6g s.", j.gapLength, j.gapAt)
	case j.gaps > 1:
		s.addNote("gap", "", "Records are missing in %d places, %.6g s in all: the sample numbers jump first by %.6g s at %.6g s.", j.gaps, j.lost, j.gapLength, j.gapAt)
	}
	if j.off > 0 {
		s.addNote("sample-numbers", "", "The sample numbers do not count up in %d %s, first at record %d; the records are taken to follow on.", j.off, plural(j.off, "place", "places"), j.offAt)
	}
	if j.breaks > 0 {
		s.addNote("gap", "", "The time stamps leave their rhythm in %d %s, first at %.6g s; what follows is kept apart.", j.breaks, plural(j.breaks, "place", "places"), j.breakAt)
	}
	if j.backs > 0 {
		s.addNote("clock-jump", "", "The time stamps go back in %d %s, first at record %d; the records after it are placed right behind those before.", j.backs, plural(j.backs, "place", "places"), j.backAt)
	}
}

func plural(n int64, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}
