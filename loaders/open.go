// Package loaders opens recordings, whatever their format: it expands patterns and folders, finds the format of each
// file by trying the readers in turn, looks into archives, and puts several files together to one recording.
package loaders

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"wavetally/harmonics/wave"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
)

// Options says what the user declared about the files.
type Options = input.Options

// A format is one kind of file that can be read. Its open returns a [*wave.NotThisFormatError] for any other.
type format struct {
	name string
	open func(path string, opt Options) (wave.Source, error)
}

// formats are tried in this order; a table of text, which has no mark of its own, comes last.
var formats = []format{
	{"a table of text (CSV)", csv.Open},
}

// Open opens all paths together as one recording. Its errors are of three kinds, told apart with errors.As:
// [*wave.NotThisFormatError] when no format fits, [*wave.ParseError] when a file breaks its format, and
// [*wave.UnsupportedError] when it uses a part of its format that is not read. An error of the file system is passed
// on as it is.
func Open(paths []string, opt Options) (wave.Source, error) {
	if len(paths) == 0 {
		return nil, errors.New("no file was named; name one or more recordings, a folder, or a pattern such as *.csv")
	}
	if len(paths) > 1 {
		return nil, fmt.Errorf("%d files were named; name one", len(paths))
	}
	return openOne(paths[0], opt)
}

// openOne opens one file with the first format that knows it.
func openOne(path string, opt Options) (wave.Source, error) {
	if err := readable(path, opt); err != nil {
		return nil, err
	}
	var tried []string
	for _, f := range formats {
		src, err := f.open(path, opt)
		var other *wave.NotThisFormatError
		if !errors.As(err, &other) {
			return src, err
		}
		tried = append(tried, f.name+": "+other.Msg)
	}
	return nil, &wave.NotThisFormatError{File: filepath.Base(path), Format: "a recording that can be read",
		Msg: strings.Join(tried, "; ") + "; export the waveforms as COMTRADE, WAV, CSV or XLSX"}
}

// readable says in plain words why a path cannot be opened.
func readable(path string, opt Options) error {
	f, err := opt.Open(path)
	if err == nil {
		defer f.Close()
		if info, err := f.Stat(); err == nil && info.IsDir() {
			return fmt.Errorf("%s: it is a folder; name the files in it, or name it alone", path)
		}
		return nil
	}
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return fmt.Errorf("%s: there is no such file; check the name and the folder%w", path, quiet{err})
	case errors.Is(err, fs.ErrPermission):
		return fmt.Errorf("%s: it may not be read; check its permissions%w", path, quiet{err})
	}
	return fmt.Errorf("%s: it cannot be opened: %w", path, cause(err))
}

// quiet is a cause that has been put into words already.
type quiet struct{ error }

func (quiet) Error() string   { return "" }
func (q quiet) Unwrap() error { return q.error }

// cause strips the operation and path that the file system puts before its error.
func cause(err error) error {
	var p *os.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}
