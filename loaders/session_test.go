package loaders_test

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders"
)

const rate = 2000.0 // samples per second of all recordings here

// ramp is sample n of a channel: its number and the channel's, so that every sample tells where it belongs.
func ramp(channel, n int) float64 { return float64(channel)*1e6 + float64(n) }

// table writes rows [from, to) of the named channels as a table whose times are written by stamp.
func table(names []string, from, to int, stamp func(n int) string) string {
	var b strings.Builder
	head := "time (s)"
	if stamp != nil && strings.Contains(stamp(0), ":") {
		head = "time"
	}
	if stamp != nil {
		b.WriteString(head + ",")
	}
	for i, n := range names {
		if i > 0 {
			b.WriteByte(',')
		}
		b.WriteString(n + " (V)")
	}
	for n := from; n < to; n++ {
		b.WriteByte('\n')
		if stamp != nil {
			b.WriteString(stamp(n) + ",")
		}
		for c := range names {
			if c > 0 {
				b.WriteByte(',')
			}
			fmt.Fprint(&b, ramp(c, n))
		}
	}
	return b.String() + "\n"
}

// clock stamps with date and time of day, at n samples after an invented start.
func clock(n int) string {
	return time.Date(2026, 5, 4, 3, 2, 1, 0, time.UTC).Add(time.Duration(n) * time.Second / rate).Format("2006-01-02T15:04:05.000000Z")
}

// since stamps with seconds from sample zero on.
func since(zero int) func(n int) string {
	return func(n int) string { return fmt.Sprintf("%.4f", float64(n-zero)/rate) }
}

// folder writes files, by name, and returns their paths in natural order.
func folder(t *testing.T, files map[string]string) []string {
	t.Helper()
	dir := t.TempDir()
	for name, text := range files {
		if err := os.WriteFile(filepath.Join(dir, name), []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	paths, err := loaders.Expand([]string{dir})
	if err != nil {
		t.Fatal(err)
	}
	return paths
}

// A stretch is a run of samples that follow on: its time, and the numbers of its first sample and the one behind it.
type stretch struct {
	at       float64
	from, to int
}

// stretches reads a recording of ramps.
func stretches(t *testing.T, src wave.Source, names string) []stretch {
	t.Helper()
	var got []string
	for _, c := range src.Header().Channels {
		got = append(got, c.Name)
	}
	if strings.Join(got, " ") != names {
		t.Fatalf("channels are %v, want %s", got, names)
	}
	var all []stretch
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		if b.Segment == len(all) {
			all = append(all, stretch{b.At, int(b.Data[0][0]), int(b.Data[0][0])})
		}
		s := &all[len(all)-1]
		if want := s.at + float64(s.to-s.from)/rate; b.Segment != len(all)-1 || math.Abs(b.At-want) > 1e-9 {
			t.Errorf("a block of segment %d is at %v, want %v", b.Segment, b.At, want)
		}
		for i := range b.Len() {
			for c := range b.Data {
				if want := ramp(c, s.to); b.Data[c][i] != want {
					t.Fatalf("channel %d holds %v, want %v", c, b.Data[c][i], want)
				}
			}
			s.to++
		}
	}
	return all
}

var sessions = []struct {
	name  string
	files map[string]string
	want  []stretch
	names string // of the channels; "V1 V2" when empty
	notes string // codes
}{
	{name: "one after the other, by start",
		files: map[string]string{"b.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "a.csv": table([]string{"V1", "V2"}, 5000, 9000, clock)},
		want:  []stretch{{0, 0, 9000}}},
	{name: "other order of columns",
		files: map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "b.csv": swapped(5000, 6000)},
		want:  []stretch{{0, 0, 6000}}},
	{name: "gap",
		files: map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 8000, clock), "b.csv": table([]string{"V1", "V2"}, 9000, 17000, clock)},
		want:  []stretch{{0, 0, 8000}, {4.5, 9000, 17000}}, notes: "gap"},
	{name: "overlap",
		files: map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "b.csv": table([]string{"V1", "V2"}, 4000, 9000, clock)},
		want:  []stretch{{0, 0, 5000}, {2.5, 5000, 9000}}, notes: "overlap"},
	{name: "the same file under two names",
		files: map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "b.csv": table([]string{"V1", "V2"}, 0, 5000, clock)},
		want:  []stretch{{0, 0, 5000}}, notes: "overlap"},
	{name: "snapshots",
		files: map[string]string{"s1.csv": table([]string{"V1", "V2"}, 0, 400, clock), "s2.csv": table([]string{"V1", "V2"}, 20000, 20400, clock), "s10.csv": table([]string{"V1", "V2"}, 40000, 40400, clock)},
		want:  []stretch{{0, 0, 400}, {10, 20000, 20400}, {20, 40000, 40400}}, notes: "snapshot-series"},
	{name: "times run on from file to file",
		files: map[string]string{"b.csv": table([]string{"V1", "V2"}, 0, 5000, since(0)), "a.csv": table([]string{"V1", "V2"}, 5000, 9000, since(0))},
		want:  []stretch{{0, 0, 9000}}},
	{name: "times start anew in each file",
		files: map[string]string{"rec2.csv": table([]string{"V1", "V2"}, 0, 5000, since(0)), "rec10.csv": table([]string{"V1", "V2"}, 5000, 9000, since(5000))},
		want:  []stretch{{0, 0, 5000}, {2.5, 5000, 9000}}, notes: "order-assumed"},
	{name: "side by side, by the channels' names",
		files: map[string]string{"scope_a.csv": table([]string{"V1"}, 0, 5000, since(2500)), "scope_b.csv": second(0, 5000, "V2", since(2500))},
		want:  []stretch{{0, 0, 5000}}},
	{name: "side by side, by the files' names",
		files: map[string]string{"F01CH1.csv": table([]string{"Volt"}, 0, 5000, since(2500)), "F01CH2.csv": second(0, 5000, "Volt", since(2500))},
		want:  []stretch{{0, 0, 5000}}, names: "CH1 CH2"},
	{name: "side by side, by start, one of them shorter",
		files: map[string]string{"a.csv": table([]string{"V1"}, 0, 5000, clock), "b.csv": second(0, 4000, "V2", clock)},
		want:  []stretch{{0, 0, 4000}}, notes: "different-lengths"},
	{name: "a letter among the recordings",
		files: map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "readme.txt": "These were made up.\n"},
		want:  []stretch{{0, 0, 5000}}, notes: "file-skipped"},
	{name: "side by side, and one after the other",
		files: map[string]string{"u1.csv": table([]string{"V1"}, 0, 4000, clock), "u2.csv": second(0, 4000, "V2", clock),
			"w1.csv": table([]string{"V1"}, 4000, 6000, clock), "w2.csv": second(4000, 6000, "V2", clock)},
		want: []stretch{{0, 0, 6000}}},
}

// swapped has the second channel first.
func swapped(from, to int) string {
	var b strings.Builder
	b.WriteString("time,V2 (V),V1 (V)\n")
	for n := from; n < to; n++ {
		fmt.Fprintf(&b, "%s,%v,%v\n", clock(n), ramp(1, n), ramp(0, n))
	}
	return b.String()
}

// second has the second channel alone, called name.
func second(from, to int, name string, stamp func(int) string) string {
	var b strings.Builder
	fmt.Fprintf(&b, "time,%s (V)\n", name)
	if !strings.Contains(stamp(0), ":") {
		b.Reset()
		fmt.Fprintf(&b, "time (s),%s (V)\n", name)
	}
	for n := from; n < to; n++ {
		fmt.Fprintf(&b, "%s,%v\n", stamp(n), ramp(1, n))
	}
	return b.String()
}

func TestSessions(t *testing.T) {
	for _, s := range sessions {
		t.Run(s.name, func(t *testing.T) {
			src, err := loaders.Open(folder(t, s.files), loaders.Options{})
			if err != nil {
				t.Fatal(err)
			}
			names := s.names
			if names == "" {
				names = "V1 V2"
			}
			got := stretches(t, src, names)
			same := len(got) == len(s.want)
			for i := 0; same && i < len(got); i++ {
				same = math.Abs(got[i].at-s.want[i].at) < 1e-9 && got[i].from == s.want[i].from && got[i].to == s.want[i].to
			}
			if !same {
				t.Errorf("samples are in %v, want %v", got, s.want)
			}
			var codes []string
			for _, n := range append(src.Header().Notes, src.Notes()...) {
				codes = append(codes, n.Code)
			}
			if got := strings.Join(codes, " "); got != s.notes {
				t.Errorf("notes are %q, want %q", got, s.notes)
			}
			if got, want := len(src.Header().Files), len(s.files)-strings.Count(s.notes, "file-skipped"); got != want {
				t.Errorf("header names %d files, want %d", got, want)
			}
		})
	}
}

func TestFilesThatDoNotGoTogether(t *testing.T) {
	for name, test := range map[string]struct {
		files map[string]string
		want  string
	}{
		"other channels": {map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 500, clock), "b.csv": table([]string{"V1", "V3"}, 500, 900, clock)},
			"b.csv: its channels are V1, V3, those of a.csv are V1, V2; name files of one recorder setting together"},
		"other units": {map[string]string{"a.csv": table([]string{"V1"}, 0, 500, clock), "b.csv": strings.Replace(table([]string{"V1"}, 500, 900, clock), "(V)", "(A)", 1)},
			`b.csv: channel "V1" is in "A", in a.csv it is in "V"; name files of one recorder setting together`},
		"no start": {map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 500, clock), "b.csv": table([]string{"V1", "V2"}, 500, 900, since(500))},
			"b.csv: it does not say when it starts, but a.csv does; name them apart, or give the recorder's files only"},
	} {
		t.Run(name, func(t *testing.T) {
			_, err := loaders.Open(folder(t, test.files), loaders.Options{})
			if err == nil || err.Error() != test.want {
				t.Errorf("error is %v, want %s", err, test.want)
			}
		})
	}
}

func TestErrorInTheMiddleOfASession(t *testing.T) {
	bad := table([]string{"V1", "V2"}, 5000, 60000, clock) + strings.Repeat("x", 3<<20)
	src, err := loaders.Open(folder(t, map[string]string{"a.csv": table([]string{"V1", "V2"}, 0, 5000, clock), "b.csv": bad}), loaders.Options{})
	if err != nil {
		t.Fatal(err)
	}
	var last error
	rows := 0
	for b, err := range src.Blocks() {
		rows += b.Len()
		last = err
	}
	const want = "b.csv:55002: the line is longer than 1 MiB; the file is damaged from here on: export it again"
	var parse *wave.ParseError
	if !errors.As(last, &parse) || last.Error() != want || rows != 60000 {
		t.Errorf("after %d rows the error is %v, want %s after 60000", rows, last, want)
	}
}
