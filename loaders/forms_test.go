package loaders_test

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"
	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/unicode"

	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
	"wavetally/loaders"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/wav"
)

// The signal that is written in every form: 3.2 s of a three-phase four-wire supply at 50.03 Hz and 6400 samples a
// second, its phases unlike, with harmonics, an interharmonic and dc.
const (
	knownRate    = 6400
	knownRows    = 20480
	fullVoltage  = 400.0 // V, full scale of the forms that hold ±1
	fullCurrent  = 80.0  // A
	knownColumns = "V1 (V),V2 (V),V3 (V),I1 (A),I2 (A),I3 (A)"
)

var knownStart = time.Date(2026, 3, 14, 9, 0, 0, 0, time.UTC)

// known is the signal times gain for each channel; nil is 1.
func known(gain []float64) wave.Source {
	r := synth.Recording{Name: "known", Start: knownStart, Rate: knownRate, Seconds: knownRows / float64(knownRate), Frequency: synth.Frequency{Hz: 50.03}}
	for phase := range 3 {
		turn := -120 * float64(phase)
		r.Channels = append(r.Channels, synth.Channel{Name: fmt.Sprintf("V%d", phase+1), Unit: "V", Harmonics: []synth.Harmonic{
			{Order: 1, RMS: 230 - 2*float64(phase), Angle: turn}, {Order: 3, RMS: 1.5, Angle: 20}, {Order: 5, RMS: 6, Angle: 100 + 5*turn}, {Order: 7, RMS: 3, Angle: -60 + 7*turn}},
			Tones: []synth.Tone{{Hz: 183, RMS: 0.7}}})
	}
	for phase := range 3 {
		turn := -120 * float64(phase)
		r.Channels = append(r.Channels, synth.Channel{Name: fmt.Sprintf("I%d", phase+1), Unit: "A", DC: 0.2, Harmonics: []synth.Harmonic{
			{Order: 1, RMS: 40 - 5*float64(phase), Angle: turn - 30}, {Order: 3, RMS: 9, Angle: 40}, {Order: 5, RMS: 7, Angle: 130 + 5*turn}, {Order: 11, RMS: 2, Angle: 15}, {Order: 49, RMS: 0.1}}})
	}
	for c := range r.Channels {
		if gain == nil {
			continue
		}
		ch := &r.Channels[c]
		ch.DC *= gain[c]
		for i := range ch.Harmonics {
			ch.Harmonics[i].RMS *= gain[c]
		}
		for i := range ch.Tones {
			ch.Tones[i].RMS *= gain[c]
		}
	}
	return synth.New(r)
}

// knownSamples are all samples of the signal, [channel][row].
var knownSamples = sync.OnceValue(func() [][]float64 {
	all := make([][]float64, 6)
	for b := range known(nil).Blocks() {
		for c, row := range b.Data {
			all[c] = append(all[c], row...)
		}
	}
	return all
})

// span is the highest sample of a channel minus its lowest, and peak its largest magnitude.
func span(c int) (span, peak float64) {
	low, high := math.Inf(1), math.Inf(-1)
	for _, v := range knownSamples()[c] {
		low, high = min(low, v), max(high, v)
	}
	return high - low, max(high, -low)
}

// A form is a way to write the signal into a folder.
type form struct {
	name   string
	step   func(channel int) float64 // between neighbouring values that it can hold, V or A: a sample is at most half of it off
	dated  bool                      // it tells when the recording starts
	opt    loaders.Options
	format string    // as the reader names it; "" is not asked
	scale  []float64 // of each channel in the site sheet; nil: 1
	write  func(t *testing.T, dir string)
}

// decimals is the step of a form that writes volts and amperes to this many decimals.
func decimals(n int) func(int) float64 {
	return func(int) float64 { return math.Pow10(-n) }
}

// digits is the step of a form that keeps the first n digits of a number, at its largest sample.
func digits(n int) func(int) float64 {
	return func(c int) float64 {
		_, peak := span(c)
		return math.Pow10(int(math.Floor(math.Log10(peak))) + 1 - n)
	}
}

// bits is the step of a floating-point number with so many bits, at the largest sample.
func bits(n int) func(int) float64 {
	return func(c int) float64 {
		_, peak := span(c)
		_, exponent := math.Frexp(peak)
		return math.Ldexp(1, exponent-n)
	}
}

// shares is the step of a form that divides each channel's span into so many parts.
func shares(n float64) func(int) float64 {
	return func(c int) float64 {
		s, _ := span(c)
		return s / n
	}
}

func save(t *testing.T, path string, content []byte) {
	t.Helper()
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
}

// A dialect is a way to write the signal as text.
type dialect struct {
	head, foot string
	delimiter  string // "" is a comma
	end        string // of a line; "" is LF
	time       func(row int) string
	number     func(v float64) string
	unit       [2]float64 // that volts and amperes are written in; 0 is 1
	encoding   encoding.Encoding
}

// text is rows [from, to) of the given channels.
func (w dialect) text(t *testing.T, from, to int, channels ...int) string {
	var b strings.Builder
	b.WriteString(w.head)
	for row := from; row < to; row++ {
		mark := ""
		if w.time != nil {
			b.WriteString(w.time(row))
			mark = w.delimiter
		}
		for _, c := range channels {
			b.WriteString(mark)
			v := knownSamples()[c][row]
			if unit := w.unit[c/3]; unit != 0 {
				v /= unit
			}
			b.WriteString(w.number(v))
			mark = w.delimiter
		}
		b.WriteByte('\n')
	}
	b.WriteString(w.foot)
	text := b.String()
	if w.end != "" {
		text = strings.ReplaceAll(text, "\n", w.end)
	}
	if w.encoding == nil {
		return text
	}
	text, err := w.encoding.NewEncoder().String(text)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// as returns the form that writes the table to one file.
func (w dialect) as(name, file string, step func(int) float64) form {
	if w.delimiter == "" {
		w.delimiter = ","
	}
	return form{name: name, step: step, write: func(t *testing.T, dir string) {
		save(t, filepath.Join(dir, file), []byte(w.text(t, 0, knownRows, 0, 1, 2, 3, 4, 5)))
	}}
}

func (f form) starting() form { f.dated = true; return f }

func (f form) declaring(opt loaders.Options) form { f.opt = opt; return f }

// seconds writes the time of a row in units of a second, and stamp as a date.
func seconds(unit float64, decimals int) func(int) string {
	return func(row int) string { return fmt.Sprintf("%.*f", decimals, float64(row)/knownRate/unit) }
}

func stamp(layout string) func(int) string {
	return func(row int) string {
		return knownStart.Add(time.Duration(row) * time.Second / knownRate).Format(layout)
	}
}

func fixed(decimals int) func(float64) string {
	return func(v float64) string { return fmt.Sprintf("%.*f", decimals, v) }
}

// commas writes what write does with a decimal comma.
func commas[T any](write func(T) string) func(T) string {
	return func(v T) string { return strings.Replace(write(v), ".", ",", 1) }
}

// grouped writes a number with one decimal and separators of thousands.
func grouped(separator, mark string) func(float64) string {
	return func(v float64) string {
		whole, fraction, _ := strings.Cut(fmt.Sprintf("%.1f", math.Abs(v)), ".")
		for i := len(whole) - 3; i > 0; i -= 3 {
			whole = whole[:i] + separator + whole[i:]
		}
		if v < 0 {
			whole = "-" + whole
		}
		return whole + mark + fraction
	}
}

func quoted(write func(float64) string) func(float64) string {
	return func(v float64) string { return `"` + write(v) + `"` }
}

var plain = dialect{head: "time (s)," + knownColumns + "\n", delimiter: ",", time: seconds(1, 7), number: fixed(4)}

// textForms are the dialects of text.
func textForms() []form {
	const semicolons = "V1 [V];V2 [V];V3 [V];I1 [A];I2 [A];I3 [A]\n"
	const small = "V1 (mV)\tV2 (mV)\tV3 (mV)\tI1 (mA)\tI2 (mA)\tI3 (mA)\n"
	milli := [2]float64{1e-3, 1e-3}
	utf16 := func(order unicode.Endianness, mark unicode.BOMPolicy) encoding.Encoding {
		return unicode.UTF16(order, mark)
	}
	return []form{
		plain.as("comma", "a.csv", decimals(4)),
		dialect{head: plain.head, time: plain.time, number: fixed(1)}.as("comma, one decimal", "a.csv", decimals(1)),
		dialect{head: plain.head, time: seconds(1, 7), number: fixed(4), end: "\r\n", encoding: unicode.UTF8BOM}.as("CR LF, UTF-8 with byte order mark", "a.csv", decimals(4)),
		dialect{head: "time;V1;V2;V3;I1;I2;I3\nms;kV;kV;kV;kA;kA;kA\n", delimiter: ";", end: "\r", time: seconds(1e-3, 4), number: fixed(6), unit: [2]float64{1e3, 1e3}}.as("CR, units in a second row", "a.csv", decimals(3)),
		dialect{head: "Zeit (ms);" + semicolons, delimiter: ";", time: commas(seconds(1e-3, 4)), number: commas(fixed(4))}.as("semicolon and decimal comma", "a.txt", decimals(4)),
		dialect{head: "Zeit (ms)\t" + strings.ReplaceAll(semicolons, ";", "\t"), delimiter: "\t", time: commas(seconds(1e-3, 4)), number: commas(fixed(4))}.as("tab and decimal comma", "a.tsv", decimals(4)),
		dialect{head: "Zeit (µs);Außenleiter 1 (V);Außenleiter 2 (V);Außenleiter 3 (V);Strom 1 (A);Strom 2 (A);Strom 3 (A)\n", delimiter: ";", end: "\r\n", time: commas(seconds(1e-6, 2)), number: commas(fixed(4)), encoding: charmap.Windows1252}.as("Windows-1252", "a.csv", decimals(4)),
		dialect{head: "time (s);" + semicolons, delimiter: ";", end: "\r\n", time: seconds(1, 7), number: fixed(4), encoding: utf16(unicode.LittleEndian, unicode.UseBOM)}.as("UTF-16 little-endian", "a.csv", decimals(4)),
		dialect{head: "time (s);" + semicolons, delimiter: ";", time: seconds(1, 7), number: fixed(4), encoding: utf16(unicode.BigEndian, unicode.IgnoreBOM)}.as("UTF-16 big-endian, unmarked", "a.csv", decimals(4)),
		dialect{head: "time (s)\t" + small, delimiter: "\t", time: seconds(1, 7), number: grouped("'", "."), unit: milli}.as("thousands separators", "a.tsv", decimals(4)),
		dialect{head: "time (s)," + strings.ReplaceAll(small, "\t", ","), time: seconds(1, 7), number: quoted(grouped(",", ".")), unit: milli}.as("thousands separators in quotes", "a.csv", decimals(4)),
		dialect{head: "time [s];" + strings.ReplaceAll(small, "\t", ";"), delimiter: ";", time: commas(seconds(1, 7)), number: grouped(".", ","), unit: milli}.as("thousands separators, continental", "a.csv", decimals(4)),
		dialect{head: plain.head, time: func(n int) string { return fmt.Sprintf("%.9E", float64(n)/knownRate) }, number: func(v float64) string { return fmt.Sprintf("%.6e", v) }}.as("scientific notation", "a.csv", digits(7)),
		dialect{head: "time," + knownColumns + "\n", time: stamp("2006-01-02T15:04:05.000000Z"), number: fixed(4)}.as("ISO 8601 stamps", "a.csv", decimals(4)).starting(),
		dialect{head: "time," + knownColumns + "\n", time: stamp("2006-01-02T15:04:05.00Z"), number: fixed(4)}.as("stamps to a hundredth of a second", "a.csv", decimals(4)).starting(),
		dialect{head: "Date;Time;" + semicolons, delimiter: ";", time: stamp("02.01.2006;15:04:05,000000"), number: commas(fixed(4))}.as("date and time apart", "a.csv", decimals(4)).starting(),
		dialect{head: "Date/Time," + knownColumns + "\n", time: stamp("01/02/2006 03:04:05.000000 PM"), number: fixed(4)}.as("month first", "a.csv", decimals(4)).starting(),
		dialect{head: "Sample," + knownColumns + "\n", time: func(n int) string { return fmt.Sprint(n + 1) }, number: fixed(4)}.as("sample index", "a.csv", decimals(4)).declaring(loaders.Options{Rate: knownRate}),
		dialect{head: knownColumns + "\n", number: fixed(4)}.as("no time column", "a.csv", decimals(4)).declaring(loaders.Options{Rate: knownRate}),
		dialect{number: fixed(4)}.as("neither header nor time column", "a.csv", decimals(4)).declaring(loaders.Options{Rate: knownRate}),
		dialect{head: "Invented recorder\nSampling rate:;6,4 kHz\nStart;14.03.2026 09:00:00\n\n" + semicolons, foot: "\nEnd of data\n", delimiter: ";", number: commas(fixed(4))}.as("rate and start above the table", "a.csv", decimals(4)).starting(),
		dialect{head: "    time        V1        V2        V3        I1        I2        I3\n     [s]       [V]       [V]       [V]       [A]       [A]       [A]\n", delimiter: " ", time: seconds(1, 7), number: func(v float64) string { return fmt.Sprintf("%12.4f", v) }}.as("blanks", "a.txt", decimals(4)),
	}
}

// sessionForms are tables in several files or in an archive, and spreadsheets.
func sessionForms() []form {
	single := func(t *testing.T, c int) string {
		one := plain
		one.head = "time (s)," + strings.Split(knownColumns, ",")[c] + "\n"
		return one.text(t, 0, knownRows, c)
	}
	name := func(c int) string { return []string{"v1.csv", "v2.csv", "v3.csv", "w1.csv", "w2.csv", "w3.csv"}[c] }
	return []form{
		{name: "gzip", step: decimals(4), write: func(t *testing.T, dir string) {
			save(t, filepath.Join(dir, "a.csv.gz"), gzipped(t, plain.text(t, 0, knownRows, 0, 1, 2, 3, 4, 5)))
		}},
		{name: "one file a channel", step: decimals(4), write: func(t *testing.T, dir string) {
			for c := range 6 {
				save(t, filepath.Join(dir, name(c)), []byte(single(t, c)))
			}
		}},
		{name: "one file a channel, in a zip", step: decimals(4), write: func(t *testing.T, dir string) {
			members := map[string]string{}
			for c := range 6 {
				members[name(c)] = single(t, c)
			}
			save(t, filepath.Join(dir, "a.zip"), zipped(t, members))
		}},
		// Files that overlap start a new segment, and windows anew; TestSessions has those.
		{name: "three files one after the other", step: decimals(4), write: func(t *testing.T, dir string) {
			for part, to := range []int{7000, 7011, knownRows} {
				from := []int{0, 7000, 7011}[part]
				save(t, filepath.Join(dir, fmt.Sprintf("part%d.csv", 9+part)), []byte(plain.text(t, from, to, 0, 1, 2, 3, 4, 5)))
			}
		}},
		{name: "XLSX", step: digits(15), write: spreadsheet},
	}
}

func spreadsheet(t *testing.T, dir string) {
	f := excelize.NewFile()
	w, err := f.NewStreamWriter("Sheet1")
	if err != nil {
		t.Fatal(err)
	}
	rows := [][]any{{"time (s)"}}
	for _, name := range strings.Split(knownColumns, ",") {
		rows[0] = append(rows[0], name)
	}
	for n := range knownRows {
		row := []any{float64(n) / knownRate}
		for _, values := range knownSamples() {
			row = append(row, values[n])
		}
		rows = append(rows, row)
	}
	for n, row := range rows {
		cell, _ := excelize.CoordinatesToCellName(1, n+1)
		if err := w.SetRow(cell, row); err != nil {
			t.Fatal(err)
		}
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	if err := f.SaveAs(filepath.Join(dir, "a.xlsx")); err != nil {
		t.Fatal(err)
	}
}

// comtradeForms are the editions of COMTRADE, each in every form of data that it has, and the single file of 2013.
func comtradeForms() []form {
	steps := map[string]func(int) float64{comtrade.ASCII: shares(2 * 99990), comtrade.Binary: shares(2 * 32767), comtrade.Binary32: shares(2 * math.MaxInt32), comtrade.Float32: bits(24)}
	var all []form
	add := func(kind, name, stem string, edition func(string) string) {
		all = append(all, form{name: "COMTRADE " + name + " " + kind, format: "COMTRADE " + name[:4] + " " + kind, step: steps[kind], dated: true, write: func(t *testing.T, dir string) {
			if err := comtrade.Write(filepath.Join(dir, stem), known(nil), kind); err != nil {
				t.Fatal(err)
			}
			if edition == nil {
				return
			}
			path := filepath.Join(dir, stem+".cfg")
			text, err := os.ReadFile(path)
			if err != nil {
				t.Fatal(err)
			}
			save(t, path, []byte(edition(string(text))))
		}})
	}
	for _, kind := range []string{comtrade.ASCII, comtrade.Binary} {
		add(kind, "1991", "rec", edition1991)
		add(kind, "1999", "rec", edition1999)
	}
	for _, kind := range []string{comtrade.ASCII, comtrade.Binary, comtrade.Binary32, comtrade.Float32} {
		add(kind, "2013", "rec", nil)
		add(kind, "2013, one file,", "rec.cff", nil)
	}
	return all
}

// edition1999 turns a configuration of the 2013 edition into one of IEEE C37.111-1999, which ends after the factor of
// the time stamps.
func edition1999(cfg string) string {
	lines := strings.Split(cfg, "\r\n")
	lines[0] = strings.Replace(lines[0], ",2013", ",1999", 1)
	return strings.Join(lines[:len(lines)-3], "\r\n") + "\r\n"
}

// edition1991 makes one of IEEE C37.111-1991: no year of the edition, no ratio of transformers, the month before the
// day, no factor of the time stamps.
func edition1991(cfg string) string {
	lines := strings.Split(strings.TrimSuffix(edition1999(cfg), "\r\n"), "\r\n")
	lines[0] = strings.Replace(lines[0], ",1999", "", 1)
	for i, line := range lines {
		switch f := strings.Split(line, ","); {
		case len(f) == 13:
			lines[i] = strings.Join(f[:10], ",")
		case strings.HasPrefix(line, "14/03/2026"):
			lines[i] = strings.Replace(line, "14/03/2026", "03/14/26", 1)
		}
	}
	return strings.Join(lines[:len(lines)-1], "\r\n") + "\r\n"
}

// wavForms hold parts of full scale, which the site sheet brings to V and A. They know no start.
func wavForms() []form {
	gain, scale := make([]float64, 6), make([]float64, 6)
	for c := range 6 {
		scale[c] = []float64{fullVoltage, fullCurrent}[c/3]
		gain[c] = 1 / scale[c]
	}
	fixed := func(n int) func(int) float64 {
		return func(c int) float64 { return scale[c] * math.Ldexp(1, 1-n) }
	}
	float := func(n int) func(int) float64 { // of parts of full scale, which are below 1
		return func(c int) float64 { return scale[c] * math.Ldexp(1, -n) }
	}
	var all []form
	for _, kind := range []struct {
		name string
		bits int
		step func(int) float64
	}{{"16 bits", 16, fixed(16)}, {"24 bits", 24, fixed(24)}, {"32 bits", 32, fixed(32)}, {"32 bits, floating", -32, float(24)}, {"64 bits, floating", -64, float(53)}} {
		all = append(all, form{name: "WAV " + kind.name, step: kind.step, scale: scale, write: func(t *testing.T, dir string) {
			if err := wav.Write(filepath.Join(dir, "a.wav"), known(gain), kind.bits); err != nil {
				t.Fatal(err)
			}
		}})
	}
	return all
}
