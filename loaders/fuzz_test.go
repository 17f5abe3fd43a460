package loaders_test

import (
	"archive/zip"
	"bytes"
	"compress/gzip"
	"io"
	"os"
	"path/filepath"
	"testing"

	"github.com/xuri/excelize/v2"

	"wavetally/loaders"
)

// FuzzOpen opens anything at all under each kind of name, archives and spreadsheets included. It must not panic and
// must end.
func FuzzOpen(f *testing.F) {
	names := []string{"a.csv", "a.csv.gz", "a.zip", "a.xlsx", "a.wav", "a.cfg", "a.cff", "a.dat"}
	const rows = "time (s),V1 (V)\n0.000,1\n0.001,2\n0.002,3\n0.003,4\n"
	var gz, z bytes.Buffer
	w := gzip.NewWriter(&gz)
	io.WriteString(w, rows)
	w.Close()
	zw := zip.NewWriter(&z)
	member, _ := zw.Create("a.csv")
	io.WriteString(member, rows)
	zw.Close()
	book := excelize.NewFile()
	for i, row := range [][]any{{"time (s)", "V1 (V)"}, {0.0, 1.5}, {0.001, 2.5}, {0.002, 3.5}, {0.003, 4.5}} {
		cell, _ := excelize.CoordinatesToCellName(1, i+1)
		book.SetSheetRow("Sheet1", cell, &row)
	}
	sheet, err := book.WriteToBuffer()
	if err != nil {
		f.Fatal(err)
	}
	for kind, seed := range [][]byte{[]byte(rows), gz.Bytes(), z.Bytes(), sheet.Bytes(), []byte("RIFF\x24\x00\x00\x00WAVEfmt "), []byte("a,b,1999\n1,1A,0D\n")} {
		f.Add(seed, byte(kind))
	}
	f.Fuzz(func(t *testing.T, content []byte, kind byte) {
		path := filepath.Join(t.TempDir(), names[int(kind)%len(names)])
		if err := os.WriteFile(path, content, 0o600); err != nil {
			t.Fatal(err)
		}
		src, err := loaders.Open([]string{path}, loaders.Options{})
		if err != nil {
			if err.Error() == "" {
				t.Error("an error says nothing")
			}
			return
		}
		for b, err := range src.Blocks() {
			if err == nil && b.Len() == 0 {
				t.Fatal("a block is empty")
			}
		}
		src.Header()
		src.Notes()
	})
}
