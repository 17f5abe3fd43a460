// Package xlsx reads waveform tables from spreadsheets.
//
// A worksheet is turned into text, row by row while it is read, and read as package csv reads a table of text: one
// understanding of headers, units and times serves both. Excelize unpacks large worksheets to the folder for temporary
// files and takes rows from there, so memory does not grow with their number.
package xlsx

import (
	"archive/zip"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

const format = "XLSX"

// Limits that no recording of a recorder needs. A worksheet has at most 1 048 576 rows, whose XML takes about 300 MB
// with eight channels.
const (
	maxParts   = 2000
	maxAside   = 64 << 20 // bytes of everything that is no worksheet; it is held in memory
	maxUnpack  = 4 << 30
	inMemory   = 1 << 20 // bytes of a worksheet; larger ones are unpacked to a temporary file
	maxPerByte = 300     // unpacked size by packed size
)

// Open reads the first worksheet that holds a table of numbers.
func Open(path string, opt input.Options) (wave.Source, error) {
	name := filepath.Base(path)
	if opt.FS != nil {
		return nil, &wave.NotThisFormatError{File: name, Format: format, Msg: "spreadsheets are not read inside other archives"}
	}
	if err := check(path, name); err != nil {
		return nil, err
	}
	sheets, err := sheetNames(path, name)
	if err != nil {
		return nil, err
	}
	opt.File.Delimiter, opt.File.Decimal, opt.File.Encoding = "tab", ".", "utf-8"
	var passed []string
	for i, sheet := range sheets {
		here := opt
		here.FS = sheetFS{sheet}
		src, err := csv.OpenAs(path, format, here)
		var none *wave.NotThisFormatError
		switch {
		case errors.As(err, &none):
			passed = append(passed, sheet)
			continue
		case err != nil:
			return nil, inSheet(err, name, sheet)
		}
		return source{src, name, sheet, passed, sheets[i+1:]}, nil
	}
	return nil, &wave.ParseError{File: name, Msg: "no worksheet holds rows of numbers; put the waveforms into one, one column a channel"}
}

// check refuses what is no spreadsheet, and what is too large or made to harm, before it is unpacked.
func check(path, name string) error {
	r, err := zip.OpenReader(path)
	switch {
	case errors.Is(err, fs.ErrNotExist), errors.Is(err, fs.ErrPermission):
		return err
	case err != nil:
		return &wave.NotThisFormatError{File: name, Format: format, Msg: "it is no zip file inside"}
	}
	defer r.Close()
	info, err := os.Stat(path)
	if err != nil {
		return err
	}
	var total, aside uint64
	workbook := false
	for _, f := range r.File {
		lower := strings.ToLower(strings.ReplaceAll(f.Name, `\`, "/"))
		workbook = workbook || lower == "xl/workbook.xml"
		total += f.UncompressedSize64
		if !strings.HasPrefix(lower, "xl/worksheets/sheet") && lower != "xl/sharedstrings.xml" {
			aside += f.UncompressedSize64
		}
	}
	switch {
	case !workbook:
		return &wave.NotThisFormatError{File: name, Format: format, Msg: "it has no workbook inside"}
	case len(r.File) > maxParts || aside > maxAside || total > maxUnpack || total > inMemory*16+maxPerByte*uint64(info.Size()):
		return &wave.UnsupportedError{File: name, Msg: fmt.Sprintf("it unpacks to %d parts of %d MB, more than is read; save the table as CSV", len(r.File), total>>20)}
	}
	return nil
}

func open(path string) (*excelize.File, error) {
	return excelize.OpenFile(path, excelize.Options{RawCellValue: true, UnzipXMLSizeLimit: inMemory, UnzipSizeLimit: maxUnpack})
}

// sheetNames lists the worksheets in their order, hidden ones last.
func sheetNames(path, name string) ([]string, error) {
	f, err := open(path)
	if err != nil {
		return nil, &wave.ParseError{File: name, Err: err, Msg: fmt.Sprintf("the spreadsheet cannot be opened (%v); open and save it again, or save the table as CSV", err)}
	}
	defer f.Close()
	var shown, hidden []string
	for _, sheet := range f.GetSheetList() {
		if visible, err := f.GetSheetVisible(sheet); err == nil && !visible {
			hidden = append(hidden, sheet)
		} else {
			shown = append(shown, sheet)
		}
	}
	return append(shown, hidden...), nil
}

// inSheet adds the worksheet to an error's place.
func inSheet(err error, name, sheet string) error {
	file := fmt.Sprintf("%s[%s]", name, sheet)
	var parse *wave.ParseError
	var unsupported *wave.UnsupportedError
	switch {
	case errors.As(err, &parse):
		parse.File = file
	case errors.As(err, &unsupported):
		unsupported.File = file
	}
	return err
}
