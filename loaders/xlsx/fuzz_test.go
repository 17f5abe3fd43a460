package xlsx_test

import (
	"archive/zip"
	"bytes"
	"io"
	"math"
	"os"
	"path/filepath"
	"testing"

	"wavetally/harmonics/site"
	"wavetally/loaders/input"
	"wavetally/loaders/xlsx"
)

// The parts of a workbook that are the same in all.
const (
	contentTypes  = `<Types xmlns="http://schemas.openxmlformats.org/package/2006/content-types"><Default Extension="xml" ContentType="application/xml"/><Default Extension="rels" ContentType="application/vnd.openxmlformats-package.relationships+xml"/><Override PartName="/xl/workbook.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sheet.main+xml"/><Override PartName="/xl/worksheets/sheet1.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.worksheet+xml"/><Override PartName="/xl/sharedStrings.xml" ContentType="application/vnd.openxmlformats-officedocument.spreadsheetml.sharedStrings+xml"/></Types>`
	packageLinks  = `<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/officeDocument" Target="xl/workbook.xml"/></Relationships>`
	workbook      = `<workbook xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main" xmlns:r="http://schemas.openxmlformats.org/officeDocument/2006/relationships"><sheets><sheet name="Data" sheetId="1" r:id="rId1"/></sheets></workbook>`
	workbookLinks = `<Relationships xmlns="http://schemas.openxmlformats.org/package/2006/relationships"><Relationship Id="rId1" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/worksheet" Target="worksheets/sheet1.xml"/><Relationship Id="rId2" Type="http://schemas.openxmlformats.org/officeDocument/2006/relationships/sharedStrings" Target="sharedStrings.xml"/></Relationships>`

	strings1 = `<sst xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><si><t>time (s)</t></si><si><t>V1 (V)</t></si></sst>`
	sheet1   = `<worksheet xmlns="http://schemas.openxmlformats.org/spreadsheetml/2006/main"><sheetData><row r="1"><c r="A1" t="s"><v>0</v></c><c r="B1" t="s"><v>1</v></c></row><row r="2"><c r="A2"><v>0</v></c><c r="B2"><v>1.5</v></c></row><row r="3"><c r="A3"><v>0.001</v></c><c r="B3"><v>2.5</v></c></row><row r="4"><c r="A4"><v>0.002</v></c><c r="B4"><v>-1E-1</v></c></row><row r="5"><c r="A5"><v>0.003</v></c><c r="B5" t="e"><v>#N/A</v></c></row></sheetData></worksheet>`
)

// declared is the rate, which few rows do not tell.
var declared = input.Options{File: site.File{SamplingRate: 1000}}

// FuzzReader reads anything at all as the XML of a worksheet and of its texts, in a workbook that is sound otherwise:
// bytes of the zip itself would fail its checksums and seldom come further. It must not panic, must end, and what it
// hands over must be whole.
func FuzzReader(f *testing.F) {
	f.Add([]byte(sheet1), []byte(strings1))
	f.Fuzz(func(t *testing.T, sheet, texts []byte) {
		path := filepath.Join(t.TempDir(), "book.xlsx")
		if err := os.WriteFile(path, packed(t, sheet, texts), 0o600); err != nil {
			t.Fatal(err)
		}
		src, err := xlsx.Open(path, declared)
		if err != nil {
			if err.Error() == "" {
				t.Error("an error says nothing")
			}
			return
		}
		channels := len(src.Header().Channels)
		for b, err := range src.Blocks() {
			if err != nil {
				break
			}
			if b.Len() == 0 || len(b.Data) != channels {
				t.Fatalf("a block of %d samples in %d channels, of %d", b.Len(), len(b.Data), channels)
			}
			for _, row := range b.Data {
				for _, v := range row {
					if len(row) != b.Len() || math.IsInf(v, 0) {
						t.Fatalf("a row of %d samples beside %d, with %v", len(row), b.Len(), v)
					}
				}
			}
		}
	})
}

// packed is a workbook of one worksheet.
func packed(t testing.TB, sheet, texts []byte) []byte {
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for _, part := range []struct {
		name    string
		content []byte
	}{
		{"[Content_Types].xml", []byte(contentTypes)}, {"_rels/.rels", []byte(packageLinks)}, {"xl/workbook.xml", []byte(workbook)},
		{"xl/_rels/workbook.xml.rels", []byte(workbookLinks)}, {"xl/worksheets/sheet1.xml", sheet}, {"xl/sharedStrings.xml", texts},
	} {
		w, err := z.CreateHeader(&zip.FileHeader{Name: part.name, Method: zip.Store})
		if err != nil {
			t.Fatal(err)
		}
		if _, err := io.Copy(w, bytes.NewReader(part.content)); err != nil {
			t.Fatal(err)
		}
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// TestSheetOfTheFuzzer makes sure that the fuzzer starts from a workbook that is read to its end.
func TestSheetOfTheFuzzer(t *testing.T) {
	path := filepath.Join(t.TempDir(), "book.xlsx")
	if err := os.WriteFile(path, packed(t, []byte(sheet1), []byte(strings1)), 0o600); err != nil {
		t.Fatal(err)
	}
	src, err := xlsx.Open(path, declared)
	if err != nil {
		t.Fatal(err)
	}
	var got []float64
	for b, err := range src.Blocks() {
		if err != nil {
			t.Fatal(err)
		}
		got = append(got, b.Data[0]...)
	}
	if len(got) != 4 || got[0] != 1.5 || got[1] != 2.5 || got[2] != -0.1 || !math.IsNaN(got[3]) || src.Header().Channels[0].Name != "V1" {
		t.Errorf("read %v of %+v, want 1.5, 2.5, -0.1 and a missing sample of V1", got, src.Header().Channels)
	}
}
