package wav_test

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"io/fs"
	"iter"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/iotest"
	"time"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
	"wavetally/loaders/wav"
)

var le = binary.LittleEndian

// raw puts a file together: a format chunk, others before the samples, and these.
func raw(code, channels uint16, rate uint32, frame, bits uint16, tail []byte, others string, data []byte) []byte {
	f := le.AppendUint16(nil, code)
	f = le.AppendUint16(f, channels)
	f = le.AppendUint32(f, rate)
	f = le.AppendUint32(f, rate*uint32(frame))
	f = le.AppendUint16(f, frame)
	f = append(le.AppendUint16(f, bits), tail...)
	b := append(le.AppendUint32([]byte("RIFF\xff\xff\xff\xffWAVEfmt "), uint32(len(f))), f...)
	b = le.AppendUint32(append(append(b, others...), "data"...), uint32(len(data)))
	return append(b, data...)
}

// extensible is the tail of a format chunk that tells the bits that count, and the true code.
func extensible(valid, code uint16) []byte {
	t := le.AppendUint16(nil, 22)
	t = le.AppendUint16(t, valid)
	t = le.AppendUint32(t, 0)
	return append(le.AppendUint16(t, code), make([]byte, 14)...)
}

func TestEveryWayToStoreASample(t *testing.T) {
	floats := le.AppendUint32(nil, math.Float32bits(0.75))
	floats = le.AppendUint32(floats, math.Float32bits(float32(math.Inf(-1))))
	doubles := le.AppendUint64(le.AppendUint64(nil, math.Float64bits(-1.5)), math.Float64bits(math.NaN()))
	nan := math.NaN()
	for _, test := range []struct {
		name  string
		bytes []byte
		want  []float64
		step  float64
	}{
		{"8 bits, the only unsigned ones", raw(1, 1, 100, 1, 8, nil, "", []byte{0, 128, 255}), []float64{-1, 0, 127. / 128}, 1. / 128},
		{"16 bits", raw(1, 1, 100, 2, 16, nil, "", []byte{0, 0x80, 1, 0}), []float64{-1, 1. / 32768}, 1. / 32768},
		{"24 bits", raw(1, 1, 100, 3, 24, nil, "", []byte{0, 0, 0x80, 1, 0, 0}), []float64{-1, 1. / (1 << 23)}, 1. / (1 << 23)},
		{"32 bits", raw(1, 1, 100, 4, 32, nil, "", []byte{0, 0, 0, 0x80, 0, 0, 0, 0x40}), []float64{-1, 0.5}, 1. / (1 << 31)},
		{"24 bits in 4 bytes", raw(1, 1, 100, 4, 24, nil, "", []byte{0, 1, 0, 0x40}), []float64{0.5 + 1./(1<<23)}, 1. / (1 << 23)},
		{"24 valid bits of 32", raw(0xFFFE, 1, 100, 4, 32, extensible(24, 1), "", []byte{0, 0, 0, 0xC0}), []float64{-0.5}, 1. / (1 << 23)},
		{"float of 32 bits", raw(3, 1, 100, 4, 32, nil, "", floats), []float64{0.75, nan}, 0},
		{"float of 64 bits", raw(0xFFFE, 1, 100, 8, 64, extensible(64, 3), "", doubles), []float64{-1.5, nan}, 0},
		{"no frame length", raw(1, 1, 100, 0, 16, nil, "", []byte{0, 0x40}), []float64{0.5}, 1. / 32768},
	} {
		src, err := open(t, test.bytes)
		if err != nil {
			t.Errorf("%s: %v", test.name, err)
			continue
		}
		got := samples(t, src)[0]
		if len(got) != len(test.want) || src.Header().Channels[0].Step != test.step {
			t.Errorf("%s: %d samples of step %g, want %d of %g", test.name, len(got), src.Header().Channels[0].Step, len(test.want), test.step)
			continue
		}
		for i, w := range test.want {
			if got[i] != w && !(math.IsNaN(w) && math.IsNaN(got[i])) {
				t.Errorf("%s: sample %d is %.12g, want %.12g", test.name, i, got[i], w)
			}
		}
	}
}

func TestWhatIsOddIsTold(t *testing.T) {
	frames := []byte{1, 0, 2, 0, 3, 0, 4, 0}
	bext := make([]byte, 602)
	copy(bext[320:], "2026-03-0105:06:07")
	infinity := le.AppendUint32(le.AppendUint32(nil, math.Float32bits(1)), math.Float32bits(float32(math.Inf(1))))
	for _, test := range []struct {
		name    string
		bytes   []byte
		opt     input.Options
		code    string
		rate    float64
		samples int64
		start   time.Time
	}{
		{name: "half a frame", bytes: raw(1, 2, 100, 4, 16, nil, "", frames[:6]), code: "truncated", rate: 100, samples: 1},
		{name: "fewer than announced", bytes: raw(1, 2, 100, 4, 16, nil, "", make([]byte, 4000))[:100], code: "truncated", rate: 100, samples: 14},
		{name: "samples that are no numbers", bytes: raw(3, 1, 100, 4, 32, nil, "", infinity), code: "missing-samples", rate: 100, samples: 2},
		{name: "declared rate", bytes: raw(1, 2, 100, 4, 16, nil, "", frames), opt: input.Options{Rate: 200}, code: "rate-overruled", rate: 200, samples: 2},
		{name: "rate only declared", bytes: raw(1, 2, 0, 4, 16, nil, "", frames), opt: input.Options{File: site.File{SamplingRate: 6400}}, rate: 6400, samples: 2},
		{name: "a recorder's clock", bytes: raw(1, 2, 100, 4, 16, nil, "bext\x5a\x02\x00\x00"+string(bext), frames), rate: 100, samples: 2,
			opt: input.Options{Zone: time.FixedZone("", 3600)}, start: time.Date(2026, 3, 1, 4, 6, 7, 0, time.UTC)},
		{name: "a chunk longer than the file, behind the samples", bytes: append(raw(1, 2, 100, 4, 16, nil, "", frames), "LIST\xff\xff\xff\xff"...), rate: 100, samples: 2},
	} {
		path := filepath.Join(t.TempDir(), "x.wav")
		if err := os.WriteFile(path, test.bytes, 0o666); err != nil {
			t.Fatal(err)
		}
		src, err := wav.Open(path, test.opt)
		if err != nil {
			t.Errorf("%s: %v", test.name, err)
			continue
		}
		got := samples(t, src)
		h := src.Header()
		if h.Rate != test.rate || h.Samples != test.samples || int64(len(got[0])) != test.samples || !h.Start.Equal(test.start) {
			t.Errorf("%s: rate %g, %d samples, %d read, start %v", test.name, h.Rate, h.Samples, len(got[0]), h.Start)
		}
		var codes []string
		for _, n := range append(h.Notes, src.Notes()...) {
			codes = append(codes, n.Code)
		}
		if strings.Join(codes, " ") != test.code {
			t.Errorf("%s: notes %q, want %q", test.name, codes, test.code)
		}
	}
}

func TestMoreErrorsSayWhereAndWhat(t *testing.T) {
	for name, test := range map[string]struct {
		bytes []byte
		want  string
	}{
		"no rate":           {raw(1, 1, 0, 2, 16, nil, "", []byte{1, 0}), "x.wav: byte 12: the file states a sampling rate of 0; state sampling_rate under [file] in the site sheet"},
		"no samples":        {raw(1, 1, 100, 2, 16, nil, "", nil), "x.wav: byte 44: it holds no samples; record again"},
		"too many bits":     {raw(1, 1, 100, 2, 24, nil, "", []byte{1, 0}), "x.wav: byte 12: samples of 24 bits cannot be stored in 2 bytes; convert the file"},
		"wide samples":      {raw(1, 1, 100, 8, 64, nil, "", make([]byte, 8)), "x.wav: samples of 8 bytes are not read; convert the file to PCM of 16 or 24 bits"},
		"many channels":     {raw(1, 600, 100, 1200, 16, nil, "", make([]byte, 1200)), "x.wav: it has 600 channels, more than the 512 that are read; export fewer"},
		"big-endian":        {[]byte("RIFX\x00\x00\x00\x00WAVE"), "x.wav: it is a big-endian WAVE file (RIFX); convert it to RIFF"},
		"another RIFF":      {[]byte("RIFF\x00\x00\x00\x00AVI LIST"), "x.wav: not WAV: it does not start with RIFF or RF64, and WAVE"},
		"short format":      {[]byte("RIFF\x00\x00\x00\x00WAVEfmt \x04\x00\x00\x00abcd"), `x.wav: byte 12: the "fmt " chunk has 4 bytes, not 16 or more; convert the file`},
		"format cut":        {[]byte("RIFF\x00\x00\x00\x00WAVEfmt \x10\x00\x00\x00ab"), "x.wav: byte 12: the file ends within this chunk; copy it again"},
		"endless chunk":     {[]byte("RIFF\x00\x00\x00\x00WAVEjunk\xff\xff\xff\xffab"), `x.wav: byte 22: the file ends before its "fmt " chunk; copy it again`},
		"an unknown format": {raw(0x1234, 1, 100, 2, 16, nil, "", []byte{1, 0}), "x.wav: its samples are stored as format 0x1234, not as PCM or floating point; convert it to PCM of 16 or 24 bits"},
	} {
		if _, err := open(t, test.bytes); err == nil || err.Error() != test.want {
			t.Errorf("%s:\n got %v\nwant %s", name, err, test.want)
		}
	}
	if _, err := wav.Open(t.TempDir(), input.Options{}); !errors.As(err, new(*wave.NotThisFormatError)) {
		t.Errorf("a folder: %v", err)
	}
	if _, err := wav.Open("nowhere.wav", input.Options{}); !errors.Is(err, fs.ErrNotExist) {
		t.Errorf("no file: %v", err)
	}
}

// A stream is a file system with one file, read through a filter and not seekable, as in an archive.
type stream struct {
	data   []byte
	filter func(io.Reader) io.Reader
}

func (s stream) Open(name string) (fs.File, error) {
	return &streamFile{s.filter(bytes.NewReader(s.data))}, nil
}

type streamFile struct{ io.Reader }

func (*streamFile) Close() error                 { return nil }
func (f *streamFile) Stat() (fs.FileInfo, error) { return f, nil }
func (*streamFile) Name() string                 { return "x.wav" }
func (*streamFile) Size() int64                  { return -1 }
func (*streamFile) Mode() fs.FileMode            { return 0 }
func (*streamFile) ModTime() time.Time           { return time.Time{} }
func (*streamFile) IsDir() bool                  { return false }
func (*streamFile) Sys() any                     { return nil }

func TestReadersThatDoAsTheyLike(t *testing.T) {
	whole := file(t)
	want := samples(t, must(open(t, whole)))
	for name, filter := range map[string]func(io.Reader) io.Reader{
		"one byte": iotest.OneByteReader, "half": iotest.HalfReader, "data with the error": iotest.DataErrReader,
	} {
		src, err := wav.Open("x.wav", input.Options{FS: stream{whole, filter}})
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		got := samples(t, src)
		if len(got[1]) != len(want[1]) || got[1][len(got[1])-1] != want[1][len(want[1])-1] {
			t.Errorf("%s: %d samples, want %d", name, len(got[1]), len(want[1]))
		}
	}
	broken := errors.New("the disk is broken")
	for _, after := range []int64{0, 20, 44, 100} {
		filter := func(r io.Reader) io.Reader { return io.MultiReader(io.LimitReader(r, after), iotest.ErrReader(broken)) }
		src, err := wav.Open("x.wav", input.Options{FS: stream{whole, filter}})
		if err == nil {
			for _, err = range src.Blocks() {
			}
		}
		if !errors.Is(err, broken) {
			t.Errorf("an error after %d bytes: %v", after, err)
		}
	}
	for _, after := range []int64{46, 60, 101} {
		filter := func(r io.Reader) io.Reader {
			return io.MultiReader(io.LimitReader(r, after), iotest.ErrReader(input.ErrCut))
		}
		src, err := wav.Open("x.wav", input.Options{FS: stream{whole, filter}})
		if err != nil {
			t.Fatal(err)
		}
		n := 0
		for b, e := range src.Blocks() {
			n += b.Len()
			err = e
		}
		if want := int(after-44) / 4; n != want || (err == nil) != (want > 0) || want > 0 && src.Notes()[0].Code != "truncated" {
			t.Errorf("packed and cut after %d bytes: %d samples, want %d; %v, %v", after, n, want, err, src.Notes())
		}
	}
}

func TestWriteSaysWhatItCannotHold(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "x.wav")
	for name, test := range map[string]struct {
		src  wave.Source
		bits int
		want string
	}{
		"no such form": {recording(8000, 0.01), 12, "wav: 12 bits cannot be written; choose 16, 24, 32, -32 or -64"},
		"broken rate":  {recording(8000.5, 0.01), 16, "wav: a rate of 8000.5 samples a second is no whole number; write another format"},
		"too large":    {scaled{recording(8000, 0.01)}, 24, "beyond full scale ±1; scale the recording, or write floating point"},
	} {
		if err := wav.Write(path, test.src, test.bits); err == nil || !strings.HasSuffix(err.Error(), test.want) {
			t.Errorf("%s: %v", name, err)
		}
	}
	if entries, _ := os.ReadDir(dir); len(entries) > 0 {
		t.Errorf("%v is left", entries)
	}
}

type scaled struct{ wave.Source }

func (s scaled) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for b, err := range s.Source.Blocks() {
			for _, row := range b.Data {
				for i := range row {
					row[i] *= 2
				}
			}
			if !yield(b, err) {
				return
			}
		}
	}
}

func BenchmarkRead(b *testing.B) {
	path := filepath.Join(b.TempDir(), "x.wav")
	if err := wav.Write(path, recording(44100, 60), 16); err != nil {
		b.Fatal(err)
	}
	src := must(wav.Open(path, input.Options{}))
	b.SetBytes(44100 * 60 * 4)
	b.ReportAllocs()
	for b.Loop() {
		for _, err := range src.Blocks() {
			if err != nil {
				b.Fatal(err)
			}
		}
	}
}
