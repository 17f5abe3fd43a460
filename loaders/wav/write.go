package wav

import (
	"bufio"
	"encoding/binary"
	"fmt"
	"math"
	"os"

	"wavetally/harmonics/wave"
)

// Write writes a recording as PCM of 16, 24 or 32 bits, or as float for -32 and -64. Full scale is 1: a sample beyond is
// held at full scale; a missing one is written as 0. The recording must be of one segment.
func Write(path string, src wave.Source, bits int) (err error) {
	l := layout{tag: tagPCM, channels: len(src.Header().Channels), bytes: bits / 8, rate: src.Header().Rate}
	if bits < 0 {
		l.tag, l.bytes = tagFloat, -bits/8
	}
	f, err := os.Create(path)
	if err != nil {
		return err
	}
	defer func() {
		if e := f.Close(); err == nil {
			err = e
		}
	}()
	w := bufio.NewWriterSize(f, 1<<20)
	w.Write(make([]byte, 44))
	var size int64
	var sample [8]byte
	for b, err := range src.Blocks() {
		if err != nil {
			return err
		}
		if b.Segment != 0 {
			return fmt.Errorf("%s: a WAV file cannot hold gaps", path)
		}
		for i := range b.Len() {
			for c := range b.Data {
				l.encode(sample[:], b.Data[c][i])
				w.Write(sample[:l.bytes])
			}
		}
		size += int64(b.Len()) * l.frame()
	}
	if err := w.Flush(); err != nil {
		return err
	}
	_, err = f.WriteAt(l.head(size), 0)
	return err
}

func (l layout) encode(dst []byte, v float64) {
	switch {
	case l.tag == tagFloat && l.bytes == 4:
		binary.LittleEndian.PutUint32(dst, math.Float32bits(float32(v)))
	case l.tag == tagFloat:
		binary.LittleEndian.PutUint64(dst, math.Float64bits(v))
	default:
		if math.IsNaN(v) {
			v = 0
		}
		full := math.Ldexp(1, 8*l.bytes-1)
		binary.LittleEndian.PutUint64(dst, uint64(int64(math.Max(-full, math.Min(full-1, math.RoundToEven(v*full))))))
	}
}

func (l layout) head(size int64) []byte {
	h := make([]byte, 0, 44)
	h = append(h, "RIFF"...)
	h = binary.LittleEndian.AppendUint32(h, uint32(36+size))
	h = append(h, "WAVEfmt "...)
	h = binary.LittleEndian.AppendUint32(h, 16)
	h = binary.LittleEndian.AppendUint16(h, uint16(l.tag))
	h = binary.LittleEndian.AppendUint16(h, uint16(l.channels))
	h = binary.LittleEndian.AppendUint32(h, uint32(l.rate))
	h = binary.LittleEndian.AppendUint32(h, uint32(int64(l.rate)*l.frame()))
	h = binary.LittleEndian.AppendUint16(h, uint16(l.frame()))
	h = binary.LittleEndian.AppendUint16(h, uint16(8*l.bytes))
	h = append(h, "data"...)
	return binary.LittleEndian.AppendUint32(h, uint32(size))
}
