package wav

import (
	"encoding/binary"
	"errors"
	"io"
	"iter"
	"math"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

const readBytes = 1 << 20 // of one read; more does not make it faster

// openSamples opens the file at its first sample.
func (s *source) openSamples() (io.Reader, io.Closer, error) {
	f, err := s.opt.Open(s.path)
	if err != nil {
		return nil, nil, err
	}
	if seeker, ok := f.(io.Seeker); ok {
		_, err = seeker.Seek(s.chunks.dataAt, io.SeekStart)
	} else {
		_, err = io.CopyN(io.Discard, f, s.chunks.dataAt)
	}
	if err != nil {
		f.Close()
		return nil, nil, readError(s.name, err)
	}
	if s.chunks.length >= 0 {
		return io.LimitReader(f, s.chunks.length), f, nil
	}
	return f, f, nil
}

// Blocks reads the samples.
func (s *source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		s.notes = nil
		r, closer, err := s.openSamples()
		if err != nil {
			yield(wave.Block{}, err)
			return
		}
		defer closer.Close()
		run := newRun(s)
		for {
			ok, err := run.next(r)
			if err == nil && !ok {
				err = run.end()
				if err == nil {
					return
				}
			}
			if err != nil {
				yield(wave.Block{}, err)
				return
			}
			for run.cut() {
				if !yield(run.block, nil) {
					return
				}
			}
		}
	}
}

// A run is one reading of the samples.
type run struct {
	*source
	buf    []byte
	have   []byte // of buf, not yet used
	rows   [][]float64
	block  wave.Block
	frames int64
	notAny []int64 // samples that are no number, by channel
	rest   int     // bytes of an incomplete last frame
	broken bool    // the packed file is cut short
	done   bool
}

func newRun(s *source) *run {
	f := s.chunks.format
	n := max(64, min(wave.BlockLen, (1<<21)/f.channels))
	r := &run{source: s, buf: make([]byte, max(n, readBytes/f.frame/n*n)*f.frame), notAny: make([]int64, f.channels)}
	r.block = wave.Block{Rate: s.header.Rate, Data: make([][]float64, f.channels)}
	for range f.channels {
		r.rows = append(r.rows, make([]float64, n))
	}
	return r
}

// next reads on. It reports false at the end.
func (r *run) next(from io.Reader) (bool, error) {
	if r.done {
		return false, nil
	}
	n, err := io.ReadFull(from, r.buf)
	if err != nil {
		if !ended(err) {
			return false, readError(r.name, err)
		}
		r.done, r.broken = true, errors.Is(err, input.ErrCut)
	}
	r.rest = n % r.chunks.format.frame
	r.have = r.buf[:n-r.rest]
	return n-r.rest > 0, nil
}

// cut makes the next block of what has been read.
func (r *run) cut() bool {
	f := r.chunks.format
	n := min(len(r.have)/f.frame, len(r.rows[0]))
	if n == 0 {
		return false
	}
	for c, row := range r.rows {
		row = row[:n]
		r.notAny[c] += f.samples(row, r.have[c*f.width:])
		r.block.Data[c] = row
	}
	r.block.At = float64(r.frames) / r.header.Rate
	r.frames += int64(n)
	r.have = r.have[n*f.frame:]
	return true
}

// samples reads one channel's samples, of which the first begins src. It returns how many are no number.
func (f format) samples(dst []float64, src []byte) (notAny int64) {
	switch {
	case f.float:
		return f.floats(dst, src)
	case f.width == 1: // the only unsigned one
		for i := range dst {
			dst[i] = (float64(src[i*f.frame]) - 128) / 128
		}
	case f.width == 2:
		for i := range dst {
			dst[i] = float64(int16(binary.LittleEndian.Uint16(src[i*f.frame:]))) / (1 << 15)
		}
	case f.width == 3:
		for i := range dst {
			p := src[i*f.frame:][:3]
			dst[i] = float64(int32(uint32(p[0])<<8|uint32(p[1])<<16|uint32(p[2])<<24)) / (1 << 31)
		}
	default:
		for i := range dst {
			dst[i] = float64(int32(binary.LittleEndian.Uint32(src[i*f.frame:]))) / (1 << 31)
		}
	}
	return 0
}

func (f format) floats(dst []float64, src []byte) (notAny int64) {
	for i := range dst {
		v := 0.0
		if f.width == 4 {
			v = float64(math.Float32frombits(binary.LittleEndian.Uint32(src[i*f.frame:])))
		} else {
			v = math.Float64frombits(binary.LittleEndian.Uint64(src[i*f.frame:]))
		}
		if dst[i] = v; math.IsNaN(v) || math.IsInf(v, 0) {
			dst[i] = math.NaN()
			notAny++
		}
	}
	return notAny
}

// end closes a complete reading: it says what was odd.
func (r *run) end() error {
	f, err := r.opt.Open(r.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	switch {
	case err != nil:
		return err
	case info.Size() != r.size || !info.ModTime().Equal(r.changed):
		return &wave.ParseError{File: r.name, Msg: "the file changed while it was read; wait until it is complete, or copy it, and run again"}
	case r.frames == 0:
		return r.noSamples()
	}
	r.noteEnd()
	return nil
}

func (r *run) noteEnd() {
	announced := r.chunks.length / int64(r.chunks.format.frame)
	switch {
	case r.broken:
		r.addNote("truncated", "", "The packed file is cut short after %d samples; what comes before is used.", r.frames)
	case r.size < 0 && r.frames < announced:
		r.addNote("truncated", "", "The file announces %d samples and holds %d: it is cut short; what is there is used.", announced, r.frames)
	}
	for c, n := range r.notAny {
		if n > 0 {
			r.addNote("missing-samples", r.header.Channels[c].Name, "%d of %d samples are no numbers; they count as missing.", n, r.frames)
		}
	}
}
