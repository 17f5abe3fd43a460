package comtrade_test

import (
	"os"
	"path/filepath"
	"testing"
	"time"

	"wavetally/harmonics/synth"
	"wavetally/loaders/comtrade"
)

// BenchmarkRead reads eight channels at 12.8 kHz. The rate in MB/s is of the data file.
func BenchmarkRead(b *testing.B) {
	rec := synth.Recording{Name: "bench", Rate: 12800, Seconds: 20, Frequency: synth.Frequency{Hz: 50}, Start: time.Unix(0, 0).UTC()}
	for _, name := range []string{"V1", "V2", "V3", "VN", "I1", "I2", "I3", "IN"} {
		rec.Channels = append(rec.Channels, synth.Channel{Name: name, Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}, Range: 400, Bits: 16})
	}
	for _, form := range []string{comtrade.Binary, comtrade.Binary32, comtrade.Float32, comtrade.ASCII} {
		b.Run(form, func(b *testing.B) {
			stem := filepath.Join(b.TempDir(), "rec")
			if err := comtrade.Write(stem, synth.New(rec), form); err != nil {
				b.Fatal(err)
			}
			info, err := os.Stat(stem + ".dat")
			if err != nil {
				b.Fatal(err)
			}
			src := open(b, stem+".cfg")
			b.SetBytes(info.Size())
			b.ReportAllocs()
			for b.Loop() {
				for _, err := range src.Blocks() {
					if err != nil {
						b.Fatal(err)
					}
				}
			}
			b.ReportMetric(float64(src.Header().Samples)*8*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
		})
	}
}
