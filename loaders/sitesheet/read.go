// Package sitesheet reads and writes the site sheet: a TOML file that says what is known about an installation and its
// hook-up. Its tables and keys are the fields of package harmonics/site; `wavetally sheet` writes one with a comment on
// each key.
//
// Every error says where: file, line, what is wrong, what to do.
package sitesheet

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"unicode/utf8"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// largest is the size in bytes above which a file is no site sheet; a big one has a few kilobytes.
const largest = 1 << 20

// Read reads a site sheet. Errors in its text are of type *wave.ParseError.
func Read(path string) (site.Sheet, error) {
	f, err := os.Open(path)
	if err != nil {
		return site.Sheet{}, err
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return site.Sheet{}, &wave.ParseError{File: filepath.Base(path), Msg: "is a directory; name the site sheet in it"}
	}
	return Parse(f, filepath.Base(path))
}

// Parse reads a site sheet from r; name is the file's, for errors.
func Parse(r io.Reader, name string) (site.Sheet, error) {
	text, err := io.ReadAll(io.LimitReader(r, largest+1))
	if err != nil {
		return site.Sheet{}, fmt.Errorf("%s: %w", name, err)
	}
	text = bytes.TrimPrefix(text, []byte("\ufeff"))
	if len(text) > largest {
		return site.Sheet{}, &wave.ParseError{File: name, Msg: "is larger than 1 MiB; this is no site sheet, perhaps a recording"}
	}
	if !utf8.Valid(text) {
		return site.Sheet{}, &wave.ParseError{File: name, Line: firstInvalidLine(text), Msg: "is not UTF-8 text; save the site sheet as UTF-8"}
	}
	var sheet site.Sheet
	meta, err := toml.Decode(string(text), &sheet)
	if err != nil {
		return site.Sheet{}, decodeError(err, string(text), name)
	}
	at := indexLines(string(text))
	if err := unknownKey(meta, at); err != nil {
		err.File = name
		return site.Sheet{}, err
	}
	if err := check(sheet, meta, at); err != nil {
		err.File = name
		return site.Sheet{}, err
	}
	return sheet, nil
}

func firstInvalidLine(text []byte) int {
	for i, line := range bytes.Split(text, []byte("\n")) {
		if !utf8.Valid(line) {
			return i + 1
		}
	}
	return 0
}
