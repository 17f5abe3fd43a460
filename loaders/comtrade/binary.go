package comtrade

import (
	"encoding/binary"
	"errors"
	"io"
	"math"

	"wavetally/loaders/input"
)

const readBytes = 1 << 20 // of one read; more does not make it faster

func le32(b []byte) uint32 { return binary.LittleEndian.Uint32(b) }

// noStamp is the time stamp of a binary record that has none.
const noStamp = 0xFFFFFFFF

// A batch is a run of consecutive records.
type batch struct {
	rows    int
	numbers []int64   // sample numbers; -1: none
	stamps  []float64 // as in the file; NaN: none
	data    [][]float64
	odd     oddities
}

func newBatch(channels, rows int) *batch {
	b := &batch{numbers: make([]int64, rows), stamps: make([]float64, rows), data: make([][]float64, channels)}
	for c := range b.data {
		b.data[c] = make([]float64, rows)
	}
	b.odd.missing = make([]tally, channels)
	b.odd.unreadable = make([]tally, channels)
	return b
}

// A recordReader reads records, batch after batch, and gives io.EOF at their end.
type recordReader interface {
	next(b *batch) error
}

// readFull fills p as far as r goes. Errors that say that r is at its end are one: io.EOF.
func readFull(r io.Reader, p []byte) (int, error) {
	n, err := io.ReadFull(r, p)
	if err == io.ErrUnexpectedEOF {
		err = io.EOF
	}
	return n, err
}

// A binaryReader reads records of a fixed length.
type binaryReader struct {
	r        io.Reader
	channels []channel
	form     string
	record   int

	buf  []byte
	have []byte // of buf, not yet used
	err  error
	rows int64
	rest int64 // bytes of an incomplete last record
}

func newBinaryReader(r io.Reader, s *source) *binaryReader {
	return &binaryReader{r: r, channels: s.channels, form: s.form, record: s.record, buf: make([]byte, max(1, readBytes/s.record)*s.record)}
}

func (r *binaryReader) next(b *batch) error {
	if len(r.have) < r.record {
		if err := r.fill(); err != nil {
			return err
		}
	}
	b.rows = min(len(r.have)/r.record, len(b.numbers))
	length := b.rows * r.record
	r.heads(b, r.have[:length])
	for c, ch := range r.channels {
		dst, src := b.data[c][:b.rows], r.have[8:length]
		if missing := r.column(dst, src, &ch); missing > 0 {
			b.odd.missing[c].many(missing, r.rows, dst)
		}
	}
	r.rows += int64(b.rows)
	r.have = r.have[length:]
	return nil
}

// fill reads until there is a whole record.
func (r *binaryReader) fill() error {
	n := copy(r.buf, r.have)
	for n < r.record {
		if r.err != nil {
			r.rest = int64(n)
			return r.err
		}
		var m int
		m, r.err = readFull(r.r, r.buf[n:])
		n += m
	}
	r.have = r.buf[:n]
	return nil
}

// heads reads the numbers and stamps.
func (r *binaryReader) heads(b *batch, src []byte) {
	numbers, stamps := b.numbers[:b.rows], b.stamps[:b.rows]
	for i := range numbers {
		head := src[i*r.record:][:8]
		numbers[i] = int64(le32(head))
		stamp := le32(head[4:])
		stamps[i] = float64(stamp)
		if stamp == noStamp {
			stamps[i] = math.NaN()
		}
	}
}

// column reads one channel's values, and counts those that are missing. src begins at the first record's first value.
func (r *binaryReader) column(dst []float64, src []byte, ch *channel) int {
	switch r.form {
	case Binary:
		return int16s(dst, src[2*ch.column:], r.record, ch.gain, ch.off)
	case Binary32:
		return int32s(dst, src[4*ch.column:], r.record, ch.gain, ch.off)
	}
	return float32s(dst, src[4*ch.column:], r.record, ch.gain, ch.off)
}

// The three loops below are the same but for the type of x; a common one with a function or a generic type costs twice
// the time. The codes of a missing value are from IEEE C37.111, from memory.

func int16s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	at := 0
	for i := range dst {
		x := int16(binary.LittleEndian.Uint16(src[at:]))
		at += stride
		dst[i] = gain*float64(x) + off
		if x == math.MinInt16 {
			dst[i] = math.NaN()
			missing++
		}
	}
	return missing
}

func int32s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	at := 0
	for i := range dst {
		x := int32(binary.LittleEndian.Uint32(src[at:]))
		at += stride
		dst[i] = gain*float64(x) + off
		if x == math.MinInt32 {
			dst[i] = math.NaN()
			missing++
		}
	}
	return missing
}

func float32s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	at := 0
	for i := range dst {
		x := math.Float32frombits(binary.LittleEndian.Uint32(src[at:]))
		at += stride
		dst[i] = gain*float64(x) + off
		if !(x > -math.MaxFloat32 && x <= math.MaxFloat32) {
			dst[i] = math.NaN()
			missing++
		}
	}
	return missing
}

// cut reports whether a reading ended because a packed file is cut short.
func cut(err error) bool { return errors.Is(err, input.ErrCut) }
