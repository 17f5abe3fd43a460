package loaders_test

import (
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
	"wavetally/loaders"
	"wavetally/loaders/comtrade"
)

// The signal that is written in every format: 3.2 s of 230 V and 40 A at 50.03 Hz with harmonics, at 6400 Hz.
func known() wave.Source {
	return synth.New(synth.Recording{Name: "known", Start: time.Date(2026, 3, 14, 9, 0, 0, 0, time.UTC), Rate: 6400, Seconds: 3.2,
		Frequency: synth.Frequency{Hz: 50.03}, Channels: []synth.Channel{
			{Name: "V1", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}, {Order: 3, RMS: 1.5, Angle: 20}, {Order: 5, RMS: 6, Angle: 100}, {Order: 7, RMS: 3, Angle: -60}}},
			{Name: "I1", Unit: "A", Harmonics: []synth.Harmonic{{Order: 1, RMS: 40, Angle: -30}, {Order: 3, RMS: 9, Angle: 40}, {Order: 5, RMS: 7, Angle: 130}, {Order: 11, RMS: 2, Angle: 15}, {Order: 49, RMS: 0.1}}},
		}})
}

// rowsOf returns all samples of the known signal.
func rowsOf(t *testing.T) (v, i []float64) {
	t.Helper()
	for b, err := range known().Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		v, i = append(v, b.Data[0]...), append(i, b.Data[1]...)
	}
	return v, i
}

// A form is a way to write the known signal into a folder, and the resolution that it keeps, as a share of the largest
// sample.
type form struct {
	name  string
	step  float64
	write func(t *testing.T, dir string)
}

func textForm(name, head, file string, step float64, row func(n int, v, i float64) string) form {
	return form{name, step, func(t *testing.T, dir string) {
		v, i := rowsOf(t)
		var b strings.Builder
		b.WriteString(head)
		for n := range v {
			b.WriteString(row(n, v[n], i[n]))
		}
		save(t, filepath.Join(dir, file), []byte(b.String()))
	}}
}

func save(t *testing.T, path string, content []byte) {
	t.Helper()
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
}

func stamp(n int) string {
	return time.Date(2026, 3, 14, 9, 0, 0, 0, time.UTC).Add(time.Duration(n) * time.Second / 6400).Format("2006-01-02T15:04:05.000000Z")
}

func comtradeForm(kind string, step float64) form {
	return form{"COMTRADE " + kind, step, func(t *testing.T, dir string) {
		if err := comtrade.Write(filepath.Join(dir, "rec"), known(), kind); err != nil {
			t.Fatal(err)
		}
	}}
}

var comma = strings.NewReplacer(".", ",")

func forms() []form {
	plain := func(n int, v, i float64) string { return fmt.Sprintf("%.7f,%.4f,%.4f\n", float64(n)/6400, v, i) }
	return []form{
		textForm("CSV", "time (s),V1 (V),I1 (A)\n", "a.csv", 1e-6, plain),
		textForm("CSV with stamps", "time,V1 (V),I1 (A)\n", "a.csv", 1e-6, func(n int, v, i float64) string { return fmt.Sprintf("%s,%.4f,%.4f\n", stamp(n), v, i) }),
		textForm("CSV in kV and mA, decimal comma", "Zeit (ms);V1 (kV);I1 (mA)\n", "a.txt", 1e-6, func(n int, v, i float64) string {
			return comma.Replace(fmt.Sprintf("%.4f;%.7f;%.1f\n", float64(n)/6.4, v/1e3, i*1e3))
		}),
		textForm("CSV with stamps to a hundredth of a second", "time,V1 (V),I1 (A)\n", "a.csv", 1e-6, func(n int, v, i float64) string { return fmt.Sprintf("%s,%.4f,%.4f\n", stamp(n)[:22], v, i) }),
		textForm("CSV with thousands separators", "time (s)\tV1 (mV)\tI1 (mA)\n", "a.tsv", 1e-6, func(n int, v, i float64) string {
			return fmt.Sprintf("%.7f\t%s\t%s\n", float64(n)/6400, thousands(v*1e3), thousands(i*1e3))
		}),
		{"CSV in gzip", 1e-6, func(t *testing.T, dir string) {
			textForm("", "time (s),V1 (V),I1 (A)\n", "a.csv", 0, plain).write(t, dir)
			text, _ := os.ReadFile(filepath.Join(dir, "a.csv"))
			os.Remove(filepath.Join(dir, "a.csv"))
			save(t, filepath.Join(dir, "a.csv.gz"), gzipped(t, string(text)))
		}},
		{"one file a channel, in a zip", 1e-6, func(t *testing.T, dir string) {
			v, i := rowsOf(t)
			var a, b strings.Builder
			fmt.Fprintln(&a, "time (s),V1 (V)")
			fmt.Fprintln(&b, "time (s),I1 (A)")
			for n := range v {
				fmt.Fprintf(&a, "%.7f,%.4f\n", float64(n)/6400, v[n])
				fmt.Fprintf(&b, "%.7f,%.4f\n", float64(n)/6400, i[n])
			}
			save(t, filepath.Join(dir, "a.zip"), zipped(t, map[string]string{"volts.csv": a.String(), "amps.csv": b.String()}))
		}},
		{"three files one after the other", 1e-6, func(t *testing.T, dir string) {
			v, i := rowsOf(t)
			for part, to := range []int{7000, 7001, len(v)} {
				from := []int{0, 7000, 7001}[part]
				text := []byte("time (s),V1 (V),I1 (A)\n")
				for n := from; n < to || n < from+5; n++ {
					text = append(text, plain(n, v[n], i[n])...)
				}
				save(t, filepath.Join(dir, fmt.Sprintf("part%d.csv", 9+part)), text)
			}
		}},
		{"XLSX", 1e-9, func(t *testing.T, dir string) {
			v, i := rowsOf(t)
			f := excelize.NewFile()
			w, err := f.NewStreamWriter("Sheet1")
			if err != nil {
				t.Fatal(err)
			}
			w.SetRow("A1", []any{"time (s)", "V1 (V)", "I1 (A)"})
			for n := range v {
				cell, _ := excelize.CoordinatesToCellName(1, n+2)
				w.SetRow(cell, []any{float64(n) / 6400, v[n], i[n]})
			}
			w.Flush()
			if err := f.SaveAs(filepath.Join(dir, "a.xlsx")); err != nil {
				t.Fatal(err)
			}
		}},
		comtradeForm(comtrade.ASCII, 1e-5),
		comtradeForm(comtrade.Binary, 4e-5),
		comtradeForm(comtrade.Binary32, 1e-9),
		comtradeForm(comtrade.Float32, 1e-7),
	}
}

func thousands(v float64) string {
	text := fmt.Sprintf("%.1f", math.Abs(v))
	for at := len(text) - 5; at > 0; at -= 3 {
		text = text[:at] + "'" + text[at:]
	}
	if v < 0 {
		return "-" + text
	}
	return text
}

// TestTheSameSignalInEveryFormat measures the known signal from every format, and must find in each what it finds in the
// signal itself, to the format's own resolution.
func TestTheSameSignalInEveryFormat(t *testing.T) {
	sheet := site.Sheet{Supply: site.Supply{Connection: site.SinglePhase, NominalVoltage: 230, NominalFrequency: 50},
		Channels: []site.Channel{{Source: "V1", Measures: "V1"}, {Source: "I1", Measures: "I1"}}}
	want, err := harmonics.Measure(context.Background(), known(), sheet, harmonics.Options{})
	if err != nil {
		t.Fatal(err)
	}
	for _, f := range forms() {
		t.Run(f.name, func(t *testing.T) {
			dir := t.TempDir()
			f.write(t, dir)
			paths, err := loaders.Expand([]string{dir})
			if err != nil {
				t.Fatal(err)
			}
			src, err := loaders.Open(paths, loaders.Options{})
			if err != nil {
				t.Fatal(err)
			}
			got, err := harmonics.Measure(context.Background(), src, sheet, harmonics.Options{})
			if err != nil {
				t.Fatal(err)
			}
			if got.Samples != want.Samples || got.Windows != want.Windows || math.Abs(got.Frequency.Mean-want.Frequency.Mean) > 1e-5 {
				t.Errorf("%d samples, windows %+v, %v Hz; want %d, %+v, %v Hz", got.Samples, got.Windows, got.Frequency.Mean, want.Samples, want.Windows, want.Frequency.Mean)
			}
			for c := range want.Channels {
				a, b := got.Channels[c], want.Channels[c]
				tolerance := f.step * b.Peak
				for h := 1; h <= 50; h++ {
					if math.Abs(a.H(h).RMS-b.H(h).RMS) > tolerance {
						t.Errorf("%s order %d is %v, want %v", b.Role, h, a.H(h).RMS, b.H(h).RMS)
					}
				}
				if math.Abs(a.THDPct-b.THDPct) > 100*f.step*2 {
					t.Errorf("%s THD is %v, want %v", b.Role, a.THDPct, b.THDPct)
				}
			}
		})
	}
}
