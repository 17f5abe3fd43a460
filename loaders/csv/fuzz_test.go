package csv_test

import (
	"math"
	"testing"
	"testing/fstest"
	"time"

	"wavetally/harmonics/site"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// FuzzReader reads anything at all as a table: it must not panic, must end, and what it hands over must keep the rules
// of package wave.
func FuzzReader(f *testing.F) {
	for _, d := range dialects {
		text := d.w.text()
		f.Add(text[:min(len(text), 2000)], false)
	}
	for _, seed := range []string{"", "\n", "1", "1\n2", "a,b\n1,2\n", "1,2\r3,4", "\"1\",\"2\n3\",4", "\xff\xfe1\x002\x00", "1;2\n\x00\x00\x00\n3;4",
		"t\n1e300\n2e300\n", "time,a\n0,1\n0,2\n0,3\n", "0,1\n9e9,1\n-9e9,1\n", "1 2\n3 4\n5 6", "99:99:99,1\n"} {
		f.Add([]byte(seed), true)
	}
	f.Fuzz(func(t *testing.T, text []byte, rate bool) {
		opt := input.Options{FS: fstest.MapFS{"a.csv": {Data: text, ModTime: time.Unix(1, 0)}}}
		if rate {
			opt.File = site.File{SamplingRate: 1000}
		}
		src, err := csv.Open("a.csv", opt)
		if err != nil {
			if err.Error() == "" {
				t.Error("an error says nothing")
			}
			return
		}
		h := src.Header()
		if !(h.Rate > 0) || math.IsInf(h.Rate, 0) || len(h.Channels) == 0 {
			t.Fatalf("header is %+v", h)
		}
		end, segment, rows := 0.0, 0, 0
		for b, err := range src.Blocks() {
			if err != nil {
				break
			}
			if b.Len() == 0 || len(b.Data) != len(h.Channels) || b.Segment < segment || b.Segment > segment+1 || !(b.At >= end-0.5/b.Rate) {
				t.Fatalf("a block of %d samples in %d channels is at %v in segment %d, after %v in %d", b.Len(), len(b.Data), b.At, b.Segment, end, segment)
			}
			for _, row := range b.Data {
				if len(row) != b.Len() {
					t.Fatal("rows of a block differ in length")
				}
				for _, v := range row {
					if math.IsInf(v, 0) {
						t.Fatal("a sample is infinite")
					}
				}
			}
			segment, end = b.Segment, b.At+float64(b.Len())/b.Rate
			rows += b.Len()
		}
		if rows > len(text)+1 {
			t.Fatalf("%d bytes gave %d rows", len(text), rows)
		}
	})
}
