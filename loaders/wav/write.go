package wav

import (
	"bufio"
	"cmp"
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"

	"wavetally/harmonics/wave"
)

// Write writes a recording as PCM of 16, 24 or 32 bits, or as floating point for -32 and -64. A file beyond 4 GB becomes an
// RF64. The source is read twice, and a complete file appears or none.
//
// The format holds neither names nor units, neither gaps nor rates that are no whole number. A recording with gaps or
// such a rate is an error, and so is a sample beyond full scale, ±1, in PCM. A missing sample is NaN in floating point
// and 0 in PCM, which has no mark for it.
func Write(path string, src wave.Source, bits int) error {
	w := &writer{src: src, float: bits < 0, width: max(bits, -bits) / 8}
	switch bits {
	case 16, 24, 32, -32, -64:
	default:
		return fmt.Errorf("wav: %d bits cannot be written; choose 16, 24, 32, -32 or -64", bits)
	}
	if err := w.survey(); err != nil {
		return err
	}
	f, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		return err
	}
	defer os.Remove(f.Name())
	out := bufio.NewWriterSize(f, readBytes)
	if err = w.write(out); err == nil {
		err = out.Flush()
	}
	if err == nil {
		err = f.Chmod(0o644)
	}
	if err = cmp.Or(err, f.Close()); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}

// A writer writes one file.
type writer struct {
	src    wave.Source
	float  bool
	width  int // bytes of a sample
	frames int64
}

// survey counts the samples, and sees that the format can hold them.
func (w *writer) survey() error {
	h := w.src.Header()
	if h.Rate != math.Trunc(h.Rate) || h.Rate < 1 || h.Rate > math.MaxUint32 {
		return fmt.Errorf("wav: a rate of %g samples a second is no whole number; write another format", h.Rate)
	}
	if n := len(h.Channels); n == 0 || n > math.MaxUint16/w.width {
		return fmt.Errorf("wav: %d channels cannot be written", n)
	}
	for b, err := range w.src.Blocks() {
		if err != nil {
			return err
		}
		if b.Segment > 0 {
			return fmt.Errorf("wav: the recording has a gap at %g s, which the format cannot hold; write another", b.At)
		}
		w.frames += int64(b.Len())
		for c, row := range b.Data {
			for _, v := range row {
				if !w.float && math.Abs(v) > 1 {
					return fmt.Errorf("wav: a sample of %s is %g, beyond full scale ±1; scale the recording, or write floating point", h.Channels[c].Name, v)
				}
			}
		}
	}
	if w.frames == 0 {
		return fmt.Errorf("wav: the recording has no samples")
	}
	return nil
}

func (w *writer) write(out io.Writer) error {
	if _, err := out.Write(w.opening()); err != nil {
		return err
	}
	var buf []byte
	for b, err := range w.src.Blocks() {
		if err != nil {
			return err
		}
		buf = buf[:0]
		for i := range b.Len() {
			for _, row := range b.Data {
				buf = w.sample(buf, row[i])
			}
		}
		if _, err := out.Write(buf); err != nil {
			return err
		}
	}
	if w.bytes()%2 == 1 {
		_, err := out.Write([]byte{0})
		return err
	}
	return nil
}

func (w *writer) bytes() int64 { return w.frames * int64(w.frame()) }

func (w *writer) frame() int { return w.width * len(w.src.Header().Channels) }

// opening is the file up to the first sample.
func (w *writer) opening() []byte {
	h := w.src.Header()
	le := binary.LittleEndian
	var format []byte
	code := uint16(codePCM)
	if w.float {
		code = codeFloat
	}
	format = le.AppendUint16(format, code)
	format = le.AppendUint16(format, uint16(len(h.Channels)))
	format = le.AppendUint32(format, uint32(h.Rate))
	format = le.AppendUint32(format, uint32(min(h.Rate*float64(w.frame()), math.MaxUint32)))
	format = le.AppendUint16(format, uint16(w.frame()))
	format = le.AppendUint16(format, uint16(8*w.width))

	chunks := chunk(nil, "fmt ", format)
	id, total, length := "RIFF", 4+int64(len(chunks))+8+w.bytes()+w.bytes()%2, w.bytes()
	if total > math.MaxUint32 {
		sizes := le.AppendUint64(nil, uint64(total+36))
		sizes = le.AppendUint64(sizes, uint64(w.bytes()))
		sizes = le.AppendUint64(sizes, uint64(w.frames))
		chunks = append(chunk(nil, "ds64", le.AppendUint32(sizes, 0)), chunks...)
		id, total, length = "RF64", math.MaxUint32, math.MaxUint32
	}
	head := le.AppendUint32([]byte(id), uint32(total))
	head = append(append(head, "WAVE"...), chunks...)
	return le.AppendUint32(append(head, "data"...), uint32(length))
}

func chunk(to []byte, id string, body []byte) []byte {
	return append(binary.LittleEndian.AppendUint32(append(to, id...), uint32(len(body))), body...)
}

func (w *writer) sample(buf []byte, v float64) []byte {
	switch {
	case w.float && w.width == 4:
		return binary.LittleEndian.AppendUint32(buf, math.Float32bits(float32(v)))
	case w.float:
		return binary.LittleEndian.AppendUint64(buf, math.Float64bits(v))
	}
	if math.IsNaN(v) {
		v = 0
	}
	full := math.Ldexp(1, 8*w.width-1)
	x := uint32(int32(min(math.Round(v*full), full-1)))
	for i := range w.width {
		buf = append(buf, byte(x>>(8*i)))
	}
	return buf
}
