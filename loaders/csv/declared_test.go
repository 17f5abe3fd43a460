package csv_test

import (
	"errors"
	"fmt"
	"strings"
	"testing"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// TestDeclarationsThatCannotBe names what is wrong with the site sheet's file table, and what would do.
func TestDeclarationsThatCannotBe(t *testing.T) {
	stamped := plain
	stamped.head, stamped.time = "when,V1 (V),V2 (V),I1 (A)\n", at("2006-01-02 15:04:05.000000")
	ten := 10_000
	for _, test := range []struct {
		w    writing
		file site.File
		want string
	}{
		{plain, site.File{Delimiter: "::"}, `signal.csv: delimiter "::" in the site sheet is not one character; use one such as ";", or "tab"`},
		{plain, site.File{Decimal: "'"}, `signal.csv: decimal "'" in the site sheet is not a decimal mark; use "." or ","`},
		{plain, site.File{Encoding: "klingon"}, `signal.csv: encoding "klingon" is not known; use an IANA name such as utf-8, utf-16, windows-1252, iso-8859-1, gb18030`},
		{plain, site.File{HeaderLines: &ten}, `signal.csv: header_lines = 10000 in the site sheet leaves no row of numbers; state the number of lines above the first row`},
		{plain, site.File{TimeColumn: "V9"}, `signal.csv: time_column = "V9" in the site sheet is no column of this table (it has "time", "V1", "V2", "I1"); name one, or "none"`},
		{plain, site.File{TimeFormat: "weeks"}, `signal.csv: time_format = "weeks" in the site sheet is not known; use "s", "ms", "us", "index", "d/m/y", "m/d/y" or "iso"`},
		{plain, site.File{TimeFormat: "d/m/y"}, `signal.csv:2: time_format = "d/m/y", but the time column holds plain numbers; use "s", "ms", "us" or "index"`},
		{stamped, site.File{TimeFormat: "ms"}, `signal.csv:2: time_format = "ms", but the time column holds time stamps; use "d/m/y", "m/d/y" or "iso"`},
		{stamped, site.File{TimeFormat: "index"}, `signal.csv:2: time_format = "index", but the time column holds time stamps; use "d/m/y", "m/d/y" or "iso"`},
		{plain, site.File{SamplingRate: -5}, `signal.csv: sampling_rate = -5 in the site sheet is no rate; state samples per second`},
		{plain, site.File{Delimiter: ";"}, `signal.csv: not CSV: no rows of numbers were found in it`},
	} {
		_, err := csv.Open(file(t, string(test.w.text()[:3000])), input.Options{File: test.file})
		if err == nil || err.Error() != test.want {
			t.Errorf("%+v: error is\n%v, want\n%s", test.file, err, test.want)
		}
	}
}

// TestDeclaredRateBesideAUselessTime reads rows at the declared rate where their times stand still.
func TestDeclaredRateBesideAUselessTime(t *testing.T) {
	w := plain
	w.time = func(int) string { return "0.0" }
	for _, test := range []struct {
		head string
		rate float64
		want string
	}{
		{"", signalRate, "time-column-unusable: The time column gives no sampling rate (the time stamps do not advance); the declared 3200 Hz is used, and lost rows do not show."},
		{"Sample rate: 3.2 kHz\n", 0, "time-column-unusable: The time column gives no sampling rate (the time stamps do not advance); the 3200 Hz of line 1 are used, and lost rows do not show."},
	} {
		w.head = test.head + plain.head
		src := open(t, string(w.text()), input.Options{Rate: test.rate})
		if got := spans(t, src); !sameSpans(got, []span{{0, signalRows}}) || src.Header().Rate != signalRate {
			t.Errorf("at %v Hz rows are in %v, want one run at %v", src.Header().Rate, got, signalRate)
		}
		if got := noteTexts(src); got != test.want {
			t.Errorf("notes are %s, want %s", got, test.want)
		}
	}
}

func TestDelimitersInWords(t *testing.T) {
	for word, delimiter := range map[string]string{"tab": "\t", "comma": ",", "semicolon": ";", "space": " "} {
		w := plain
		w.delimiter, w.head = delimiter, strings.ReplaceAll("time_s,V1,V2,I1\n", ",", delimiter)
		src := open(t, string(w.text()), input.Options{File: site.File{Delimiter: word}})
		if n := len(src.Header().Channels); n != 3 {
			t.Errorf("%s: %d channels, want 3", word, n)
		}
	}
}

// TestRowsThatGoAnotherWay ends reading where rows of another shape are no exception any more.
func TestRowsThatGoAnotherWay(t *testing.T) {
	var b strings.Builder
	b.WriteString("time (s),V1 (V),I1 (A)\n")
	for r := range 30_000 {
		if r > 28_000 && r%2 == 0 {
			fmt.Fprintf(&b, "%.4f,1\n", float64(r)/5000)
		} else {
			fmt.Fprintf(&b, "%.4f,1,2\n", float64(r)/5000)
		}
	}
	for r := range 8000 {
		fmt.Fprintf(&b, "%d,1\n", r)
	}
	b.WriteString("6.0,1,2\n")
	src := open(t, b.String(), input.Options{})
	var last error
	for _, err := range src.Blocks() {
		last = err
	}
	var parse *wave.ParseError
	const want = "signal.csv:28004: the row has 2 cells where the table has 3, and "
	if !errors.As(last, &parse) || !strings.HasPrefix(last.Error(), want) {
		t.Errorf("error is %v, want %s…", last, want)
	}
}
