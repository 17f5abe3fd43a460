package harmonics_test

import (
	"context"
	"fmt"
	"iter"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
)

// A held recording is in memory, so that a benchmark measures the analysis alone.
type held struct {
	header wave.Header
	blocks []wave.Block
}

func hold(src wave.Source) *held {
	h := &held{header: src.Header()}
	for b, err := range src.Blocks() {
		if err != nil {
			panic(err)
		}
		data := make([][]float64, len(b.Data))
		for c := range data {
			data[c] = append([]float64(nil), b.Data[c]...)
		}
		b.Data = data
		h.blocks = append(h.blocks, b)
	}
	return h
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

func eightChannels(rate, seconds float64) (synth.Recording, []string) {
	r := synth.Recording{Rate: rate, Seconds: seconds, Frequency: synth.Frequency{Hz: 50, Wander: []synth.Wander{{Hz: 0.02, Period: 60}}}, Seed: 7}
	roles := []string{"V1", "V2", "V3", "VN", "I1", "I2", "I3", "IN"}
	for k, name := range roles {
		unit, rms := "V", 230.0
		if name[0] == 'I' {
			unit, rms = "A", 100
		}
		r.Channels = append(r.Channels, synth.Channel{Name: name, Unit: unit, Harmonics: synth.Delayed(distorted(rms), float64(k%4)/3), Noise: rms / 1000, Range: 4 * rms, Bits: 16})
	}
	return r, roles
}

func BenchmarkMeasure(b *testing.B) {
	r, roles := eightChannels(12800, 40)
	src := hold(synth.New(r))
	samples := float64(len(roles)) * r.Rate * r.Seconds
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprint(workers, "workers"), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := harmonics.Measure(context.Background(), src, sheetFor(50, roles...), harmonics.Options{Workers: workers}); err != nil {
					b.Fatal(err)
				}
			}
			b.ReportMetric(samples*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
		})
	}
}
