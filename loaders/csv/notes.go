package csv

import (
	"fmt"
	"strings"

	"wavetally/harmonics/wave"
	"wavetally/loaders/timebase"
)

// jumps counts where rows did not follow on.
type jumps struct {
	gaps, backs int64
	lost        float64 // s
	gapAt       float64 // s, of the first gap
	gapLength   float64 // s, of the first
	backAt      float64
	runStart    float64 // s, of the present run of rows that follow on
	longest     float64 // s, of such a run
}

// add counts one event before the row at time t, which came off seconds later than expected.
func (j *jumps) add(e timebase.Event, t, off float64) {
	j.endRun(t - max(off, 0))
	j.runStart = t
	switch e {
	case timebase.Back:
		if j.backs == 0 {
			j.backAt = t
		}
		j.backs++
	case timebase.Gap:
		if j.gaps == 0 {
			j.gapAt, j.gapLength = t-off, off
		}
		j.gaps++
		j.lost += off
	}
}

// endRun closes a run of rows at time t.
func (j *jumps) endRun(t float64) { j.longest = max(j.longest, t-j.runStart) }

func (s *source) addNote(code, channel, text string, args ...any) {
	s.notes = append(s.notes, wave.Note{Code: code, Channel: channel, Text: fmt.Sprintf(text, args...)})
}

// end closes a complete reading: it says what was odd.
func (r *run) end() {
	s := r.source
	if err := s.unchanged(); err != nil {
		r.stop(err)
		return
	}
	if r.rows == 0 {
		r.stop(&wave.ParseError{File: s.name, Line: s.layout.Line, Msg: "no row of numbers could be read; state delimiter and header_lines under [file] in the site sheet"})
		return
	}
	r.noteJumps()
	r.noteCells()
	r.noteLines()
}

func (r *run) noteJumps() {
	s, j := r.source, r.jumps
	end := r.block.At + float64(r.block.Len())/r.block.Rate
	j.endRun(end)
	const short = 3 // s; a recorder's snapshots are of a few cycles up to a few seconds
	switch {
	case j.gaps > 0 && j.longest <= short && j.lost > j.longest*float64(j.gaps):
		s.addNote("snapshot-series", "", "The recording is %d snapshots of at most %.3g s each over %.6g s; what happened between them is not known.", j.gaps+1, j.longest, end)
	case j.gaps == 1:
		s.addNote("gap", "", "The time stamps jump by %.6g s at %.6g s: rows are missing there.", j.gapLength, j.gapAt)
	case j.gaps > 1:
		s.addNote("gap", "", "The time stamps jump forward in %d places, by %.6g s in all, first by %.6g s at %.6g s: rows are missing there.", j.gaps, j.lost, j.gapLength, j.gapAt)
	}
	if len(r.rates) > 0 {
		s.addNote("rate-change", "", "The sampling rate changes within the file: %.7g Hz at first, %s.", s.header.Rate, strings.Join(r.rates, ", "))
	}
	if j.backs > 0 {
		s.addNote("clock-jump", "", "The time stamps go back in %d %s, first at %.6g s; the rows after it are placed right behind those before.", j.backs, plural(j.backs, "place", "places"), j.backAt)
	}
}

func plural(n int64, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}

func (r *run) noteCells() {
	s := r.source
	for c, ch := range s.channels {
		if t := r.odd.missing[c]; t.n > 0 {
			s.addNote("missing-samples", ch.Name, "%d of %d samples are empty or marked as missing, first in line %d.", t.n, r.rows, t.line)
		}
		if t := r.odd.unreadable[c]; t.n > 0 {
			s.addNote("unreadable-samples", ch.Name, "%d of %d samples are no numbers, first %q in line %d; they count as missing.", t.n, r.rows, t.text, t.line)
		}
	}
}

func (r *run) noteLines() {
	s, o := r.source, &r.odd
	if t := o.text; t.n > 0 {
		s.addNote("lines-skipped", "", "%d %s below the first row %s no numbers for the channels, first line %d (%q); %s left out.",
			t.n, plural(t.n, "line", "lines"), plural(t.n, "holds", "hold"), t.line, t.text, plural(t.n, "it is", "they are"))
	}
	if t := o.ragged; t.n > 0 {
		s.addNote("ragged-rows", "", "%d %s too few or too many cells, first line %d; %s missing.", t.n, plural(t.n, "row has", "rows have"), t.line, plural(t.n, "its samples count as", "their samples count as"))
	}
	if t := o.nul; t.n > 0 {
		s.addNote("nul-bytes", "", "Line %d holds NUL bytes, as files do whose recorder lost power while writing; rows may be missing there.", t.line)
	}
	if t := o.badTime; t.n > 0 {
		s.addNote("time-unreadable", "", "The time of %d %s cannot be read, first in line %d (%q); %s taken to follow on.", t.n, plural(t.n, "row", "rows"), t.line, t.text, plural(t.n, "it is", "they are"))
	}
}

// unchanged makes sure that the file is still the one that was opened.
func (s *source) unchanged() error {
	f, err := s.opt.Open(s.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	if info.Size() != s.size || !info.ModTime().Equal(s.changed) {
		return &wave.ParseError{File: s.name, Msg: "the file changed while it was read; wait until it is complete, or copy it, and run again"}
	}
	return nil
}
