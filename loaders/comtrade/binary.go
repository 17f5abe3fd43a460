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
	steady  bool      // the numbers count up; those and the stamps of the first and last record alone are filled in
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
	stamped  bool // the stamps of all records are wanted

	buf  []byte
	have []byte // of buf, not yet used
	err  error
	rows int64
	rest int64 // bytes of an incomplete last record
}

func newBinaryReader(r io.Reader, s *source) *binaryReader {
	return &binaryReader{r: r, channels: s.channels, form: s.form, record: s.record, stamped: len(s.sections) == 0,
		buf: make([]byte, max(1, readBytes/s.record)*s.record)}
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
	r.values(b, r.have[8:length])
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
	if b.steady = !r.stamped && steady(src, r.record); b.steady {
		b.head(0, src)
		b.head(b.rows-1, src[(b.rows-1)*r.record:])
		return
	}
	for i := range b.rows {
		b.head(i, src[i*r.record:])
	}
}

// steady reports whether the numbers of all records count up, as they nearly always do.
func steady(src []byte, record int) bool {
	number := le32(src)
	for len(src) > record {
		src = src[record:]
		number++
		if le32(src) != number {
			return false
		}
	}
	return true
}

// head sets the number and stamp of row i.
func (b *batch) head(i int, record []byte) {
	b.numbers[i] = int64(le32(record))
	stamp := le32(record[4:])
	b.stamps[i] = float64(stamp)
	if stamp == noStamp {
		b.stamps[i] = math.NaN()
	}
}

// values reads all channels' values. src begins at the first record's first value.
func (r *binaryReader) values(b *batch, src []byte) {
	for c := 0; c < len(r.channels); {
		if r.form == Binary && r.four(b, c, src) {
			c += 4
			continue
		}
		ch, dst := &r.channels[c], b.data[c][:b.rows]
		if missing := r.column(dst, src, ch); missing > 0 {
			b.odd.missing[c].many(missing, r.rows, dst)
		}
		c++
	}
}

// four reads four neighbouring channels of 16 bits at once, in half the time. It reports false where there are none, or
// a value is missing.
func (r *binaryReader) four(b *batch, c int, src []byte) bool {
	if c+4 > len(r.channels) {
		return false
	}
	ch := (*[4]channel)(r.channels[c:])
	if ch[3].column != ch[0].column+3 {
		return false
	}
	return int16x4((*[4][]float64)(b.data[c:]), b.rows, src[2*ch[0].column:], r.record, ch)
}

// column reads one channel's values, and counts those that are missing.
func (r *binaryReader) column(dst []float64, src []byte, ch *channel) int {
	switch r.form {
	case Binary:
		return int16s(dst, src[2*ch.column:], r.record, ch.gain, ch.off)
	case Binary32:
		return int32s(dst, src[4*ch.column:], r.record, ch.gain, ch.off)
	}
	return float32s(dst, src[4*ch.column:], r.record, ch.gain, ch.off)
}

// The loops below are the same but for the type of x; a common one with a function or a generic type takes twice the
// time. The codes of a missing value are from IEEE C37.111, from memory.

func int16x4(dst *[4][]float64, rows int, src []byte, stride int, ch *[4]channel) bool {
	d0, d1, d2, d3 := dst[0][:rows], dst[1][:rows], dst[2][:rows], dst[3][:rows]
	g0, g1, g2, g3 := ch[0].gain, ch[1].gain, ch[2].gain, ch[3].gain
	o0, o1, o2, o3 := ch[0].off, ch[1].off, ch[2].off, ch[3].off
	for i := range d0 {
		w := binary.LittleEndian.Uint64(src)
		x0, x1, x2, x3 := int16(w), int16(w>>16), int16(w>>32), int16(w>>48)
		if x0 == math.MinInt16 || x1 == math.MinInt16 || x2 == math.MinInt16 || x3 == math.MinInt16 {
			return false
		}
		d0[i] = g0*float64(x0) + o0
		d1[i] = g1*float64(x1) + o1
		d2[i] = g2*float64(x2) + o2
		d3[i] = g3*float64(x3) + o3
		src = src[min(stride, len(src)):]
	}
	return true
}

func int16s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	for i := range dst {
		x := int16(binary.LittleEndian.Uint16(src))
		dst[i] = gain*float64(x) + off
		if x == math.MinInt16 {
			dst[i] = math.NaN()
			missing++
		}
		src = src[min(stride, len(src)):]
	}
	return missing
}

func int32s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	for i := range dst {
		x := int32(binary.LittleEndian.Uint32(src))
		dst[i] = gain*float64(x) + off
		if x == math.MinInt32 {
			dst[i] = math.NaN()
			missing++
		}
		src = src[min(stride, len(src)):]
	}
	return missing
}

func float32s(dst []float64, src []byte, stride int, gain, off float64) (missing int) {
	for i := range dst {
		x := math.Float32frombits(binary.LittleEndian.Uint32(src))
		dst[i] = gain*float64(x) + off
		if !(x > -math.MaxFloat32 && x <= math.MaxFloat32) {
			dst[i] = math.NaN()
			missing++
		}
		src = src[min(stride, len(src)):]
	}
	return missing
}

// cut reports whether a reading ended because a packed file is cut short.
func cut(err error) bool { return errors.Is(err, input.ErrCut) }
