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
	"path/filepath"
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
	head = make([]byte, s.headSize())
	n, err = io.ReadFull(decoded, head)
	if !endOfText(err) {
		return nil, false, s.readError(err)
	}
	if binary(head[:min(n, 65536)]) {
		return nil, false, &wave.NotThisFormatError{File: s.name, Format: s.format, Msg: "it holds binary data"}
	}
	return head[:n], err != nil, nil
}

// headSize is the length of the head to read: no more than a small file can fill, of which a session may have many.
func (s *source) headSize() int64 {
	if s.size < 0 {
		return headBytes
	}
	return min(headBytes, 4*s.size+16) // a byte becomes at most three by decoding
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
