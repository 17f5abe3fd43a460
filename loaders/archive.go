package loaders

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"

	"github.com/klauspost/compress/gzip"
	"github.com/klauspost/compress/zip"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

// Archives are read in place: an archive is a file system to the loaders, whose files are unpacked while they are
// read, and nothing is written to disk or held in memory whole.

const (
	maxMembers   = 10_000
	maxDirectory = 16 << 20 // bytes of a zip's table of contents
)

// A packed file that unpacks to more than this many times its size, beyond the first so many bytes, holds no
// recording: tables of measured values shrink to a tenth or twentieth, not to a three-hundredth.
const (
	maxRatio     = 300
	ratioApplies = 64 << 20
)

const bomb = input.Refusal("it unpacks to more than 300 times its size, which no recording does; it may be made to harm: do not use it")

// A kind of packed file.
type packing uint8

const (
	plainFile packing = iota
	gzipFile
	zipFile
	xlsxFile
)

// packingOf looks at a file's first bytes, and for a zip at what is in it.
func packingOf(path string) packing {
	f, err := os.Open(path)
	if err != nil {
		return plainFile
	}
	defer f.Close()
	var head [4096]byte
	n, _ := io.ReadFull(f, head[:])
	switch {
	case n > 2 && head[0] == 0x1F && head[1] == 0x8B:
		return gzipFile
	case !bytes.HasPrefix(head[:n], []byte("PK\x03\x04")):
		return plainFile
	case strings.EqualFold(filepath.Ext(path), ".xlsx") || bytes.Contains(head[:n], []byte("[Content_Types].xml")) || bytes.Contains(head[:n], []byte("xl/workbook.xml")):
		return xlsxFile
	}
	return zipFile
}

// gzipFS shows a folder as if its .gz files were unpacked under their names without .gz.
type gzipFS struct{}

func (gzipFS) Open(name string) (fs.File, error) {
	f, err := os.Open(name + ".gz")
	if errors.Is(err, fs.ErrNotExist) {
		return os.Open(name)
	}
	if err != nil {
		return nil, err
	}
	info, err := f.Stat()
	if err != nil {
		f.Close()
		return nil, err
	}
	z, err := gzip.NewReader(f)
	if err != nil {
		f.Close()
		return nil, err
	}
	return &packedFile{Reader: &ratioReader{r: z, packed: info.Size()}, close: f.Close, info: unpackedInfo{info, filepath.Base(name), -1}}, nil
}

func (gzipFS) ReadDir(dir string) ([]fs.DirEntry, error) {
	entries, err := os.ReadDir(dir)
	for i, e := range entries {
		if name, ok := strings.CutSuffix(e.Name(), ".gz"); ok {
			entries[i] = renamed{e, name}
		}
	}
	return entries, err
}

// renamed is a folder's entry under another name.
type renamed struct {
	fs.DirEntry
	name string
}

func (r renamed) Name() string { return r.name }

// zipFS shows the inside of a zip. It holds no file open between reads.
type zipFS struct{ path string }

func (z zipFS) Open(name string) (fs.File, error) {
	r, err := z.reader()
	if err != nil {
		return nil, err
	}
	for _, f := range r.File {
		if f.Name != name {
			continue
		}
		body, err := f.Open()
		if err != nil {
			r.Close()
			return nil, err
		}
		return &packedFile{Reader: &ratioReader{r: body, packed: int64(f.CompressedSize64)}, close: r.Close, info: f.FileInfo()}, nil
	}
	r.Close()
	return nil, &fs.PathError{Op: "open", Path: name, Err: fs.ErrNotExist}
}

func (z zipFS) ReadDir(dir string) ([]fs.DirEntry, error) {
	r, err := z.reader()
	if err != nil {
		return nil, err
	}
	defer r.Close()
	var entries []fs.DirEntry
	for _, f := range r.File {
		if at := strings.LastIndexByte(f.Name, '/'); !f.FileInfo().IsDir() && filepath.Clean(f.Name[:at+1]) == filepath.Clean(dir) {
			entries = append(entries, renamed{fs.FileInfoToDirEntry(f.FileInfo()), f.Name[at+1:]})
		}
	}
	return entries, nil
}

// reader opens the zip, whose table of contents is held in memory and must therefore be of a sane size.
func (z zipFS) reader() (*zip.ReadCloser, error) {
	size, err := directorySize(z.path)
	if err != nil {
		return nil, err
	}
	if size > maxDirectory {
		return nil, &wave.UnsupportedError{File: filepath.Base(z.path), Msg: fmt.Sprintf("the zip's table of contents takes %d MB; unpack it and name the recordings", size>>20)}
	}
	r, err := zip.OpenReader(z.path)
	if err != nil {
		return nil, &wave.ParseError{File: filepath.Base(z.path), Err: err, Msg: fmt.Sprintf("the zip is damaged (%v); copy it again from where it came from", err)}
	}
	if len(r.File) > maxMembers {
		r.Close()
		return nil, &wave.UnsupportedError{File: filepath.Base(z.path), Msg: fmt.Sprintf("the zip holds %d files, more than the %d that are looked at; unpack it and name the recordings", len(r.File), maxMembers)}
	}
	return r, nil
}

// directorySize finds the announced size of a zip's table of contents in its end record (PKWARE APPNOTE 4.3.16).
// Sizes beyond 4 GiB are in another record and too large anyway.
func directorySize(path string) (int64, error) {
	f, err := os.Open(path)
	if err != nil {
		return 0, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return 0, err
	}
	tail := make([]byte, min(info.Size(), 65536+22))
	if _, err := f.ReadAt(tail, info.Size()-int64(len(tail))); err != nil && err != io.EOF {
		return 0, err
	}
	at := bytes.LastIndex(tail, []byte("PK\x05\x06"))
	if at < 0 || len(tail)-at < 22 {
		return 0, nil // the zip reader says what is wrong
	}
	return int64(binary.LittleEndian.Uint32(tail[at+12:])), nil
}

// members lists the recordings in a zip, in natural order.
func (z zipFS) members() ([]string, error) {
	r, err := z.reader()
	if err != nil {
		return nil, err
	}
	defer r.Close()
	var names []string
	for _, f := range r.File {
		base := f.Name[strings.LastIndexByte(f.Name, '/')+1:]
		if f.FileInfo().IsDir() || strings.HasPrefix(base, ".") || strings.HasPrefix(f.Name, "__MACOSX/") {
			continue
		}
		switch ext := strings.ToLower(filepath.Ext(base)); {
		case f.Flags&1 != 0:
			return nil, &wave.UnsupportedError{File: filepath.Base(z.path), Msg: fmt.Sprintf("%q in it is encrypted; unpack it with its password and name the recordings", f.Name)}
		case ext == ".zip" || ext == ".gz" || ext == ".xlsx" || !extensions[ext]:
		default:
			names = append(names, f.Name)
		}
	}
	if len(names) == 0 {
		return nil, &wave.UnsupportedError{File: filepath.Base(z.path), Msg: "no recording is in this zip (files ending in .csv, .txt, .cfg, .cff or .wav); unpack it and name the files"}
	}
	slices.SortFunc(names, Natural)
	return names, nil
}

// A packedFile is a file that is unpacked while it is read.
type packedFile struct {
	io.Reader
	close func() error
	info  fs.FileInfo
}

func (f *packedFile) Stat() (fs.FileInfo, error) { return f.info, nil }
func (f *packedFile) Close() error               { return f.close() }

// unpackedInfo describes a packed file as it will be unpacked. The time is that of the packed file, so that a change
// shows.
type unpackedInfo struct {
	packed fs.FileInfo
	name   string
	size   int64
}

func (i unpackedInfo) Name() string       { return i.name }
func (i unpackedInfo) Size() int64        { return i.size }
func (i unpackedInfo) Mode() fs.FileMode  { return i.packed.Mode() }
func (i unpackedInfo) ModTime() time.Time { return i.packed.ModTime() }
func (i unpackedInfo) IsDir() bool        { return false }
func (i unpackedInfo) Sys() any           { return nil }

// ratioReader ends reading where a packed file turns out to unpack without measure.
type ratioReader struct {
	r         io.Reader
	packed, n int64
}

func (r *ratioReader) Read(p []byte) (int, error) {
	n, err := r.r.Read(p)
	r.n += int64(n)
	if err == io.ErrUnexpectedEOF {
		err = input.ErrCut // callers must not take it for the end of a short read
	}
	if r.n > ratioApplies && r.n > maxRatio*r.packed {
		return n, bomb
	}
	return n, err
}
