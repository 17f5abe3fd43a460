// Package wav reads sound files that hold mains waveforms, as sound cards and some recorders write them: RIFF WAVE, and
// RF64 or BW64 for files beyond 4 GiB (EBU Tech 3306).
//
// Samples are PCM of 8, 16, 24 or 32 bits, or IEEE floats of 32 or 64 bits. Full scale is 1, and the unit is unknown: what
// full scale stands for is told by the scale in the site sheet. A file that was cut short is read as far as it goes.
package wav

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"iter"
	"math"
	"path/filepath"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

// Sample encodings, by the tag that the fmt chunk gives them.
const (
	tagPCM        = 1
	tagFloat      = 3
	tagExtensible = 0xFFFE // the encoding is in the first two bytes of a longer identifier
)

// maxChannels bounds what a header may ask for; recorders have a few dozen at most.
const maxChannels = 256

// unknownSize is what streaming writers leave in a size field.
const unknownSize = 0xFFFFFFFF

// A layout is how samples lie in the file.
type layout struct {
	tag      int
	channels int
	bytes    int // of one sample
	rate     float64
	start    int64 // of the samples
	size     int64 // bytes of samples announced; -1 unknown
}

func (l layout) frame() int64 { return int64(l.channels * l.bytes) }

type source struct {
	path   string
	name   string
	opt    input.Options
	layout layout
	header wave.Header
	notes  []wave.Note
}

// Open reads the header of the file at path.
func Open(path string, opt input.Options) (wave.Source, error) {
	f, err := opt.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	s := &source{path: path, name: filepath.Base(path), opt: opt}
	if s.layout, err = s.chunks(f); err != nil {
		return nil, err
	}
	l := s.layout
	s.header = wave.Header{Rate: l.rate, Files: []wave.File{{Name: s.name, Path: path, Format: l.String()}}}
	if l.size >= 0 {
		s.header.Samples = l.size / l.frame()
	}
	for c := range l.channels {
		s.header.Channels = append(s.header.Channels, wave.Channel{Name: fmt.Sprintf("CH%d", c+1), Step: l.step(), Low: -1, High: 1})
	}
	if info, err := f.Stat(); err == nil && info.Size() >= 0 {
		have := (info.Size() - l.start) / l.frame()
		if l.size >= 0 && have < s.header.Samples {
			s.header.Notes = append(s.header.Notes, wave.Note{Code: "truncated", Text: fmt.Sprintf(
				"%s announces %d samples a channel and holds %d: it was cut short. What is there is used.", s.name, s.header.Samples, max(have, 0))})
			s.header.Samples = max(have, 0)
		}
		if l.size < 0 {
			s.header.Samples = max(have, 0)
		}
	}
	if d := opt.DeclaredRate(); d > 0 && d != l.rate {
		s.header.Notes = append(s.header.Notes, wave.Note{Code: "rate-declared", Text: fmt.Sprintf(
			"%s says %g Hz; the declared sampling rate of %g Hz is used instead.", s.name, l.rate, d)})
		s.layout.rate, s.header.Rate = d, d
	}
	return s, nil
}

func (l layout) String() string {
	kind := "PCM"
	if l.tag == tagFloat {
		kind = "float"
	}
	return fmt.Sprintf("WAV %s %d bit", kind, 8*l.bytes)
}

// step is the size of one digitising step, 0 for floats, which do not tell.
func (l layout) step() float64 {
	if l.tag == tagFloat {
		return 0
	}
	return math.Ldexp(1, 1-8*l.bytes)
}

// chunks walks through the chunks up to the samples.
func (s *source) chunks(f io.Reader) (layout, error) {
	r := &reader{r: f}
	head, err := r.take(12)
	id := string(head)
	if err != nil || (id[:4] != "RIFF" && id[:4] != "RF64" && id[:4] != "BW64") || id[8:] != "WAVE" {
		return layout{}, &wave.NotThisFormatError{File: s.name, Format: "WAV", Msg: "it does not begin with a RIFF WAVE header"}
	}
	var l layout
	var long int64 = -1 // size of the samples from a ds64 chunk
	for {
		at := r.at
		head, err := r.take(8)
		if err != nil {
			what := "no samples: the data chunk is missing"
			if l.channels == 0 {
				what = "no format: the fmt chunk is missing"
			}
			return l, s.broken(at, what+"; export the recording again")
		}
		size := int64(binary.LittleEndian.Uint32(head[4:]))
		switch string(head[:4]) {
		case "ds64":
			body, err := r.take(min(size, 28))
			if err != nil || len(body) < 16 {
				return l, s.broken(at, "the ds64 chunk, which holds the sizes of a long file, is cut short; export the recording again")
			}
			long = int64(binary.LittleEndian.Uint64(body[8:]))
			size -= int64(len(body))
		case "fmt ":
			body, err := r.take(min(size, 40))
			if err != nil || len(body) < 16 {
				return l, s.broken(at, "the fmt chunk is cut short; export the recording again")
			}
			if err := s.format(&l, at, body); err != nil {
				return l, err
			}
			size -= int64(len(body))
		case "data":
			if l.channels == 0 {
				return l, s.broken(at, "the samples come before their format; export the recording again")
			}
			l.start, l.size = r.at, size
			if size == unknownSize || size == 0 && id[:4] == "RIFF" {
				l.size = -1 // a writer that could not go back left it open: up to the end of the file
			}
			if size == unknownSize && long >= 0 {
				l.size = long
			}
			return l, nil
		}
		if err := r.skip(size + size%2); err != nil && l.channels == 0 {
			return l, s.broken(at, fmt.Sprintf("chunk %q goes beyond the end of the file; export the recording again", head[:4]))
		}
	}
}

func (s *source) format(l *layout, at int64, body []byte) error {
	l.tag = int(binary.LittleEndian.Uint16(body))
	l.channels = int(binary.LittleEndian.Uint16(body[2:]))
	l.rate = float64(binary.LittleEndian.Uint32(body[4:]))
	align := int(binary.LittleEndian.Uint16(body[12:]))
	bits := int(binary.LittleEndian.Uint16(body[14:]))
	if l.tag == tagExtensible && len(body) >= 26 {
		l.tag = int(binary.LittleEndian.Uint16(body[24:]))
	}
	if l.channels < 1 || l.channels > maxChannels {
		return s.broken(at, fmt.Sprintf("the fmt chunk says %d channels; between 1 and %d are possible", l.channels, maxChannels))
	}
	if l.rate <= 0 {
		return s.broken(at, "the fmt chunk says a sampling rate of 0 Hz; export the recording again")
	}
	l.bytes = (bits + 7) / 8
	if align > 0 && align%l.channels == 0 { // 20 bits in 3 or 4 bytes: the frame tells
		l.bytes = align / l.channels
	}
	ok := l.tag == tagPCM && l.bytes >= 1 && l.bytes <= 4 || l.tag == tagFloat && (l.bytes == 4 || l.bytes == 8)
	if !ok {
		return &wave.UnsupportedError{File: s.name, Msg: fmt.Sprintf(
			"its samples are of encoding %d with %d bits; export as PCM of 16, 24 or 32 bits, or as float", l.tag, bits)}
	}
	return nil
}

func (s *source) broken(at int64, msg string) error {
	return &wave.ParseError{File: s.name, Offset: at, HasOff: true, Msg: msg}
}

// A reader counts the bytes it has read.
type reader struct {
	r  io.Reader
	at int64
}

func (r *reader) take(n int64) ([]byte, error) {
	b := make([]byte, n)
	got, err := io.ReadFull(r.r, b)
	r.at += int64(got)
	return b, err
}

func (r *reader) skip(n int64) error {
	got, err := io.CopyN(io.Discard, r.r, n)
	r.at += got
	return err
}

func (s *source) Header() wave.Header { return s.header }

func (s *source) Notes() []wave.Note { return s.notes }

func (s *source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		s.notes = nil
		f, err := s.opt.Open(s.path)
		if err != nil {
			yield(wave.Block{}, err)
			return
		}
		defer f.Close()
		l := s.layout
		if _, err := io.CopyN(io.Discard, f, l.start); err != nil {
			yield(wave.Block{}, s.broken(0, "it is shorter than when it was opened; leave it alone while it is read"))
			return
		}
		var from io.Reader = f
		if l.size >= 0 {
			from = io.LimitReader(f, l.size)
		}
		frames := int64(wave.BlockLen)
		raw := make([]byte, frames*l.frame())
		data := make([][]float64, l.channels)
		for c := range data {
			data[c] = make([]float64, frames)
		}
		for at := int64(0); ; {
			got, err := io.ReadFull(from, raw)
			n := got / int(l.frame())
			if n > 0 {
				b := wave.Block{At: float64(at) / l.rate, Rate: l.rate, Data: make([][]float64, l.channels)}
				for c := range data {
					b.Data[c] = data[c][:n]
					l.decode(b.Data[c], raw[c*l.bytes:], int(l.frame()))
				}
				if !yield(b, nil) {
					return
				}
				at += int64(n)
			}
			switch {
			case err == nil:
			case errors.Is(err, io.EOF), errors.Is(err, io.ErrUnexpectedEOF):
				return
			default:
				if errors.Is(err, input.ErrCut) {
					s.notes = append(s.notes, wave.Note{Code: "truncated", Text: fmt.Sprintf("%s is cut short; the %d samples a channel before that are used.", s.name, at)})
					return
				}
				yield(wave.Block{}, fmt.Errorf("%s: %w", s.name, err))
				return
			}
		}
	}
}

// decode writes to dst the samples that begin at raw, stride bytes apart.
func (l layout) decode(dst []float64, raw []byte, stride int) {
	switch {
	case l.tag == tagFloat && l.bytes == 4:
		for i := range dst {
			dst[i] = finite(float64(math.Float32frombits(binary.LittleEndian.Uint32(raw[i*stride:]))))
		}
	case l.tag == tagFloat:
		for i := range dst {
			dst[i] = finite(math.Float64frombits(binary.LittleEndian.Uint64(raw[i*stride:])))
		}
	case l.bytes == 1: // the one unsigned form
		for i := range dst {
			dst[i] = (float64(raw[i*stride]) - 128) / 128
		}
	case l.bytes == 2:
		for i := range dst {
			dst[i] = float64(int16(binary.LittleEndian.Uint16(raw[i*stride:]))) / (1 << 15)
		}
	case l.bytes == 3:
		for i := range dst {
			b := raw[i*stride : i*stride+3]
			dst[i] = float64(int32(uint32(b[0])<<8|uint32(b[1])<<16|uint32(b[2])<<24)) / (1 << 31)
		}
	default:
		for i := range dst {
			dst[i] = float64(int32(binary.LittleEndian.Uint32(raw[i*stride:]))) / (1 << 31)
		}
	}
}

// finite turns infinities into NaN, which says missing.
func finite(v float64) float64 {
	if math.IsInf(v, 0) {
		return math.NaN()
	}
	return v
}
