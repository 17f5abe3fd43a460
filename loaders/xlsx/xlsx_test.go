package xlsx_test

import (
	"archive/zip"
	"bytes"
	"errors"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
	"wavetally/loaders/xlsx"
)

const (
	rate = 6400.0
	rows = 1500
)

func sample(channel, row int) float64 {
	return 325 * math.Sin(2*math.Pi*50*float64(row)/rate-float64(channel))
}

// A book is a workbook to be written.
type book struct {
	front  bool          // a worksheet of text before the table
	header [][]any       // rows above the table
	time   func(int) any // of a row; nil for none
	format string        // of the time column
}

func (b book) write(t *testing.T) string {
	t.Helper()
	f := excelize.NewFile()
	defer f.Close()
	sheet := "Sheet1"
	if b.front {
		f.SetSheetName(sheet, "About")
		f.SetCellStr("About", "A1", "An invented recorder")
		sheet = "Data"
		f.NewSheet(sheet)
	}
	w, err := f.NewStreamWriter(sheet)
	if err != nil {
		t.Fatal(err)
	}
	style := 0
	if b.format != "" {
		if style, err = f.NewStyle(&excelize.Style{CustomNumFmt: &b.format}); err != nil {
			t.Fatal(err)
		}
	}
	for i, row := range b.header {
		cell, _ := excelize.CoordinatesToCellName(1, i+1)
		w.SetRow(cell, row)
	}
	for r := range rows {
		row := []any{sample(0, r), sample(1, r)}
		if b.time != nil {
			v := b.time(r)
			if b.format != "" {
				v = excelize.Cell{StyleID: style, Value: v}
			}
			row = append([]any{v}, row...)
		}
		cell, _ := excelize.CoordinatesToCellName(1, len(b.header)+r+1)
		w.SetRow(cell, row)
	}
	if err := w.Flush(); err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "book.xlsx")
	if err := f.SaveAs(path); err != nil {
		t.Fatal(err)
	}
	return path
}

// days is what a workbook stores for a row's instant.
func days(row int) any { return 46095.416655 + float64(row)/rate/86400 }

func TestOpen(t *testing.T) {
	for _, test := range []struct {
		name    string
		book    book
		file    site.File
		names   string
		start   string
		reading string
		notes   string
	}{
		{name: "seconds", book: book{header: [][]any{{"time (s)", "V1 (V)", "V2 (V)"}}, time: func(r int) any { return float64(r) / rate }}, names: "V1 V2",
			reading: `worksheet "Sheet1"; first row of numbers in line 2; time in column 1 "time", in s`},
		{name: "units below, text above, another worksheet", book: book{front: true, header: [][]any{{"Invented recorder"}, nil, {"t", "V1", "V2"}, {"ms", "V", "V"}}, time: func(r int) any { return float64(r) / rate * 1e3 }}, names: "V1 V2",
			reading: `worksheet "Data"; first row of numbers in line 5; time in column 1 "t", in ms`, notes: "worksheets-skipped"},
		{name: "no time", book: book{header: [][]any{{"V1 [V]", "V2 [V]"}}}, file: site.File{SamplingRate: rate}, names: "V1 V2", reading: "no column tells the time"},
		{name: "no header", book: book{}, file: site.File{SamplingRate: rate}, names: "CH1 CH2"},
		{name: "dates", book: book{header: [][]any{{"Time", "V1 [V]", "V2 [V]"}}, time: days, format: "yyyy-mm-dd hh:mm:ss.000"}, names: "V1 V2", start: "2026-03-14T09:59:58.992"},
		{name: "times of day", book: book{header: [][]any{{"Time", "V1 [V]", "V2 [V]"}}, time: func(r int) any { return 0.5 + float64(r)/rate/86400 }, format: "hh:mm:ss"}, names: "V1 V2"},
	} {
		t.Run(test.name, func(t *testing.T) {
			src, err := xlsx.Open(test.book.write(t), input.Options{File: test.file})
			if err != nil {
				t.Fatal(err)
			}
			h := src.Header()
			var names, notes []string
			for _, c := range h.Channels {
				names = append(names, c.Name)
			}
			if got := strings.Join(names, " "); got != test.names {
				t.Errorf("channels are %s, want %s", got, test.names)
			}
			if h.Rate != rate {
				t.Errorf("rate is %v, want %v", h.Rate, rate)
			}
			if got := h.Start.Format("2006-01-02T15:04:05.000"); !strings.HasPrefix(got, test.start) || test.start == "" && !h.Start.IsZero() {
				t.Errorf("start is %s, want %q", got, test.start)
			}
			if got := h.Files[0].Reading; !strings.Contains(got, test.reading) || h.Files[0].Format != "XLSX" {
				t.Errorf("understood as %s %q, want XLSX %q", h.Files[0].Format, got, test.reading)
			}
			row := 0
			for b, err := range src.Blocks() {
				if err != nil {
					t.Fatal(err)
				}
				if want := float64(row) / rate; math.Abs(b.At-want) > 1e-6 || b.Segment != 0 {
					t.Fatalf("row %d is at %v in segment %d, want %v in 0", row, b.At, b.Segment, want)
				}
				for i := range b.Len() {
					for c := range b.Data {
						if got, want := b.Data[c][i], sample(c, row); math.Abs(got-want) > 1e-9 {
							t.Fatalf("row %d of channel %d is %v, want %v", row, c, got, want)
						}
					}
					row++
				}
			}
			if row != rows {
				t.Errorf("read %d rows, want %d", row, rows)
			}
			for _, n := range append(h.Notes, src.Notes()...) {
				notes = append(notes, n.Code)
			}
			if got := strings.Join(notes, " "); got != test.notes {
				t.Errorf("notes are %s, want %s", got, test.notes)
			}
		})
	}
}

func TestEpochOf1904(t *testing.T) {
	b := book{header: [][]any{{"Time", "V1 [V]", "V2 [V]"}}, time: func(r int) any { return 44633 + float64(r)/rate/86400 }, format: "yyyy-mm-dd hh:mm:ss.000"}
	path := b.write(t)
	f, err := excelize.OpenFile(path)
	if err != nil {
		t.Fatal(err)
	}
	yes := true
	f.SetWorkbookProps(&excelize.WorkbookPropsOptions{Date1904: &yes})
	if err := f.Save(); err != nil {
		t.Fatal(err)
	}
	f.Close()
	src, err := xlsx.Open(path, input.Options{})
	if err != nil {
		t.Fatal(err)
	}
	// 44633 days after 1904-01-01, by package time.
	want := time.Date(1904, 1, 1, 0, 0, 0, 0, time.UTC).AddDate(0, 0, 44633)
	if got := src.Header().Start; !got.Equal(want) {
		t.Errorf("start is %v, want %v", got, want)
	}
}

func parts(t *testing.T, content map[string]string) string {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for name, text := range content {
		w, err := z.Create(name)
		if err != nil {
			t.Fatal(err)
		}
		io.WriteString(w, text)
	}
	z.Close()
	path := filepath.Join(t.TempDir(), "book.xlsx")
	if err := os.WriteFile(path, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestBadBooks(t *testing.T) {
	var none *wave.NotThisFormatError
	if _, err := xlsx.Open(parts(t, map[string]string{"a.txt": "x"}), input.Options{}); !errors.As(err, &none) {
		t.Errorf("a zip without a workbook gives %v, want a NotThisFormatError", err)
	}
	_, err := xlsx.Open(parts(t, map[string]string{"xl/workbook.xml": "<workbook", "[Content_Types].xml": "<"}), input.Options{})
	if err == nil || !strings.HasPrefix(err.Error(), "book.xlsx: ") {
		t.Errorf("a broken workbook gives %v, want an error that names it", err)
	}
	_, err = xlsx.Open(parts(t, map[string]string{"xl/workbook.xml": strings.Repeat(" ", 70<<20)}), input.Options{})
	const tooMuch = "book.xlsx: it unpacks to 1 parts of 70 MB, more than is read; save the table as CSV"
	if err == nil || err.Error() != tooMuch {
		t.Errorf("a book that unpacks without measure gives %v, want %s", err, tooMuch)
	}
	b := book{header: [][]any{{"V1 [V]", "V2 [V]"}}}
	_, err = xlsx.Open(b.write(t), input.Options{})
	const noRate = "book.xlsx[Sheet1]:2: no column tells the time and no line above states the sampling rate; state it with --sampling-rate, or sampling_rate under [file] in the site sheet"
	if err == nil || err.Error() != noRate {
		t.Errorf("a book without times gives %v, want %s", err, noRate)
	}
}
