package csv_test

import (
	"bufio"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// benchFile writes ten seconds of eight channels at 12.8 kHz, as recorders export them.
func benchFile(b *testing.B) (path string, rows int) {
	b.Helper()
	path, rows = filepath.Join(b.TempDir(), "bench.csv"), 128_000
	f, err := os.Create(path)
	if err != nil {
		b.Fatal(err)
	}
	defer f.Close()
	w := bufio.NewWriter(f)
	fmt.Fprintln(w, "time_s,V1 (V),V2 (V),V3 (V),VN (V),I1 (A),I2 (A),I3 (A),IN (A)")
	for r := range rows {
		t := float64(r) / 12800
		fmt.Fprintf(w, "%.7f", t)
		for c := range 8 {
			fmt.Fprintf(w, ",%.4f", 325*math.Sin(2*math.Pi*50*t-float64(c)))
		}
		w.WriteByte('\n')
	}
	if err := w.Flush(); err != nil {
		b.Fatal(err)
	}
	return path, rows
}

// BenchmarkBlocks reads rows into blocks.
func BenchmarkBlocks(b *testing.B) {
	path, rows := benchFile(b)
	src, err := csv.Open(path, input.Options{})
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		for _, err := range src.Blocks() {
			if err != nil {
				b.Fatal(err)
			}
		}
	}
	b.ReportMetric(float64(rows)*8*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msamples/s")
}

// BenchmarkOpenSnapshot opens a recorder's snapshot of a few cycles, of which a session may have thousands.
func BenchmarkOpenSnapshot(b *testing.B) {
	w := plain
	w.row = func(r int, s string) string { return drop(s, r >= 640) }
	path := filepath.Join(b.TempDir(), "snapshot.csv")
	if err := os.WriteFile(path, []byte(strings.TrimRight(string(w.text()), "\n")+"\n"), 0o600); err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := csv.Open(path, input.Options{}); err != nil {
			b.Fatal(err)
		}
	}
}

// BenchmarkOpen understands a table and finds its rate.
func BenchmarkOpen(b *testing.B) {
	path, _ := benchFile(b)
	b.ReportAllocs()
	for b.Loop() {
		if _, err := csv.Open(path, input.Options{}); err != nil {
			b.Fatal(err)
		}
	}
}
