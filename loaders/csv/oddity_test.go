package csv_test

import (
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// plain is the dialect that the oddities are put into.
var plain = writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}

// A span is a run of samples that follow on.
type span struct {
	at   float64
	rows int
}

// oddities puts faults into the rows of plain. Row 0 is in line 2.
var oddities = []struct {
	name  string
	row   func(row int, s string) string // "" drops the row, line ends in it add lines
	spans []span
	notes string
}{
	{name: "one row lost", row: func(r int, s string) string { return drop(s, r == 3000) },
		spans: []span{{0, 3000}, {3001 / signalRate, 3399}},
		notes: "gap: The time stamps jump by 0.0003125 s at 0.9375 s: rows are missing there."},
	{name: "rows lost in three places", row: func(r int, s string) string { return drop(s, r == 100 || r >= 200 && r < 300 || r >= 5000 && r < 5010) },
		spans: []span{{0, 100}, {101 / signalRate, 99}, {300 / signalRate, 4700}, {5010 / signalRate, 1390}},
		notes: "gap: The time stamps jump forward in 3 places, by 0.0346875 s in all, first by 0.0003125 s at 0.03125 s: rows are missing there."},
	{name: "clock starts again", row: func(r int, s string) string {
		if r >= 4000 {
			return seconds(7)(r-4000) + s[strings.IndexByte(s, ','):]
		}
		return s
	},
		spans: []span{{0, 4000}, {4000 / signalRate, 2400}},
		notes: "clock-jump: The time stamps go back in 1 place, first at 1.25 s; the rows after it are placed right behind those before."},
	{name: "empty and marked cells", row: func(r int, s string) string {
		f := strings.Split(s, ",")
		switch r {
		case 10:
			f[1], f[2] = "", "OVER"
		case 11:
			f[2] = "---"
		case 20:
			f[3] = "4x7"
		}
		return strings.Join(f, ",")
	},
		spans: []span{{0, 6400}},
		notes: "missing-samples V1: 1 of 6400 samples are empty or marked as missing, first in line 12.|" +
			"missing-samples V2: 2 of 6400 samples are empty or marked as missing, first in line 12.|" +
			`unreadable-samples I1: 1 of 6400 samples are no numbers, first "4x7" in line 22; they count as missing.`},
	{name: "text between rows", row: func(r int, s string) string {
		if r == 500 {
			return "time (s),V1 (V),V2 (V),I1 (A)\n\n" + s
		}
		return s
	},
		spans: []span{{0, 6400}},
		notes: `lines-skipped: 1 line below the first row holds no numbers for the channels, first line 502 ("time (s),V1 (V),V2 (V),I1 (A)"); it is left out.`},
	{name: "a row cut short and one too long", row: func(r int, s string) string {
		switch r {
		case 700:
			return s[:strings.LastIndexByte(s, ',')]
		case 701:
			return s + ",5"
		}
		return s
	},
		spans: []span{{0, 6400}},
		notes: "ragged-rows: 2 rows have too few or too many cells, first line 702; their samples count as missing."},
	{name: "power lost while writing", row: func(r int, s string) string {
		switch {
		case r == 1000:
			return strings.Repeat("\x00", 300)
		case r > 1000 && r < 1010:
			return ""
		}
		return s
	},
		spans: []span{{0, 1000}, {1010 / signalRate, 5390}},
		notes: "gap: The time stamps jump by 0.003125 s at 0.3125 s: rows are missing there.|" +
			"nul-bytes: Line 1002 holds NUL bytes, as files do whose recorder lost power while writing; rows may be missing there."},
	{name: "a time that is no time", row: func(r int, s string) string {
		if r == 40 {
			return "?" + s[strings.IndexByte(s, ','):]
		}
		return s
	},
		spans: []span{{0, 6400}},
		notes: `time-unreadable: The time of 1 row cannot be read, first in line 42 ("?,-230.000,314.186,-4.778"); it is taken to follow on.`},
	{name: "another table below", row: func(r int, s string) string {
		if r == signalRows-1 {
			return s + "\n\norder,V1,V2\n1,230.0,230.0\n3,1.2,1.3\n5,2.2,2.3"
		}
		return s
	},
		spans: []span{{0, 6400}},
		notes: `lines-skipped: 1 line below the first row holds no numbers for the channels, first line 6403 ("order,V1,V2"); it is left out.|` +
			"ragged-rows: 3 rows have too few or too many cells, first line 6404; their samples count as missing."},
}

// TestSnapshotsInOneFile reads a few cycles every ten minutes.
func TestSnapshotsInOneFile(t *testing.T) {
	var b strings.Builder
	b.WriteString("time,V1 (V)\n")
	start := time.Date(2026, 3, 14, 9, 0, 0, 0, time.UTC)
	var want []span
	for shot := range 20 {
		want = append(want, span{float64(shot) * 600, 500})
		for r := range 500 {
			at := start.Add(time.Duration(shot)*10*time.Minute + time.Duration(r)*200*time.Microsecond)
			fmt.Fprintf(&b, "%s,%.2f\n", at.Format("2006-01-02 15:04:05.0000"), sample(0, r))
		}
	}
	src := open(t, b.String(), input.Options{})
	if got := spans(t, src); src.Header().Rate != 5000 || !sameSpans(got, want) {
		t.Errorf("at %v Hz rows are in %v, want %v", src.Header().Rate, got, want)
	}
	const note = "snapshot-series: The recording is 20 snapshots of at most 0.1 s each over 11400.1 s; what happened between them is not known."
	if got := noteTexts(src); got != note {
		t.Errorf("notes are %s, want %s", got, note)
	}
}

func drop(s string, yes bool) string {
	if yes {
		return ""
	}
	return s
}

func TestOddities(t *testing.T) {
	for _, o := range oddities {
		t.Run(o.name, func(t *testing.T) {
			w := plain
			w.row = o.row
			text := strings.ReplaceAll(string(w.text()), "\n\n", "\n")
			if strings.Contains(o.notes, "502") || strings.Contains(o.notes, "order") {
				text = string(w.text())
			}
			src := open(t, text, input.Options{})
			if got := spans(t, src); !sameSpans(got, o.spans) {
				t.Errorf("rows are in %v, want %v", got, o.spans)
			}
			if got := noteTexts(src); got != o.notes {
				t.Errorf("notes are\n%s\nwant\n%s", strings.ReplaceAll(got, "|", "\n"), strings.ReplaceAll(o.notes, "|", "\n"))
			}
		})
	}
}

func open(t *testing.T, text string, opt input.Options) wave.Source {
	t.Helper()
	src, err := csv.Open(file(t, text), opt)
	if err != nil {
		t.Fatal(err)
	}
	return src
}

func file(t *testing.T, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), "signal.csv")
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

// spans collects the runs of samples by their segments.
func spans(t *testing.T, src wave.Source) []span {
	t.Helper()
	var all []span
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		if b.Segment == len(all) {
			all = append(all, span{at: b.At})
		}
		s := &all[b.Segment]
		if want := s.at + float64(s.rows)/b.Rate; math.Abs(b.At-want) > 1e-9 {
			t.Errorf("a block of segment %d is at %v, want %v", b.Segment, b.At, want)
		}
		s.rows += b.Len()
	}
	return all
}

func sameSpans(a, b []span) bool {
	if len(a) != len(b) {
		return false
	}
	for i := range a {
		if math.Abs(a[i].at-b[i].at) > 1e-9 || a[i].rows != b[i].rows {
			return false
		}
	}
	return true
}

func noteTexts(src wave.Source) string {
	var all []string
	for _, n := range append(src.Header().Notes, src.Notes()...) {
		code := n.Code
		if n.Channel != "" {
			code += " " + n.Channel
		}
		all = append(all, code+": "+n.Text)
	}
	return strings.Join(all, "|")
}

func TestTruncatedFile(t *testing.T) {
	text := string(plain.text())
	src := open(t, text[:len(text)-12], input.Options{})
	if got := spans(t, src); !sameSpans(got, []span{{0, signalRows - 1}}) {
		t.Errorf("rows are in %v, want one run of %d", got, signalRows-1)
	}
	const want = "truncated: The last line, 6401, ends in the middle of a row; it is left out."
	if got := noteTexts(src); got != want {
		t.Errorf("notes are %q, want %q", got, want)
	}
	src = open(t, strings.TrimSuffix(text, "\n"), input.Options{})
	if got := spans(t, src); !sameSpans(got, []span{{0, signalRows}}) || noteTexts(src) != "" {
		t.Errorf("without a last line end rows are in %v with notes %q, want all rows and no note", got, noteTexts(src))
	}
}

// TestTruncationAtEveryByte cuts a small file anywhere in its last rows: it never fails for another reason than having
// no rows left, and never makes up a row.
func TestTruncationAtEveryByte(t *testing.T) {
	var b strings.Builder
	b.WriteString("time (ms);V1 (V);I1 (A)\r\n")
	for r := range 40 {
		fmt.Fprintf(&b, "%d,5;%.3f;%.3f\r\n", r, sample(0, r), sample(2, r))
	}
	text := strings.ReplaceAll(b.String(), ".", ",")
	last := 0
	for n := len(text) - 120; n <= len(text); n++ {
		src := open(t, text[:n], input.Options{})
		rows := 0
		for _, s := range spans(t, src) {
			rows += s.rows
		}
		if rows < last || rows > strings.Count(text[:n], ";")/2-1 {
			t.Fatalf("%d bytes give %d rows, after %d before", n, rows, last)
		}
		last = rows
	}
	if last != 40 {
		t.Errorf("the whole file gives %d rows, want 40", last)
	}
}

func TestLocalStampsAreReadInTheZone(t *testing.T) {
	w := plain
	w.head, w.time = "Time,V1 (V),V2 (V),I1 (A)\n", at("2006-01-02 15:04:05.000000")
	zone := time.FixedZone("invented", 5*3600+1800)
	h := open(t, string(w.text()), input.Options{Zone: zone}).Header()
	if want := time.Date(2026, 3, 14, 9, 59, 59, 0, zone); !h.Start.Equal(want) || h.HasZone {
		t.Errorf("start is %v with zone %v, want %v and none", h.Start, h.HasZone, want)
	}
}

func TestAmbiguousDate(t *testing.T) {
	w := plain
	w.head = "Time,V1 (V),V2 (V),I1 (A)\n"
	w.time = func(r int) string {
		return time.Date(2026, 4, 3, 10, 0, 0, 0, time.UTC).Add(time.Duration(float64(r) / signalRate * 1e9)).Format("02/01/2006 15:04:05.000000")
	}
	src := open(t, string(w.text()), input.Options{})
	const want = `date-order-assumed: Day and month in the time stamps could be exchanged; they are read as d/m/y, so the recording starts on 3 April 2026. If it is m/d/y, state time_format under [file] in the site sheet.`
	if got := noteTexts(src); got != want {
		t.Errorf("notes are %q, want %q", got, want)
	}
	src = open(t, string(w.text()), input.Options{File: site.File{TimeFormat: "m/d/y"}})
	if got := src.Header().Start; got.Month() != time.March || got.Day() != 4 || noteTexts(src) != "" {
		t.Errorf("declared as m/d/y the start is %v with notes %q, want 4 March and none", got, noteTexts(src))
	}
}

// TestJitter reads stamps as a computer's clock gives them, off by up to 2 ms: the rate must come out of the many.
func TestJitter(t *testing.T) {
	w := plain
	w.time = func(r int) string {
		return fmt.Sprintf("%.6f", float64(r)/signalRate+2e-3*math.Sin(float64(r)*float64(r)))
	}
	src := open(t, string(w.text()), input.Options{})
	if got := src.Header().Rate; math.Abs(got-signalRate) > 1e-4*signalRate {
		t.Errorf("rate is %v, want %v", got, signalRate)
	}
	if got := spans(t, src); !sameSpans(got, []span{{0, signalRows}}) {
		t.Errorf("rows are in %v, want one run", got)
	}
	if got := strings.TrimSpace(codes(src.Header().Notes)); got != "time-stamps-jitter" {
		t.Errorf("notes are %s, want time-stamps-jitter", got)
	}
}

func TestRateOfCoarseStampsNeedsTheWholeFile(t *testing.T) {
	const rate, rows = 12800, 400_000 // 31 s, stamps to the second: the head sees less than two of them
	var b strings.Builder
	b.WriteString("time,V1 (V)\n")
	for r := range rows {
		fmt.Fprintf(&b, "09:%02d:%02d,%.1f\n", r/rate/60, r/rate%60, 325*math.Sin(2*math.Pi*50*float64(r)/rate))
	}
	src := open(t, b.String(), input.Options{})
	if got := src.Header().Rate; got != rate {
		t.Errorf("rate is %v, want %v", got, rate)
	}
	if got := spans(t, src); !sameSpans(got, []span{{0, rows}}) {
		t.Errorf("rows are in %v, want one run of %d", got, rows)
	}
}

func TestFileThatChangesWhileItIsRead(t *testing.T) {
	path := file(t, string(plain.text()))
	src, err := csv.Open(path, input.Options{})
	if err != nil {
		t.Fatal(err)
	}
	f, err := os.OpenFile(path, os.O_APPEND|os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	fmt.Fprintln(f, "2.0000000,1,2,3")
	var last error
	for _, err := range src.Blocks() {
		last = err
	}
	const want = "signal.csv: the file changed while it was read; wait until it is complete, or copy it, and run again"
	var parse *wave.ParseError
	if !errors.As(last, &parse) || last.Error() != want {
		t.Errorf("error is %v, want %s", last, want)
	}
}

func TestBlocksCanBeLeftAndReadAgain(t *testing.T) {
	src := open(t, string(plain.text()), input.Options{})
	for range 3 {
		for range src.Blocks() {
			break
		}
	}
	if got := spans(t, src); !sameSpans(got, []span{{0, signalRows}}) {
		t.Errorf("rows are in %v, want one run of %d", got, signalRows)
	}
}

// TestTablesBeyondMeasure are refused with a reason, and quickly.
func TestTablesBeyondMeasure(t *testing.T) {
	row := func(cells int, cell string) string { return strings.Repeat(cell+",", cells-1) + cell + "\n" }
	for name, test := range map[string]struct{ text, want string }{
		"endless line":       {strings.Repeat("1.5,", 1<<20), "signal.csv:1: the line is longer than 1 MiB; this is no table with one sample a row: export it so"},
		"quarter of million": {row(250_000, "1") + row(250_000, "2"), "signal.csv: rows have 250000 columns, more than the 8192 that are read; export fewer"},
		"thousand channels":  {row(1000, "1.5") + row(1000, "2.5") + row(1000, "3.5"), "signal.csv:1: rows have 1000 channels, more than the 512 that are read; export fewer, one row a sample"},
	} {
		begin := time.Now()
		_, err := csv.Open(file(t, test.text), input.Options{Rate: 1000})
		if err == nil || err.Error() != test.want {
			t.Errorf("%s: error is %v, want %s", name, err, test.want)
		}
		if took := time.Since(begin); took > 5*time.Second {
			t.Errorf("%s: it took %v", name, took)
		}
	}
}

// TestRateThatChanges reads a recorder's slow stretch, its fast one after a trigger, and the slow one again.
func TestRateThatChanges(t *testing.T) {
	var b strings.Builder
	b.WriteString("time (s),V1 (V)\n")
	at := 0.0
	for r := range 12000 {
		fmt.Fprintf(&b, "%.6f,%d\n", at, r)
		if r >= 4000 && r < 9000 {
			at += 1e-4
		} else {
			at += 1e-3
		}
	}
	src := open(t, b.String(), input.Options{})
	type stretch struct {
		at, rate float64
		rows     int
	}
	var got []stretch
	row := 0
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		for _, v := range b.Data[0] {
			if v != float64(row) {
				t.Fatalf("row %d holds %v", row, v)
			}
			row++
		}
		if n := len(got); n > 0 && got[n-1].rate == b.Rate {
			got[n-1].rows += b.Len()
			continue
		}
		got = append(got, stretch{b.At, b.Rate, b.Len()})
	}
	// The first row after a change is within a step of either rate.
	want := []stretch{{0, 1000, 4001}, {4.0001, 10000, 5000}, {4.501, 1000, 2999}}
	if len(got) != len(want) {
		t.Fatalf("stretches are %v, want %v", got, want)
	}
	for i := range want {
		if math.Abs(got[i].at-want[i].at) > 1.1e-3 || got[i].rate != want[i].rate || math.Abs(float64(got[i].rows-want[i].rows)) > 2 {
			t.Errorf("stretch %d is %v, want %v", i, got[i], want[i])
		}
	}
	const note = "rate-change: The sampling rate changes within the file: 1000 Hz at first, 10000 Hz from 4.001 s, 1000 Hz from 4.501 s."
	if got := noteTexts(src); !strings.HasPrefix(got, "rate-change: The sampling rate changes within the file: 1000 Hz at first, 10000 Hz from 4.00") || strings.Contains(got, "|") {
		t.Errorf("notes are %s, want about %s", got, note)
	}
}
