package csv_test

import (
	"runtime"
	"testing"

	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// withWorkers reads a recording on so many processors; each block's time and length are among the result.
func withWorkers(t *testing.T, path string, workers int) []float64 {
	t.Helper()
	defer runtime.GOMAXPROCS(runtime.GOMAXPROCS(workers))
	src, err := csv.Open(path, input.Options{})
	if err != nil {
		t.Fatal(err)
	}
	var all []float64
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, b.At, float64(b.Len()))
		for _, d := range b.Data {
			all = append(all, d...)
		}
	}
	return all
}
