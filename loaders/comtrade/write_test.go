package comtrade_test

import (
	"fmt"
	"iter"
	"math"
	"os"
	"path/filepath"
	"testing"
	"time"

	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/input"
)

// A held recording is a source in memory.
type held struct {
	header wave.Header
	blocks []wave.Block
}

func (h *held) Header() wave.Header { return h.header }
func (h *held) Notes() []wave.Note  { return nil }
func (h *held) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for _, b := range h.blocks {
			if !yield(b, nil) {
				return
			}
		}
	}
}

// A piece is a segment put together from its blocks.
type piece struct {
	at, rate float64
	data     [][]float64
}

// pieces reads a source whole, and checks what every source keeps to.
func pieces(t testing.TB, src wave.Source) []piece {
	t.Helper()
	var all []piece
	id := -1
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		if len(b.Data) != len(src.Header().Channels) || b.Len() == 0 {
			t.Fatalf("block of %d channels and %d samples", len(b.Data), b.Len())
		}
		if b.Segment != id {
			if b.Segment != id+1 {
				t.Fatalf("segment %d follows on segment %d", b.Segment, id)
			}
			id = b.Segment
			all = append(all, piece{b.At, b.Rate, make([][]float64, len(b.Data))})
		}
		p := &all[len(all)-1]
		if want := p.at + float64(len(p.data[0]))/p.rate; b.Rate != p.rate || math.Abs(b.At-want) > 1e-9*(1+want) {
			t.Fatalf("block at %.12g s, %g Hz within a segment where it should be at %.12g s, %g Hz", b.At, b.Rate, want, p.rate)
		}
		for c, row := range b.Data {
			if len(row) != b.Len() {
				t.Fatalf("channel %d has %d samples, the first %d", c, len(row), b.Len())
			}
			p.data[c] = append(p.data[c], row...)
		}
	}
	return all
}

func open(t testing.TB, path string) wave.Source {
	t.Helper()
	src, err := comtrade.Open(path, input.Options{})
	if err != nil {
		t.Fatal(err)
	}
	return src
}

// compare checks that two recordings have the same segments, and samples that differ by no more than each channel's
// tolerance.
func compare(t *testing.T, got, want []piece, tolerance []float64, timing float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%d segments, want %d", len(got), len(want))
	}
	for i, w := range want {
		g := got[i]
		if math.Abs(g.at-w.at) > timing || math.Abs(g.rate-w.rate) > timing*w.rate {
			t.Errorf("segment %d is at %.9g s, %.9g Hz, want %.9g s, %.9g Hz", i, g.at, g.rate, w.at, w.rate)
		}
		for c := range w.data {
			if len(g.data[c]) != len(w.data[c]) {
				t.Fatalf("segment %d has %d samples, want %d", i, len(g.data[c]), len(w.data[c]))
			}
			for n, v := range w.data[c] {
				if x := g.data[c][n]; math.IsNaN(v) != math.IsNaN(x) || math.Abs(x-v) > tolerance[c] {
					t.Fatalf("segment %d, channel %d, sample %d is %.9g, want %.9g within %.3g", i, c, n, x, v, tolerance[c])
				}
			}
		}
	}
}

// invented is a recording with all that a source may have.
func invented() *held {
	h := &held{header: wave.Header{Start: time.Date(2026, 3, 1, 23, 59, 59, 250e6, time.FixedZone("", -5*3600-1800)), HasZone: true,
		Rate: 6400, Nominal: 60, Channels: []wave.Channel{
			{Name: "Spannung, L1", Unit: "V", Phase: "A"},
			{Name: "Ток", Unit: "A", Skew: 12.5e-6},
			{Name: "scaled", Unit: "A", Step: 0.25, Low: -1000, High: 1000},
			{Name: "constant", Unit: "V"},
			{Name: "unknown", Unit: "V"},
		}}}
	add := func(segment int, at, rate float64, n int) {
		b := wave.Block{Segment: segment, At: at, Rate: rate, Data: make([][]float64, 5)}
		for i := range n {
			t := at + float64(i)/rate
			v := 325 * math.Sin(2*math.Pi*60*t)
			b.Data[0] = append(b.Data[0], v)
			b.Data[1] = append(b.Data[1], 3+v/100)
			b.Data[2] = append(b.Data[2], math.Round(v)*0.25)
			b.Data[3] = append(b.Data[3], 230.5)
			b.Data[4] = append(b.Data[4], math.NaN())
		}
		b.Data[0][n/2] = math.NaN()
		h.blocks = append(h.blocks, b)
	}
	add(0, 0, 6400, 3000)
	add(0, 3000/6400., 6400, 200)
	return h
}

func (h *held) segment(at, rate float64, n int) *held {
	b := h.blocks[0]
	next := wave.Block{Segment: h.blocks[len(h.blocks)-1].Segment + 1, At: at, Rate: rate}
	for _, row := range b.Data {
		next.Data = append(next.Data, row[:n])
	}
	h.blocks = append(h.blocks, next)
	return h
}

func TestWhatIsWrittenIsRead(t *testing.T) {
	const end = 0.5 // s, of the first segment
	sources := map[string]*held{
		"plain":             invented(),
		"gap on the grid":   invented().segment(end+100/6400., 6400, 500),
		"gap off the grid":  invented().segment(end+0.123456789, 6400, 500),
		"slow, then fast":   invented().segment(end+0.25, 12800, 500).segment(end+10, 12800, 900),
		"fast, then slow":   invented().segment(end+1, 1600, 500),
		"many short pieces": invented().segment(1, 6400, 100).segment(2.00003, 6400, 40).segment(3.3, 6400, 100),
	}
	spans := []float64{650, 6.5, 163, 0, 0}
	steps := map[string]float64{comtrade.ASCII: 2 * 99990, comtrade.Binary: 2 * 32767, comtrade.Binary32: 4e9, comtrade.Float32: 1 << 23}
	for name, src := range sources {
		for form, n := range steps {
			for _, stem := range []string{"rec", "rec.cff"} {
				t.Run(fmt.Sprintf("%s/%s/%s", name, form, stem), func(t *testing.T) {
					path := filepath.Join(t.TempDir(), stem)
					if err := comtrade.Write(path, src, form); err != nil {
						t.Fatal(err)
					}
					if stem == "rec" {
						path += ".cfg"
					}
					got := open(t, path)
					var tolerance []float64
					for _, span := range spans {
						tolerance = append(tolerance, span/n*0.51+1e-9)
					}
					compare(t, pieces(t, got), pieces(t, src), tolerance, 2e-9)
					checkHeader(t, got.Header(), src.header)
				})
			}
		}
	}
}

func checkHeader(t *testing.T, got, want wave.Header) {
	t.Helper()
	if !got.Start.Equal(want.Start) || !got.HasZone || got.Nominal != want.Nominal || math.Abs(got.Rate-want.Rate) > 1e-6 {
		t.Errorf("header %v %v, %g Hz, rate %g; want %v, %g Hz, rate %g", got.Start, got.HasZone, got.Nominal, got.Rate, want.Start, want.Nominal, want.Rate)
	}
	_, offset := got.Start.Zone()
	if _, w := want.Start.Zone(); offset != w {
		t.Errorf("offset to UTC of %d s, want %d s", offset, w)
	}
	names := []string{"Spannung; L1", "Ток", "scaled", "constant", "unknown"}
	for i, ch := range got.Channels {
		if w := want.Channels[i]; ch.Name != names[i] || ch.Unit != w.Unit || ch.Phase != w.Phase || math.Abs(ch.Skew-w.Skew) > 1e-12 {
			t.Errorf("channel %+v, want %+v", ch, w)
		}
	}
	if ch := got.Channels[2]; got.Files[0].Format != "COMTRADE 2013 FLOAT32" && (ch.Step != 0.25 || ch.Low != -1000 || ch.High != 1000) {
		t.Errorf("step %g, range %g to %g; want 0.25, ±1000", ch.Step, ch.Low, ch.High)
	}
}

// A generated recording of 16 bits comes back to the bit.
func TestSixteenBitsComeBack(t *testing.T) {
	src := synth.New(synth.Recording{Name: "g", Rate: 12800, Seconds: 2, Frequency: synth.Frequency{Hz: 50}, Seed: 1,
		Start:    time.Date(2026, 1, 2, 3, 4, 5, 678901234, time.UTC),
		Channels: []synth.Channel{{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}, Noise: 0.1, Range: 400, Bits: 16}}})
	stem := filepath.Join(t.TempDir(), "rec")
	if err := comtrade.Write(stem, src, comtrade.Binary); err != nil {
		t.Fatal(err)
	}
	got := open(t, stem+".dat")
	compare(t, pieces(t, got), pieces(t, src), []float64{1e-10}, 0)
	if h := got.Header(); !h.Start.Equal(src.Header().Start) || h.Samples != 25600 || len(h.Notes) > 0 || len(got.Notes()) > 0 {
		t.Errorf("start %v, %d samples, notes %v %v", h.Start, h.Samples, h.Notes, got.Notes())
	}
}

// A source that fails, or has nothing, leaves no file behind.
func TestWriteLeavesNothingBehind(t *testing.T) {
	dir := t.TempDir()
	for _, src := range []wave.Source{failing{invented()}, &held{}} {
		if err := comtrade.Write(filepath.Join(dir, "rec"), src, comtrade.Binary); err == nil {
			t.Error("no error")
		}
	}
	if err := comtrade.Write(filepath.Join(dir, "rec"), invented(), "TEXT"); err == nil {
		t.Error("an unknown form gives no error")
	}
	if entries, _ := os.ReadDir(dir); len(entries) > 0 {
		t.Errorf("%v is left", entries)
	}
}

type failing struct{ wave.Source }

func (f failing) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		f.Source.Blocks()(func(b wave.Block, _ error) bool { return yield(b, nil) })
		yield(wave.Block{}, fmt.Errorf("the disk is gone"))
	}
}
