package wav_test

import (
	"bytes"
	"encoding/binary"
	"errors"
	"io"
	"iter"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
	"wavetally/loaders/wav"
)

func recording(rate, seconds float64) wave.Source {
	return synth.New(synth.Recording{Rate: rate, Seconds: seconds, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{
		{Name: "a", Harmonics: []synth.Harmonic{{Order: 1, RMS: 0.5}, {Order: 5, RMS: 0.02}}},
		{Name: "b", Harmonics: []synth.Harmonic{{Order: 1, RMS: 0.1, Angle: 30}}, DC: 0.01}}})
}

func samples(t testing.TB, src wave.Source) [][]float64 {
	t.Helper()
	out := make([][]float64, len(src.Header().Channels))
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		for c := range b.Data {
			out[c] = append(out[c], b.Data[c]...)
		}
	}
	return out
}

func TestWriteAndReadSurvive(t *testing.T) {
	want := samples(t, recording(44100, 0.3))
	for bits, step := range map[int]float64{16: 1.0 / (1 << 15), 24: 1.0 / (1 << 23), 32: 1.0 / (1 << 31), -32: 1e-7, -64: 0} {
		path := filepath.Join(t.TempDir(), "x.wav")
		if err := wav.Write(path, recording(44100, 0.3), bits); err != nil {
			t.Fatal(err)
		}
		src, err := wav.Open(path, input.Options{})
		if err != nil {
			t.Fatal(err)
		}
		h := src.Header()
		if h.Rate != 44100 || h.Samples != int64(len(want[0])) || len(h.Channels) != 2 || len(h.Notes) != 0 {
			t.Errorf("%d bits: header %+v", bits, h)
		}
		got := samples(t, src)
		for c := range want {
			if len(got[c]) != len(want[c]) {
				t.Fatalf("%d bits: %d samples, want %d", bits, len(got[c]), len(want[c]))
			}
			for i := range want[c] {
				if math.Abs(got[c][i]-want[c][i]) > step/2*1.001 {
					t.Fatalf("%d bits: channel %d sample %d is %g, want %g", bits, c, i, got[c][i], want[c][i])
				}
			}
		}
	}
}

func file(t testing.TB) []byte {
	t.Helper()
	path := filepath.Join(t.TempDir(), "x.wav")
	if err := wav.Write(path, recording(8000, 0.01), 16); err != nil {
		t.Fatal(err)
	}
	b, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return b
}

func open(t testing.TB, b []byte) (wave.Source, error) {
	t.Helper()
	path := filepath.Join(t.TempDir(), "x.wav")
	if err := os.WriteFile(path, b, 0o666); err != nil {
		t.Fatal(err)
	}
	return wav.Open(path, input.Options{})
}

func TestCutAtEveryByte(t *testing.T) {
	whole := file(t)
	for n := range whole {
		src, err := open(t, whole[:n])
		if n < 44+4 {
			if err == nil {
				t.Errorf("cut at byte %d, before the first sample is whole: no error", n)
			}
			continue
		}
		if err != nil {
			t.Fatalf("cut at byte %d of the samples: %v", n, err)
		}
		if got, want := len(samples(t, src)[0]), (n-44)/4; got != want {
			t.Errorf("cut at byte %d: %d samples, want the %d whole ones", n, got, want)
		}
		if notes := src.Header().Notes; len(notes) != 1 || notes[0].Code != "truncated" {
			t.Errorf("cut at byte %d: notes %v", n, notes)
		}
	}
}

// Writers that cannot go back leave the size open; others put chunks before the samples, of odd length too.
func TestSizesLeftOpenAndOtherChunks(t *testing.T) {
	whole := file(t)
	want := samples(t, must(open(t, whole)))
	for name, change := range map[string]func([]byte) []byte{
		"size 0":          func(b []byte) []byte { copy(b[40:], []byte{0, 0, 0, 0}); return b },
		"size 0xFFFFFFFF": func(b []byte) []byte { copy(b[40:], []byte{255, 255, 255, 255}); return b },
		"odd chunk": func(b []byte) []byte {
			return append(append(append([]byte(nil), b[:12]...), "note\x03\x00\x00\x00abc\x00"...), b[12:]...)
		},
		"RF64": func(b []byte) []byte {
			ds64 := make([]byte, 36)
			copy(ds64, "ds64")
			binary.LittleEndian.PutUint32(ds64[4:], 28)
			binary.LittleEndian.PutUint64(ds64[16:], uint64(len(b)-44))
			out := append(append(append([]byte(nil), b[:12]...), ds64...), b[12:]...)
			copy(out, "RF64")
			binary.LittleEndian.PutUint32(out[40+36:], 0xFFFFFFFF)
			return append(out, "trailing bytes that are no samples"...)
		},
		"extensible": func(b []byte) []byte {
			long := append(append([]byte(nil), b[:36]...), make([]byte, 24)...)
			binary.LittleEndian.PutUint32(long[16:], 40)
			binary.LittleEndian.PutUint16(long[20:], 0xFFFE)
			binary.LittleEndian.PutUint16(long[44:], 1)
			return append(long, b[36:]...)
		},
	} {
		src, err := open(t, change(bytes.Clone(whole)))
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		got := samples(t, src)
		if len(got[0]) != len(want[0]) || got[1][7] != want[1][7] {
			t.Errorf("%s: %d samples, want %d", name, len(got[0]), len(want[0]))
		}
	}
}

func must(s wave.Source, err error) wave.Source {
	if err != nil {
		panic(err)
	}
	return s
}

func TestErrorsSayWhereAndWhat(t *testing.T) {
	whole := file(t)
	for name, test := range map[string]struct {
		bytes []byte
		want  string
		kind  any
	}{
		"not a sound file": {[]byte("time;V1\n0;1\n1;2\n"), "x.wav: not WAV: it does not start with RIFF or RF64, and WAVE", new(*wave.NotThisFormatError)},
		"no samples":       {whole[:36], `x.wav: byte 36: the file ends before its "data" chunk; copy it again`, new(*wave.ParseError)},
		"no format":        {append(bytes.Clone(whole[:12]), whole[36:]...), `x.wav: byte 12: samples come before the "fmt " chunk that tells their form; convert the file`, new(*wave.ParseError)},
		"no channels":      {with(whole, 22, 0), "x.wav: byte 12: the file has no channels; export it again", new(*wave.ParseError)},
		"compressed":       {with(whole, 20, 85), "x.wav: its samples are stored as MP3, not as PCM or floating point; convert it to PCM of 16 or 24 bits", new(*wave.UnsupportedError)},
	} {
		_, err := open(t, test.bytes)
		if err == nil || err.Error() != test.want || !errors.As(err, test.kind) {
			t.Errorf("%s:\n got %v\nwant %s", name, err, test.want)
		}
	}
}

func with(b []byte, at int, v byte) []byte {
	b = bytes.Clone(b)
	b[at] = v
	return b
}

// firstSecond is the beginning of a recording.
type firstSecond struct{ wave.Source }

func (f firstSecond) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for b, err := range f.Source.Blocks() {
			if err == nil {
				n := min(b.Len(), int(b.Rate))
				for c := range b.Data {
					b.Data[c] = b.Data[c][:n]
				}
			}
			yield(b, err)
			return
		}
	}
}

// A recording of mains made by others, 400 Hz mono: 49.9996 Hz and 1.21 % third harmonic by an independent least-squares
// fit of its first second (shared/real/README.md; over minutes such a fit falls apart, as the frequency wanders).
func TestRealMainsRecording(t *testing.T) {
	path := filepath.FromSlash("../../../shared/real/mains_wav_400hz/092_ref.wav")
	if _, err := os.Stat(path); err != nil {
		t.Skipf("%s is missing: the recording made by others is not there", path)
	}
	src, err := wav.Open(path, input.Options{})
	if err != nil {
		t.Fatal(err)
	}
	sheet := site.Sheet{Channels: []site.Channel{{Source: "CH1", Measures: "V1"}}}
	s, err := harmonics.Measure(t.Context(), firstSecond{src}, sheet, harmonics.Options{})
	if err != nil {
		t.Fatal(err)
	}
	c := s.Channels[0]
	if math.Abs(s.Frequency.Mean-49.9996) > 0.0005 || math.Abs(c.H(3).Pct-1.21) > 0.01 || c.TopOrder != 3 {
		t.Errorf("%.5f Hz, third harmonic %.4f %%, orders to %d; want 49.9996 Hz, 1.21 %%, 3", s.Frequency.Mean, c.H(3).Pct, c.TopOrder)
	}
}

func FuzzReader(f *testing.F) {
	whole := file(f)
	f.Add(whole)
	f.Add(whole[:44])
	f.Add(with(whole, 20, 3))
	f.Add([]byte(strings.Repeat("RIFF\xff\xff\xff\xffWAVE", 3)))
	f.Fuzz(func(t *testing.T, b []byte) {
		src, err := wav.Open("x.wav", input.Options{FS: stream{b, func(r io.Reader) io.Reader { return r }}})
		if err != nil {
			return
		}
		n, failed := int64(0), false
		for b, err := range src.Blocks() {
			if failed = err != nil; failed {
				break
			}
			if b.Len() == 0 || b.At != float64(n)/b.Rate || len(b.Data) != len(src.Header().Channels) {
				t.Errorf("a block of %d samples at %g s, after %d samples", b.Len(), b.At, n)
			}
			n += int64(b.Len())
		}
		if failed || len(src.Header().Channels) > 16 {
			return
		}
		path := filepath.Join(t.TempDir(), "y.wav")
		if err := wav.Write(path, src, -64); err != nil {
			t.Fatal(err)
		}
		x, y := samples(t, src), samples(t, must(wav.Open(path, input.Options{})))
		for c := range x {
			for i, v := range x[c] {
				if w := y[c][i]; v != w && !(math.IsNaN(v) && math.IsNaN(w)) {
					t.Fatalf("channel %d, sample %d: %g became %g", c, i, v, w)
				}
			}
		}
	})
}
