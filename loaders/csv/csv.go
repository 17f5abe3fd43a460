// Package csv reads waveforms from tables of text: comma-, semicolon-, tab- or blank-separated, with or without a
// header, with a time column or at a given rate, as recorders, oscilloscopes and spreadsheets write them.
//
// How a table is written is guessed from its first megabyte (package table) and the sampling rate from its time stamps
// (package timebase). The rows are then streamed: cut into chunks at line ends, parsed on all processors straight from
// bytes to float64, and handed over in the file's order. Memory in use does not depend on the file's length.
package csv

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"path/filepath"
	"strings"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
	"wavetally/loaders/table"
	"wavetally/loaders/timebase"
)

const (
	headBytes   = 1 << 20
	maxChannels = 512
)

// Open reads a table of text as a recording. The error is a [*wave.NotThisFormatError] when the file is no table of
// numbers, else a [*wave.ParseError] or [*wave.UnsupportedError] that says what to do.
func Open(path string, opt input.Options) (wave.Source, error) { return OpenAs(path, "CSV", opt) }

// OpenAs is Open for a table that another package turns into text while it is read; format names what it truly is.
func OpenAs(path, format string, opt input.Options) (wave.Source, error) {
	s := &source{path: path, name: filepath.Base(path), format: format, opt: opt}
	if err := s.open(); err != nil {
		return nil, err
	}
	return s, nil
}

// A source is an opened table. Everything but notes is fixed by open.
type source struct {
	path, name string
	format     string
	opt        input.Options
	size       int64
	changed    time.Time

	layout   table.Layout
	channels []channel
	plan     *plan
	first    instant // of the first row
	stamped  int64   // rows of the head that tell a time
	fit      timebase.Fit
	header   wave.Header
	chunk    int // bytes
	notes    []wave.Note
}

func (s *source) Header() wave.Header { return s.header }

func (s *source) Notes() []wave.Note { return s.notes }

// FirstStamp is the time of the first row in a recording that has times but no start, in s from an origin of its own;
// ok is false for any other. It serves to put several files of one recording in order.
func (s *source) FirstStamp() (seconds float64, ok bool) {
	k := s.layout.Clock
	if !s.plan.hasTime || k.Kind != table.NumberClock || k.Epoch {
		return 0, false
	}
	return (float64(s.first.whole) + s.first.part) * k.Seconds, true
}

func (s *source) open() error {
	head, whole, err := s.readHead()
	if err != nil {
		return err
	}
	if err := s.understand(head, whole); err != nil {
		return err
	}
	if err := s.chooseChannels(); err != nil {
		return err
	}
	s.plan = newPlan(s.layout, s.channels)
	s.makeHeader()
	return s.findRate(head[s.layout.Offset:], whole)
}

// readHead reads the file's first megabyte, decoded, and finds its encoding.
func (s *source) readHead() (head []byte, whole bool, err error) {
	f, err := s.opt.Open(s.path)
	if err != nil {
		return nil, false, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, false, err
	}
	if info.IsDir() {
		return nil, false, &wave.NotThisFormatError{File: s.name, Format: s.format, Msg: "it is a folder"}
	}
	s.size, s.changed = info.Size(), info.ModTime()
	raw := make([]byte, 8192)
	n, err := io.ReadFull(f, raw)
	if !endOfText(err) {
		return nil, false, s.readError(err)
	}
	raw = raw[:n]
	if n == 0 {
		return nil, false, &wave.ParseError{File: s.name, Msg: "the file is empty; export the recording again"}
	}
	if s.layout.Encoding, err = table.EncodingOf(raw, s.opt.File.Encoding); err != nil {
		return nil, false, &wave.ParseError{File: s.name, Msg: err.Error()}
	}
	decoded := s.layout.Encoding.Reader(io.MultiReader(bytes.NewReader(raw), f))
	head = make([]byte, headBytes)
	n, err = io.ReadFull(decoded, head)
	if !endOfText(err) {
		return nil, false, s.readError(err)
	}
	if binary(head[:min(n, 65536)]) {
		return nil, false, &wave.NotThisFormatError{File: s.name, Format: s.format, Msg: "it holds binary data"}
	}
	return head[:n], err != nil, nil
}

// endOfText reports whether a read of the head went well, or ended where the file does.
func endOfText(err error) bool {
	return err == nil || err == io.EOF || err == io.ErrUnexpectedEOF || errors.Is(err, input.ErrCut)
}

// binary reports whether a text has control characters that no text has. NUL bytes alone do not make it so: recorders
// that lose power leave runs of them.
func binary(text []byte) bool {
	control, nul := 0, 0
	for _, c := range text {
		switch {
		case c == 0:
			nul++
		case c < 0x20 && c != '\t' && c != '\n' && c != '\r' && c != '\f' && c != 0x1A && c != 0x1B:
			control++
		}
	}
	return control*500 > len(text) || nul*2 > len(text) && control > 0 || nul == len(text)
}

func (s *source) readError(err error) error {
	var known *fs.PathError
	if errors.As(err, &known) {
		return err
	}
	var refusal input.Refusal
	if errors.As(err, &refusal) {
		return &wave.ParseError{File: s.name, Err: err, Msg: string(refusal)}
	}
	return &wave.ParseError{File: s.name, Err: err, Msg: fmt.Sprintf("reading failed (%v); copy the file again from where it came from", err)}
}

func (s *source) understand(head []byte, whole bool) error {
	encoding := s.layout.Encoding
	if !whole && !bytes.ContainsAny(head, "\r\n") {
		return &wave.ParseError{File: s.name, Line: 1, Msg: "the line is longer than 1 MiB; this is no table with one sample a row: export it so"}
	}
	layout, err := table.Guess(head, whole, encoding, s.opt.File)
	var wrong *table.FormatError
	switch {
	case errors.Is(err, table.ErrNoTable):
		return &wave.NotThisFormatError{File: s.name, Format: s.format, Msg: err.Error()}
	case errors.As(err, &wrong):
		return &wave.ParseError{File: s.name, Line: wrong.Line, Msg: wrong.Msg}
	case err != nil:
		return err
	}
	s.layout = layout
	return nil
}

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

func (s *source) note(code, channel, text string, args ...any) {
	s.header.Notes = append(s.header.Notes, wave.Note{Code: code, Channel: channel, Text: fmt.Sprintf(text, args...)})
}

func (s *source) makeHeader() {
	reading := s.layout.Rows()
	if s.format == "CSV" {
		reading = s.layout.String()
	}
	s.header.Files = []wave.File{{Name: s.name, Path: s.path, Format: s.format, Reading: reading}}
	for _, c := range s.channels {
		s.header.Channels = append(s.header.Channels, c.Channel)
	}
}

// findRate reads the first rows' times and takes the rate from them, from the site sheet or from the lines above the
// table, in this order: the declared rate wins over the stamps, these win over the lines above.
func (s *source) findRate(rows []byte, whole bool) error {
	declared, stated := s.opt.DeclaredRate(), s.layout.Facts.Rate
	if declared < 0 || math.IsInf(declared, 0) || math.IsNaN(declared) {
		return &wave.ParseError{File: s.name, Msg: fmt.Sprintf("sampling_rate = %g in the site sheet is no rate; state samples per second", declared)}
	}
	points := s.firstPoints(rows, whole)
	s.setStart(s.first)
	if s.layout.Clock.Kind == table.NumberClock || s.layout.Clock.Kind == table.StampClock {
		rate, err := s.rateFromStamps(points, whole)
		switch {
		case declared > 0:
			s.header.Rate = declared
			s.compare(rate, declared, "the site sheet states")
		case err == nil:
			s.header.Rate = rate
			if stated > 0 {
				s.compare(rate, stated, fmt.Sprintf("line %d states", s.layout.Facts.RateLine))
			}
		case stated > 0:
			s.header.Rate = stated
			s.plan.hasTime = false
			s.note("time-column-unusable", "", "The time column gives no sampling rate (%v); the rate of %g Hz is taken from line %d.", err, stated, s.layout.Facts.RateLine)
		default:
			return &wave.ParseError{File: s.name, Line: s.layout.Line, Err: err,
				Msg: fmt.Sprintf("the time column gives no sampling rate: %v; state sampling_rate under [file] in the site sheet", err)}
		}
		return nil
	}
	switch {
	case declared > 0:
		s.header.Rate = declared
	case stated > 0:
		s.header.Rate = stated
	case s.layout.Unread() != "":
		return &wave.ParseError{File: s.name, Line: s.layout.Line, Msg: s.layout.Unread()}
	default:
		return &wave.UnsupportedError{File: s.name, Line: s.layout.Line,
			Msg: "no column tells the time and no line above states the sampling rate; state it with --sampling-rate, or sampling_rate under [file] in the site sheet"}
	}
	return nil
}

// compare notes two rates that contradict each other by more than rounding.
func (s *source) compare(fromStamps, other float64, who string) {
	if fromStamps <= 0 || math.Abs(fromStamps-other) <= 1e-3*other {
		return
	}
	s.note("time-base-conflict", "", "The time column advances as at %.6g samples a second, but %s %.6g; %.6g is used.",
		fromStamps, who, other, s.header.Rate)
}

// firstPoints parses the rows of head for their times.
func (s *source) firstPoints(rows []byte, whole bool) []timebase.Point {
	if !s.plan.hasTime {
		return nil
	}
	k := &cutter{r: bytes.NewReader(rows), size: chunkSize(128)}
	c := newTimes(s.plan)
	for k.fill(c.chunk) {
		if !whole && k.done { // the last line may be cut
			break
		}
		c.read()
	}
	s.plan.origin, s.first, s.stamped = c.origin, c.first, c.row
	return c.points
}

// rateFromStamps fits the rate to the head's stamps, and to the whole file's when those leave it open.
func (s *source) rateFromStamps(points []timebase.Point, whole bool) (float64, error) {
	if k := s.layout.Clock; k.Kind == table.StampClock && k.Date == k.Column && !s.anyClock(points) {
		return 0, errors.New("it holds dates without a time of day")
	}
	fit, err := timebase.From(points, s.originSeconds())
	if !whole && (err != nil || fit.Uncertainty() > 5e-6) {
		all, scanErr := s.scanTimes()
		if scanErr != nil {
			return 0, scanErr
		}
		fit, err = timebase.From(all, s.originSeconds())
	}
	if errors.Is(err, timebase.ErrTooFew) && s.stamped > 2 {
		if err = timebase.ErrStanding; len(points) > 1 {
			err = timebase.ErrCoarse
		}
	}
	if err != nil {
		return 0, err
	}
	s.fit = fit
	rate := fit.Rate()
	switch {
	case fit.Jitter > 0.5*fit.Interval:
		s.note("time-stamps-jitter", "", "Time stamps stray by up to %.3g ms from even steps; rows are taken as evenly spaced at %.7g samples a second (± %.2g %%).",
			fit.Jitter*1e3, rate, fit.Uncertainty()*100)
	case !fit.Sure():
		s.note("rate-inferred", "", "Time stamps are too coarse to tell the sampling rate better than %.6g to %.6g Hz; %.7g is used. State sampling_rate under [file] in the site sheet if it is known.",
			1/fit.Top, 1/fit.Low, rate)
	}
	if k := s.layout.Clock; k.Kind == table.NumberClock && !k.UnitStated && rate < 1000 {
		s.note("time-unit-assumed", "", "The time column does not say its unit; read as seconds it gives %.6g samples a second. If it is another unit, state time_format under [file] in the site sheet.", rate)
	}
	return rate, nil
}

func (s *source) anyClock(points []timebase.Point) bool {
	return len(points) > 1 && points[len(points)-1].T != points[0].T
}

func (s *source) originSeconds() float64 {
	if s.layout.Clock.Kind == table.NumberClock {
		return float64(s.plan.origin) * s.layout.Clock.Seconds
	}
	return 0 // stamps are decimal text, never single-precision numbers
}

// setStart finds the instant of the first row.
func (s *source) setStart(first instant) {
	k := s.layout.Clock
	switch {
	case k.Kind == table.StampClock && k.Date >= 0 && first.set:
		s.header.Start, s.header.HasZone = s.instantTime(first), first.zoned
	case k.Kind == table.NumberClock && k.Epoch && first.set:
		whole := float64(first.whole) * k.Seconds
		sec := math.Floor(whole)
		nanos := (float64(first.whole)-sec/k.Seconds+first.part)*k.Seconds*1e9 + 0.5
		s.header.Start, s.header.HasZone = time.Unix(int64(sec), int64(nanos)).UTC(), true
	case s.layout.Facts.HasStart:
		f := s.layout.Facts.Start
		s.header.Start = s.instantTime(instant{whole: f.Sec, part: f.Frac, zoned: f.HasZone})
		s.header.HasZone = f.HasZone
	}
	if k.Kind == table.StampClock && k.Date >= 0 && !k.OrderSaid && first.set {
		order, other := "d/m/y", "m/d/y"
		if k.Order == table.MonthFirst {
			order, other = other, order
		}
		s.note("date-order-assumed", "", "Day and month in the time stamps could be exchanged; they are read as %s, so the recording starts on %s. If it is %s, state time_format under [file] in the site sheet.",
			order, s.header.Start.Format("2 January 2006"), other)
	}
}

// instantTime is the instant of a stamp; one without an offset is read in the declared zone.
func (s *source) instantTime(t instant) time.Time {
	utc := time.Unix(t.whole, int64(math.Round(t.part*1e9))).UTC()
	if t.zoned {
		return utc
	}
	y, m, d := utc.Date()
	return time.Date(y, m, d, utc.Hour(), utc.Minute(), utc.Second(), utc.Nanosecond(), s.opt.Location())
}
