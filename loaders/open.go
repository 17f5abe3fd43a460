// Package loaders opens recordings, whatever their format: it expands patterns and folders, finds the format of each
// file by trying the readers in turn, looks into archives, and puts several files together to one recording.
package loaders

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"iter"
	"os"
	"path/filepath"
	"strings"

	"wavetally/harmonics/wave"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/csv"
	"wavetally/loaders/input"
	"wavetally/loaders/wav"
	"wavetally/loaders/xlsx"
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
	{"COMTRADE", comtrade.Open},
	{"WAV", wav.Open},
	{"XLSX", xlsx.Open},
	{"CSV", csv.Open},
}

// Open opens all paths together as one recording. Its errors are of three kinds, told apart with errors.As:
// [*wave.NotThisFormatError] when no format fits, [*wave.ParseError] when a file breaks its format, and
// [*wave.UnsupportedError] when it uses a part of its format that is not read. Any other is of the file system, or
// says that the files do not go together.
func Open(paths []string, opt Options) (wave.Source, error) {
	if len(paths) == 0 {
		return nil, errors.New("no file was named; name one or more recordings, a folder, or a pattern such as *.csv")
	}
	var items []item
	for _, path := range paths {
		found, err := itemsIn(path, opt)
		if err != nil {
			return nil, err
		}
		items = append(items, found...)
	}
	parts, notes, err := openAll(withoutCompanions(items))
	if err != nil {
		return nil, err
	}
	src := parts[0]
	if len(parts) > 1 {
		if src, err = together(parts); err != nil {
			return nil, err
		}
	}
	if len(notes) > 0 {
		src = noted{src, notes}
	}
	return src, nil
}

// openAll opens each item. Among several, one that is no recording at all, such as a text that explains the others, is
// left out with a note.
func openAll(items []item) (parts []wave.Source, notes []wave.Note, err error) {
	var refused error
	for _, it := range items {
		src, err := it.open()
		var other *wave.NotThisFormatError
		switch {
		case errors.As(err, &other):
			if refused == nil {
				refused = err
			}
			notes = append(notes, wave.Note{Code: "file-skipped", Text: fmt.Sprintf("%s is left out: %s.", it.name, other.Msg)})
		case err != nil:
			return nil, nil, err
		default:
			parts = append(parts, src)
		}
	}
	if len(parts) == 0 {
		return nil, nil, refused
	}
	return parts, notes, nil
}

// noted is a recording with more to say about its files.
type noted struct {
	wave.Source
	notes []wave.Note
}

// Header adds the notes.
func (n noted) Header() wave.Header {
	h := n.Source.Header()
	h.Notes = append(append([]wave.Note(nil), n.notes...), h.Notes...)
	return h
}

// An item is one file to be opened, on disk or in an archive.
type item struct {
	path string // where opt.FS, or the disk, has it
	opt  Options
	disk string // the file on disk
	name string // for messages: the base name, for a file in a zip behind the zip's
}

// itemsIn lists what a path on disk holds: itself, what it unpacks to, or the recordings in it.
func itemsIn(path string, opt Options) ([]item, error) {
	if err := readable(path); err != nil {
		return nil, err
	}
	name := filepath.Base(path)
	switch packingOf(path) {
	case gzipFile:
		bare, ok := cutSuffixFold(path, ".gz")
		if !ok {
			return nil, &wave.UnsupportedError{File: name, Msg: "it is packed with gzip but its name does not end in .gz; rename it"}
		}
		opt.FS = gzipFS{}
		return []item{{path: bare, opt: opt, disk: path, name: name}}, nil
	case zipFile:
		inside := zipFS{path}
		members, err := inside.members()
		if err != nil {
			return nil, err
		}
		opt.FS = inside
		var items []item
		for _, m := range members {
			items = append(items, item{path: m, opt: opt, disk: path, name: name + "/" + m})
		}
		return items, nil
	}
	return []item{{path: path, opt: opt, disk: path, name: name}}, nil
}

func cutSuffixFold(s, suffix string) (string, bool) {
	if n := len(s) - len(suffix); n > 0 && strings.EqualFold(s[n:], suffix) {
		return s[:n], true
	}
	return s, false
}

// withoutCompanions leaves out the .dat files whose .cfg is among the items, and files named twice.
func withoutCompanions(items []item) []item {
	stem := func(it item) (string, string) {
		name, ext := strings.ToLower(it.path), strings.ToLower(filepath.Ext(it.path))
		if z, ok := it.opt.FS.(zipFS); ok {
			name = z.path + "\x00" + name
		}
		return strings.TrimSuffix(name, ext), ext
	}
	configured, seen := map[string]bool{}, map[string]bool{}
	for _, it := range items {
		if s, ext := stem(it); ext == ".cfg" {
			configured[s] = true
		}
	}
	kept := items[:0]
	for _, it := range items {
		s, ext := stem(it)
		if key := it.disk + "\x00" + it.path; ext == ".dat" && configured[s] || seen[key] {
			continue
		} else {
			seen[key] = true
		}
		kept = append(kept, it)
	}
	return kept
}

// open opens an item with the first format that knows it.
func (it item) open() (wave.Source, error) {
	if err := it.unpacks(); err != nil {
		return nil, err
	}
	if err := it.foreign(); err != nil {
		return nil, err
	}
	var other *wave.NotThisFormatError
	for _, f := range formats {
		src, err := f.open(it.path, it.opt)
		switch {
		case errors.As(err, &other):
		case err != nil:
			return nil, it.named(err)
		case it.opt.FS != nil:
			return packed{src, it}, nil
		default:
			return src, nil
		}
	}
	if strings.EqualFold(filepath.Ext(it.path), ".dat") {
		return nil, &wave.NotThisFormatError{File: it.name, Format: "a recording by itself",
			Msg: "the data of a COMTRADE recording are read with their configuration; put the .cfg file of the same name into the same folder"}
	}
	return nil, &wave.NotThisFormatError{File: it.name, Format: "a recording that can be read",
		Msg: fmt.Sprintf("it is none of COMTRADE, WAV and XLSX, and as a table of text %s; export the waveforms as one of these", other.Msg)}
}

// unpacks makes sure that the first bytes of a packed file can be had, before formats are tried on it.
func (it item) unpacks() error {
	if it.opt.FS == nil {
		return nil
	}
	f, err := it.opt.Open(it.path)
	if err == nil {
		defer f.Close()
		_, err = io.ReadFull(f, make([]byte, 512))
	}
	if err == nil || err == io.EOF || err == io.ErrUnexpectedEOF {
		return nil
	}
	return &wave.ParseError{File: it.name, Err: err, Msg: fmt.Sprintf("it cannot be unpacked (%v); copy it again from where it came from", err)}
}

// named puts the archive's name before that of the file in it.
func (it item) named(err error) error {
	if it.opt.FS == nil {
		return err
	}
	var parse *wave.ParseError
	var unsupported *wave.UnsupportedError
	switch {
	case errors.As(err, &parse):
		parse.File = it.name
	case errors.As(err, &unsupported):
		unsupported.File = it.name
	default:
		return fmt.Errorf("%s: %w", it.name, err)
	}
	return err
}

// packed is a recording in an archive.
type packed struct {
	wave.Source
	it item
}

// Unwrap returns the recording as its loader has it.
func (p packed) Unwrap() wave.Source { return p.Source }

// Header names the archive as the file, since that is what there is on disk.
func (p packed) Header() wave.Header {
	h := p.Source.Header()
	files := make([]wave.File, len(h.Files))
	for i, f := range h.Files {
		files[i] = p.it.onDisk(f)
	}
	h.Files = files
	return h
}

// onDisk is the file on disk that f was unpacked from.
func (it item) onDisk(f wave.File) wave.File {
	if _, zipped := it.opt.FS.(zipFS); zipped {
		f.Name, f.Path = filepath.Base(it.disk)+"/"+f.Name, it.disk
		return f
	}
	if _, err := os.Stat(f.Path + ".gz"); err == nil {
		f.Name, f.Path = f.Name+".gz", f.Path+".gz"
	}
	return f
}

// Blocks names the archive in errors.
func (p packed) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for b, err := range p.Source.Blocks() {
			if err != nil {
				err = p.it.named(err)
			}
			if !yield(b, err) {
				return
			}
		}
	}
}

// readable says in plain words why a path cannot be opened.
func readable(path string) error {
	info, err := os.Stat(path) // before opening: opening a pipe would wait for its other end
	switch {
	case err == nil && info.IsDir():
		return fmt.Errorf("%s: it is a folder; name it alone, or the files in it", path)
	case err == nil && !info.Mode().IsRegular():
		return fmt.Errorf("%s: it is a pipe or a device, which cannot be read twice; write the recording to a file", path)
	case err == nil:
		var f fs.File
		if f, err = os.Open(path); err == nil {
			return f.Close()
		}
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
	var p *fs.PathError
	if errors.As(err, &p) {
		return p.Err
	}
	return err
}
