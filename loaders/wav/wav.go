// Package wav reads and writes waveforms in WAVE files: RIFF, and RF64 or BW64 (EBU Tech 3306, ITU-R BS.2088) beyond
// 4 GB; PCM of 8 to 32 bits and floating point of 32 and 64 bits, plain or as WAVE_FORMAT_EXTENSIBLE.
//
// A file is a list of chunks: four letters, a length of four bytes, and that many bytes, padded to an even number.
//
//	"RIFF" length "WAVE"
//	"ds64" …              RF64 and BW64 only: the true lengths
//	"bext" …              recorders' own: date and time of the start (EBU Tech 3285)
//	"fmt " 16 or more     format, channels, frames per second, bytes per second, bytes per frame, bits
//	"data" length         frames: a sample of each channel, little-endian
//
// The format knows no volts and amperes: full scale is ±1, without a unit, and the site sheet's scale brings it to them.
// It has no names of channels either; they are CH1, CH2 and so on.
package wav

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"path/filepath"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

const formatName = "WAV"

// maxChannels bounds the channels that are read, and with them the memory of a block.
const maxChannels = 512

// Open reads a file as a recording. The error is a [*wave.NotThisFormatError] when it is no WAVE file, else a
// [*wave.ParseError] or [*wave.UnsupportedError] that says what to do.
func Open(path string, opt input.Options) (wave.Source, error) {
	s := &source{path: path, name: filepath.Base(path), opt: opt}
	if err := s.open(); err != nil {
		return nil, err
	}
	return s, nil
}

// A source is an opened file. Everything but notes is fixed by Open.
type source struct {
	path, name string
	opt        input.Options
	size       int64 // of the file; -1 when it is packed
	changed    time.Time

	chunks chunks
	header wave.Header
	notes  []wave.Note
}

func (s *source) Header() wave.Header { return s.header }

func (s *source) Notes() []wave.Note { return s.notes }

func (s *source) note(code, text string, args ...any) {
	s.header.Notes = append(s.header.Notes, wave.Note{Code: code, Text: fmt.Sprintf(text, args...)})
}

func (s *source) open() error {
	f, err := s.opt.Open(s.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	if info.IsDir() {
		return &wave.NotThisFormatError{File: s.name, Format: formatName, Msg: "it is a folder"}
	}
	s.size, s.changed = info.Size(), info.ModTime()
	if s.chunks, err = readChunks(f, s.name); err != nil {
		return err
	}
	return s.describe()
}

// describe makes the header.
func (s *source) describe() error {
	f := s.chunks.format
	if f.channels > maxChannels {
		return &wave.UnsupportedError{File: s.name, Msg: fmt.Sprintf("it has %d channels, more than the %d that are read; export fewer", f.channels, maxChannels)}
	}
	if err := s.findRate(); err != nil {
		return err
	}
	kind := "PCM"
	if f.float {
		kind = "float"
	}
	s.header.Files = []wave.File{{Name: s.name, Path: s.path, Format: fmt.Sprintf("%s %s %d bit", formatName, kind, f.bits),
		Reading: "full scale of the recorder is 1; state scale in the site sheet to have volts and amperes"}}
	for c := range f.channels {
		ch := wave.Channel{Name: fmt.Sprintf("CH%d", c+1)}
		if !f.float {
			ch.Step = math.Ldexp(1, 1-f.bits)
			ch.Low, ch.High = -1, 1-ch.Step
		}
		s.header.Channels = append(s.header.Channels, ch)
	}
	if start := s.chunks.start; !start.IsZero() {
		y, m, d := start.Date()
		s.header.Start = time.Date(y, m, d, start.Hour(), start.Minute(), start.Second(), start.Nanosecond(), s.opt.Location())
	}
	s.compareLength()
	if s.size >= 0 && s.header.Samples == 0 {
		return s.noSamples()
	}
	return nil
}

func (s *source) noSamples() error {
	return &wave.ParseError{File: s.name, HasOff: true, Offset: s.chunks.dataAt, Msg: "it holds no samples; record again"}
}

func (s *source) findRate() error {
	declared, stated := s.opt.DeclaredRate(), float64(s.chunks.format.rate)
	switch {
	case declared < 0 || math.IsInf(declared, 0) || math.IsNaN(declared):
		return &wave.ParseError{File: s.name, Msg: fmt.Sprintf("sampling_rate = %g in the site sheet is no rate; state samples per second", declared)}
	case declared > 0:
		if s.header.Rate = declared; stated > 0 && declared != stated {
			s.note("rate-overruled", "The file states %g samples a second; the site sheet's %g is used.", stated, declared)
		}
	case stated > 0:
		s.header.Rate = stated
	default:
		return &wave.ParseError{File: s.name, HasOff: true, Offset: s.chunks.formatAt,
			Msg: "the file states a sampling rate of 0; state sampling_rate under [file] in the site sheet"}
	}
	return nil
}

// compareLength tells the number of samples, where the file's size does.
func (s *source) compareLength() {
	c, frame := s.chunks, int64(s.chunks.format.frame)
	if s.size < 0 {
		s.header.Samples = max(0, c.length) / frame
		return
	}
	there := max(0, s.size-c.dataAt)
	switch {
	case c.length < 0:
	case c.length > there:
		s.note("truncated", "The file announces %d bytes of samples and holds %d: it is cut short; what is there is used.", c.length, there)
	default:
		there = c.length
	}
	s.header.Samples = there / frame
	if rest := there % frame; rest > 0 && c.length <= there {
		s.note("truncated", "The last %d bytes of the samples are no whole frame and are left out.", rest)
	}
}

// ended reports whether err says that a file is at its end, packed files cut short included.
func ended(err error) bool {
	return err == io.EOF || err == io.ErrUnexpectedEOF || errors.Is(err, input.ErrCut)
}

func readError(name string, err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err
	}
	return fmt.Errorf("%s: it cannot be read: %w", name, err)
}

func (s *source) addNote(code, channel, text string, args ...any) {
	s.notes = append(s.notes, wave.Note{Code: code, Channel: channel, Text: fmt.Sprintf(text, args...)})
}
