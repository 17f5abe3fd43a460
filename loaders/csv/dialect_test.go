package csv_test

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"

	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// signalRate and signalRows describe the signal that every dialect carries: 230 V and 12 A at 50 Hz, 2 s of it.
const (
	signalRate = 3200.0
	signalRows = 6400
)

// sample is the signal in volt and ampere, rounded to thousandths, so that every dialect can carry it exactly.
func sample(channel, row int) float64 {
	angle := 2*math.Pi*50*float64(row)/signalRate - 2*math.Pi/3*float64(channel%2)
	if channel == 2 {
		return math.Round(12e3*math.Sqrt2*math.Sin(angle-0.5)) / 1e3
	}
	return math.Round(230e3*math.Sqrt2*math.Sin(angle)) / 1e3
}

// A writing is a way to write the table down.
type writing struct {
	head      string
	foot      string
	delimiter string
	end       string                         // of a line
	time      func(row int) string           // "" for no time column
	number    func(v float64) string         // of a value
	scale     [3]float64                     // unit of each channel, in V or A; 0 is 1
	encode    func(text string) []byte       // nil: as it is
	row       func(row int, s string) string // changes a row; nil: as it is
}

func point(decimals int) func(float64) string {
	return func(v float64) string { return fmt.Sprintf("%.*f", decimals, v) }
}

func comma(decimals int) func(float64) string {
	return func(v float64) string { return strings.Replace(point(decimals)(v), ".", ",", 1) }
}

func seconds(decimals int) func(int) string {
	return func(row int) string { return fmt.Sprintf("%.*f", decimals, float64(row)/signalRate) }
}

// at writes the row's time by a layout of package time.
func at(layout string) func(int) string {
	start := time.Date(2026, 3, 14, 9, 59, 59, 0, time.UTC)
	return func(row int) string {
		return start.Add(time.Duration(math.Round(float64(row) / signalRate * 1e9))).Format(layout)
	}
}

func (w writing) text() []byte {
	var b strings.Builder
	b.WriteString(strings.ReplaceAll(w.head, "\n", w.end))
	for row := range signalRows {
		var fields []string
		if w.time != nil {
			fields = append(fields, w.time(row))
		}
		for c := range 3 {
			v := sample(c, row)
			if w.scale[c] != 0 {
				v /= w.scale[c]
			}
			fields = append(fields, w.number(v))
		}
		s := strings.Join(fields, w.delimiter)
		if w.row != nil {
			s = w.row(row, s)
		}
		b.WriteString(s + w.end)
	}
	b.WriteString(strings.ReplaceAll(w.foot, "\n", w.end))
	if w.encode != nil {
		return w.encode(b.String())
	}
	return []byte(b.String())
}

var dialects = []struct {
	name    string
	w       writing
	file    site.File
	rate    float64 // declared beside the file table
	names   string  // of the channels; "V1 V2 I1" when empty
	units   string  // "V V A" when empty
	start   string
	notes   string  // codes, in order
	reading string  // part of how it was understood
	within  float64 // relative, of the rate; 0: exact
}{
	{name: "comma, header with units in brackets", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}},
	{name: "CR LF", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\r\n", time: seconds(7), number: point(3)}},
	{name: "CR alone", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\r", time: seconds(7), number: point(3)}},
	{name: "CR CR LF", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\r\r\n", time: seconds(7), number: point(3)}},
	{name: "byte order mark", w: writing{head: "\ufefftime (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\r\n", time: seconds(7), number: point(3)}, reading: "byte order mark"},
	{name: "UTF-16 little-endian", w: writing{head: "time (µs);V1 (V);V2 (V);I1 (A)\n", delimiter: ";", end: "\r\n", time: func(row int) string { return fmt.Sprintf("%.1f", float64(row)/signalRate*1e6) }, number: point(3),
		encode: func(s string) []byte {
			b, _ := unicode.UTF16(unicode.LittleEndian, unicode.UseBOM).NewEncoder().Bytes([]byte(s))
			return b
		}}, reading: "UTF-16"},
	{name: "UTF-16 big-endian without byte order mark", w: writing{head: "time (s)\tV1 (V)\tV2 (V)\tI1 (A)\n", delimiter: "\t", end: "\n", time: seconds(7), number: point(3),
		encode: func(s string) []byte {
			b, _ := unicode.UTF16(unicode.BigEndian, unicode.IgnoreBOM).NewEncoder().Bytes([]byte(s))
			return b
		}}, reading: "UTF-16 big-endian"},
	{name: "Windows-1252", w: writing{head: "Zeit (µs);Außenleiter 1 (V);Außenleiter 2 (V);Strom (A)\n", delimiter: ";", end: "\r\n", time: func(row int) string { return fmt.Sprintf("%.1f", float64(row)/signalRate*1e6) }, number: comma(3),
		row:    func(_ int, s string) string { return strings.ReplaceAll(s, ".", ",") },
		encode: func(s string) []byte { b, _ := charmap.Windows1252.NewEncoder().Bytes([]byte(s)); return b }},
		names: "Außenleiter 1|Außenleiter 2|Strom", reading: "Windows-1252"},
	{name: "semicolon and decimal comma", w: writing{head: "Zeit [s];U1 [V];U2 [V];I1 [A]\n", delimiter: ";", end: "\n", time: func(r int) string { return strings.Replace(seconds(7)(r), ".", ",", 1) }, number: comma(3)}, names: "U1|U2|I1", reading: "decimal comma"},
	{name: "tab and decimal comma", w: writing{head: "t/s\tU1/V\tU2/V\tI1/A\n", delimiter: "\t", end: "\n", time: func(r int) string { return strings.Replace(seconds(7)(r), ".", ",", 1) }, number: comma(3)}, names: "U1|U2|I1"},
	{name: "blanks, aligned", w: writing{head: "   time        V1        V2        I1\n    [s]       [V]       [V]       [A]\n", delimiter: " ", end: "\n", time: seconds(7), number: func(v float64) string { return fmt.Sprintf("%12.3f", v) }}},
	{name: "vertical bars", w: writing{head: "time_s|V1_V|V2_V|I1_A\n", delimiter: "|", end: "\n", time: seconds(7), number: point(3)}},
	{name: "units in a second row", w: writing{head: "time,V1,V2,I1\nms,kV,V,mA\n", delimiter: ",", end: "\n", time: func(row int) string { return fmt.Sprintf("%.4f", float64(row)/signalRate*1e3) }, number: point(6), scale: [3]float64{1e3, 1, 1e-3}}, units: "kV V mA"},
	{name: "units in a second row, in brackets", w: writing{head: "time;V1;V2;I1\n(ms);(mV);(V);(kA)\n", delimiter: ";", end: "\n", time: func(row int) string { return fmt.Sprintf("%.4f", float64(row)/signalRate*1e3) }, number: point(6), scale: [3]float64{1e-3, 1, 1e3}}, units: "mV V kA"},
	{name: "thousands separators in quotes", w: writing{head: "\"time, s\",\"V1, mV\",\"V2, V\",\"I1, mA\"\n", delimiter: ",", end: "\n", time: seconds(7), scale: [3]float64{1e-3, 1, 1e-3}, number: func(v float64) string { return `"` + grouped(v, ",", ".") + `"` }}, units: "mV V mA"},
	{name: "thousands separators, continental", w: writing{head: "time [s];V1 [mV];V2 [V];I1 [mA]\n", delimiter: ";", end: "\n", time: seconds(7), scale: [3]float64{1e-3, 1, 1e-3}, number: func(v float64) string { return grouped(v, ".", ",") },
		row: func(_ int, s string) string { return strings.Replace(s, ".", ",", 1) }}, units: "mV V mA"},
	{name: "all quoted", w: writing{head: "\"time (s)\",\"V1 (V)\",\"V2 (V)\",\"I1 (A)\"\n", delimiter: `","`, end: "\n", time: seconds(7), number: point(3), row: func(_ int, s string) string { return `"` + s + `"` }}},
	{name: "heading with a line break in quotes", w: writing{head: "time (s),\"V1\n(V)\",V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}},
	{name: "delimiter at the line's end", w: writing{head: "time (s);V1 (V);V2 (V);I1 (A);\n", delimiter: ";", end: "\n", time: seconds(7), number: point(3), row: func(_ int, s string) string { return s + ";" }}},
	{name: "scientific notation", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.9E", float64(r)/signalRate) }, number: func(v float64) string { return fmt.Sprintf("%.5e", v) }}},
	{name: "leading zeros", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: seconds(7), number: func(v float64) string { return fmt.Sprintf("%+010.3f", v) }}},
	{name: "no header, time column", w: writing{delimiter: ",", end: "\n", time: seconds(6), number: point(3)}, names: "CH1|CH2|CH3", units: "- - -"},
	{name: "no header, no time column", w: writing{delimiter: ",", end: "\n", number: point(3)}, rate: signalRate, names: "CH1|CH2|CH3", units: "- - -", reading: "no column tells the time"},
	{name: "header, no time column", w: writing{head: "V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", number: point(3)}, file: site.File{SamplingRate: signalRate}},
	{name: "sampling rate above the table", w: writing{head: "Invented recorder;\nSampling rate:;3,2 kHz\nStart;14.03.2026 09:59:59\n\nU1 [V];U2 [V];I1 [A]\n", delimiter: ";", end: "\n", number: comma(3)}, names: "U1|U2|I1", start: "2026-03-14T09:59:59"},
	{name: "sample interval above the table", w: writing{head: "Record Length,6400\nSample Interval,3.125E-04,s\nVertical Scale,50\n\nV1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", number: point(3)}},
	{name: "settings beside the first rows", w: writing{head: "", delimiter: ",", end: "\n", time: seconds(7), number: point(3), row: func(row int, s string) string {
		switch row {
		case 0:
			return "Record Length,6400,," + s
		case 1:
			return "Sample Interval,3.125E-04,," + s
		}
		return ",,," + s
	}}, names: "CH1|CH2|CH3", units: "- - -"},
	{name: "two heading rows, source and unit", w: writing{head: "x-axis,1,2,3\nsecond,Volt,Volt,Ampere\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%+.7E", float64(r)/signalRate) }, number: point(3)}, names: "1|2|3", units: "Volt Volt Ampere"},
	{name: "many lines above and below", w: writing{head: strings.Repeat("Remark: 1,2 and 3 of many\n", 150) + "\ntime (s),V1 (V),V2 (V),I1 (A)\n", foot: "\nEnd of data\nChecksum,1234\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}, notes: "lines-skipped"},
	{name: "comment lines", w: writing{head: "# made up\n# time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}},
	{name: "milliseconds", w: writing{head: "Time [ms],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.4f", float64(r)/signalRate*1e3) }, number: point(3)}},
	{name: "microseconds, whole", w: writing{head: "Time [us],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.0f", float64(r)/signalRate*1e6) }, number: point(3)}},
	{name: "milliseconds, whole", w: writing{head: "Time [ms],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.0f", float64(r)/signalRate*1e3) }, number: point(3)}},
	{name: "seconds to a hundredth, cut off", w: writing{head: "Time [s],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.2f", math.Floor(float64(r)/signalRate*100)/100) }, number: point(3)}},
	{name: "six digits", w: writing{head: "Time [s],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.6g", float64(r)/signalRate) }, number: point(3)}},
	{name: "single precision", w: writing{head: "Time [s],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprint(float32(float64(r)/signalRate) + 4) }, number: point(3)}},
	{name: "time before the trigger", w: writing{head: "Time [s],V1 [V],V2 [V],I1 [A]\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.7f", float64(r)/signalRate-0.5) }, number: point(3)}},
	{name: "sample index", w: writing{head: "Sample,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprint(r + 1) }, number: point(3)}, rate: signalRate, reading: "sample numbers"},
	{name: "ISO 8601 with Z", w: writing{head: "timestamp,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: at("2006-01-02T15:04:05.000000Z"), number: point(3)}, start: "2026-03-14T09:59:59Z"},
	{name: "ISO 8601 to the tenth", w: writing{head: "timestamp,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: at("2006-01-02T15:04:05.0Z"), number: point(3)}, start: "2026-03-14T09:59:59Z"},
	{name: "date and time apart", w: writing{head: "Date;Time;V1 (V);V2 (V);I1 (A)\n", delimiter: ";", end: "\n", time: at("02.01.2006;15:04:05,0000000"), number: comma(3)}, start: "2026-03-14T09:59:59"},
	{name: "date, time and milliseconds apart", w: writing{head: "Date\tTime\tms\tV1 (V)\tV2 (V)\tI1 (A)\n", delimiter: "\t", end: "\n", time: func(r int) string {
		return at("02.01.2006\t15:04:05")(r) + fmt.Sprintf("\t%.3f", math.Mod(float64(r)/signalRate*1e3, 1e3))
	}, number: point(3)}, start: "2026-03-14T09:59:59"},
	{name: "day first", w: writing{head: "Date/Time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: at("02/01/2006 15:04:05.000000"), number: point(3)}, start: "2026-03-14T09:59:59"},
	{name: "month first", w: writing{head: "Date/Time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: at("01/02/2006 03:04:05.000000 PM"), number: point(3)}, start: "2026-03-14T09:59:59"},
	{name: "blank between date and time as delimiter", w: writing{head: "date time V1 V2 I1\n", delimiter: " ", end: "\n", time: at("2006-01-02 15:04:05.000000"), number: point(3)}, units: "- - -", start: "2026-03-14T09:59:59"},
	{name: "time of day over midnight", w: writing{head: "Time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string {
		return time.Date(2026, 1, 1, 23, 59, 59, 0, time.UTC).Add(time.Duration(float64(r) / signalRate * 1e9)).Format("15:04:05.000000")
	}, number: point(3)}},
	{name: "seconds since 1970", w: writing{head: "epoch,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%d.%07d", 1773482399+r/3200, r%3200*3125) }, number: point(3)}, start: "2026-03-14T09:59:59Z"},
	{name: "milliseconds since 1970", w: writing{head: "unix time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%d.%04d", 1773482399000+r*10/32, r*10%32*3125/10) }, number: point(3)}, start: "2026-03-14T09:59:59Z"},
	{name: "several columns of time", w: writing{head: "Index,Time (s),Time (ms),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string {
		return fmt.Sprintf("%d,%.7f,%.4f", r, float64(r)/signalRate, float64(r)/signalRate*1e3)
	}, number: point(3)}, notes: "column-skipped column-skipped"},
	{name: "column of text", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A),Status\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3), row: func(_ int, s string) string { return s + ",good" }}, notes: "column-skipped"},
	{name: "other quantities", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A),T (°C)\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3), row: func(_ int, s string) string { return s + ",21.5" }}, notes: "column-skipped"},
	{name: "everything declared", w: writing{head: "1:2:3:4\n5:6:7:8\n", delimiter: ":", end: "\n", time: seconds(7), number: comma(3), row: func(_ int, s string) string { return strings.Replace(s, ".", ",", 1) }},
		file: site.File{Delimiter: ":", Decimal: ",", Encoding: "iso-8859-1", HeaderLines: two(), TimeColumn: "1", TimeFormat: "s"}, names: "CH1|CH2|CH3", units: "- - -"},
	{name: "time column put aside", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprint(r) }, number: point(3)}, file: site.File{TimeColumn: "none", SamplingRate: signalRate}, notes: "column-skipped"},
	{name: "rate declared against the stamps", w: writing{head: "time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.4f", float64(r)/signalRate*1e3) }, number: point(3)}, file: site.File{SamplingRate: signalRate}, notes: "time-unit-assumed time-base-conflict"},
	{name: "description below the names, units below that", w: writing{head: "time,V1,V2,I1\nelapsed,phase,phase,phase\ns,V,V,A\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}},
	{name: "units in the cells", w: writing{head: "time;V1;V2;I1\n", delimiter: ";", end: "\n", time: seconds(7), number: func(v float64) string { return fmt.Sprintf("%.6f kV", v/1e3) },
		row: func(_ int, s string) string {
			at := strings.LastIndexByte(s, ';')
			return s[:at] + strings.Replace(s[at:], "kV", "kA", 1)
		}}},
	{name: "names with their unit as a letter", w: writing{head: "Time (s),Line 1 V,Line 2 V,Line 1 A\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3)}, names: "Line 1 V|Line 2 V|Line 1 A", units: "V - A"},
	{name: "units in words", w: writing{head: "t in s;U1 in V;U2 in V;I1 in A\n", delimiter: ";", end: "\n", time: seconds(7), number: point(3)}, names: "U1|U2|I1"},
	{name: "more cells in the first rows", w: writing{head: "time (s),V1 (V),V2 (V),I1 (A),,Setting,Content\n", delimiter: ",", end: "\n", time: seconds(7), number: point(3), row: func(r int, s string) string {
		return s + []string{",,Range,500", ",,Probe,10", ",,,"}[min(r, 2)]
	}}, notes: "column-skipped column-skipped"},
	{name: "hint to a spreadsheet", w: writing{head: "sep=;\ntime (s);V1 (V);V2 (V);I1 (A)\n", delimiter: ";", end: "\n", time: seconds(7), number: point(3)}},
	{name: "pairs of time and value", w: writing{head: "Waveform 1;;Waveform 2;;Waveform 3;\nTime (s);V1 (V);Time (s);V2 (V);Time (s);I1 (A)\n", delimiter: ";", end: "\n", time: seconds(7), number: point(3), row: func(r int, s string) string {
		f := strings.Split(s, ";")
		return strings.Join([]string{f[0], f[1], f[0], f[2], f[0], f[3]}, ";")
	}}, notes: "column-skipped column-skipped"},
	{name: "unit of time declared", w: writing{head: "time,V1 (V),V2 (V),I1 (A)\n", delimiter: ",", end: "\n", time: func(r int) string { return fmt.Sprintf("%.4f", float64(r)/signalRate*1e3) }, number: point(3)}, file: site.File{TimeFormat: "ms"}},
}

func two() *int { n := 2; return &n }

// grouped writes a number with three decimals and thousands separators.
func grouped(v float64, separator, mark string) string {
	whole, fraction, _ := strings.Cut(fmt.Sprintf("%.3f", math.Abs(v)), ".")
	for i := len(whole) - 3; i > 0; i -= 3 {
		whole = whole[:i] + separator + whole[i:]
	}
	sign := ""
	if v < 0 {
		sign = "-"
	}
	return sign + whole + mark + fraction
}

func TestDialects(t *testing.T) {
	for _, d := range dialects {
		t.Run(d.name, func(t *testing.T) {
			path := filepath.Join(t.TempDir(), "signal.csv")
			if err := os.WriteFile(path, d.w.text(), 0o600); err != nil {
				t.Fatal(err)
			}
			src, err := csv.Open(path, input.Options{File: d.file, Rate: d.rate})
			if err != nil {
				t.Fatal(err)
			}
			h := src.Header()
			if math.Abs(h.Rate-signalRate) > d.within*signalRate {
				t.Errorf("rate is %v, want %v", h.Rate, signalRate)
			}
			if got, want := channelTexts(h), orElse(d.names, "V1|V2|I1")+" in "+orElse(d.units, "V V A"); got != want {
				t.Errorf("channels are %s, want %s", got, want)
			}
			if got := startText(h); got != d.start {
				t.Errorf("start is %s, want %s", got, d.start)
			}
			if got := h.Files[0].Reading; !strings.Contains(got, d.reading) {
				t.Errorf("understood as %q, want %q in it", got, d.reading)
			}
			compareSamples(t, src)
			if got := codes(h.Notes) + codes(src.Notes()); strings.TrimSpace(got) != d.notes {
				t.Errorf("notes are %s, want %s: %v %v", got, d.notes, h.Notes, src.Notes())
			}
		})
	}
}

func orElse(text, other string) string {
	if text == "" {
		return other
	}
	return text
}

func channelTexts(h wave.Header) string {
	var names, units []string
	for _, c := range h.Channels {
		names = append(names, c.Name)
		units = append(units, orElse(c.FileUnit, "-"))
	}
	return strings.Join(names, "|") + " in " + strings.Join(units, " ")
}

func startText(h wave.Header) string {
	switch {
	case h.Start.IsZero():
		return ""
	case h.HasZone:
		return h.Start.Format(time.RFC3339Nano)
	}
	return h.Start.Format("2006-01-02T15:04:05.999999999")
}

func codes(notes []wave.Note) string {
	var b strings.Builder
	for _, n := range notes {
		b.WriteString(" " + n.Code)
	}
	return b.String()
}

// compareSamples holds every sample against the signal, and every time against its row.
func compareSamples(t *testing.T, src wave.Source) {
	t.Helper()
	row := 0
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		if want := float64(row) / signalRate; math.Abs(b.At-want) > 2e-3*want+1e-9 || b.Segment != 0 {
			t.Fatalf("row %d is at %v s in segment %d, want %v s in segment 0", row, b.At, b.Segment, want)
		}
		for i := range b.Len() {
			for c := range b.Data {
				if got, want := b.Data[c][i], sample(c, row+i); math.Abs(got-want) > 1e-9+1e-5*math.Abs(want) {
					t.Fatalf("sample %d of channel %d is %v, want %v", row+i, c+1, got, want)
				}
			}
		}
		row += b.Len()
	}
	if row != signalRows {
		t.Errorf("read %d rows, want %d", row, signalRows)
	}
}

func TestDialectsAreTheSameForAnyNumberOfWorkers(t *testing.T) {
	path := filepath.Join(t.TempDir(), "signal.csv")
	if err := os.WriteFile(path, dialects[0].w.text(), 0o600); err != nil {
		t.Fatal(err)
	}
	var runs [][]float64
	for _, workers := range []int{1, 2, 5} {
		runs = append(runs, withWorkers(t, path, workers))
	}
	if !slices.Equal(runs[0], runs[1]) || !slices.Equal(runs[0], runs[2]) {
		t.Error("blocks depend on the number of workers")
	}
}
