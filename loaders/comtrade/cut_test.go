package comtrade_test

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"testing"
	"testing/iotest"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/input"
)

// A disk is a file system in memory whose files are read through a filter and are not seekable, as in an archive.
type disk struct {
	files  map[string][]byte
	filter func(name string, r io.Reader) io.Reader
	sized  bool
}

func (d disk) Open(name string) (fs.File, error) {
	data, ok := d.files[name]
	if !ok {
		return nil, &fs.PathError{Op: "open", Path: name, Err: fs.ErrNotExist}
	}
	var r io.Reader = bytes.NewReader(data)
	if d.filter != nil {
		r = d.filter(name, r)
	}
	size := int64(-1)
	if d.sized {
		size = int64(len(data))
	}
	return diskFile{r, name, size}, nil
}

func (d disk) ReadDir(string) (entries []fs.DirEntry, err error) {
	for name := range d.files {
		entries = append(entries, fs.FileInfoToDirEntry(diskFile{name: name}))
	}
	return entries, nil
}

type diskFile struct {
	io.Reader
	name string
	size int64
}

func (f diskFile) Close() error               { return nil }
func (f diskFile) Stat() (fs.FileInfo, error) { return f, nil }
func (f diskFile) Name() string               { return f.name }
func (f diskFile) Size() int64                { return f.size }
func (f diskFile) Mode() fs.FileMode          { return 0 }
func (f diskFile) ModTime() time.Time         { return time.Time{} }
func (f diskFile) IsDir() bool                { return false }
func (f diskFile) Sys() any                   { return nil }

// count reads a recording and returns its number of samples, or the error.
func count(d disk, name string) (n int, notes []wave.Note, err error) {
	src, err := comtrade.Open(name, input.Options{FS: d})
	if err != nil {
		return 0, nil, err
	}
	for b, e := range src.Blocks() {
		n += b.Len()
		err = e
	}
	return n, append(src.Header().Notes, src.Notes()...), err
}

// written returns a recording's files, by base name.
func written(t testing.TB, src wave.Source, stem, form string) map[string][]byte {
	t.Helper()
	dir := t.TempDir()
	if err := comtrade.Write(filepath.Join(dir, stem), src, form); err != nil {
		t.Fatal(err)
	}
	files := map[string][]byte{}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if files[e.Name()], err = os.ReadFile(filepath.Join(dir, e.Name())); err != nil {
			t.Fatal(err)
		}
	}
	return files
}

// short is a recording of a few records.
func short() *held {
	h := invented()
	h.blocks = h.blocks[:1]
	for c, row := range h.blocks[0].Data {
		h.blocks[0].Data[c] = row[:20]
	}
	return h
}

// Wherever a data file is cut, the complete records are read and the loss is told.
func TestCutAtEveryByte(t *testing.T) {
	for _, form := range []string{comtrade.ASCII, comtrade.Binary, comtrade.Binary32, comtrade.Float32} {
		files := written(t, short(), "rec", form)
		whole := files["rec.dat"]
		for _, sized := range []bool{true, false} {
			for n := range whole {
				files["rec.dat"] = whole[:n]
				got, notes, err := count(disk{files: files, sized: sized}, "rec.cfg")
				want := n * 20 / len(whole)
				if form == comtrade.ASCII {
					want = bytes.Count(whole[:n], []byte("\n"))
					if n >= len(whole)-2 { // many files end without an end of line
						want = 20
					}
				}
				if got != want || (err == nil) != (want > 0) {
					t.Fatalf("%s cut at byte %d of %d (size told: %t): %d records, want %d; %v", form, n, len(whole), sized, got, want, err)
				}
				if err == nil && got < 20 && !has(notes, "truncated") {
					t.Fatalf("%s cut at byte %d: notes %v", form, n, notes)
				}
			}
		}
	}
}

func has(notes []wave.Note, code string) bool {
	for _, n := range notes {
		if n.Code == code {
			return true
		}
	}
	return false
}

// Wherever a configuration or a file that holds all is cut, there is an error, or what is there is read.
func TestConfigurationCutAtEveryByte(t *testing.T) {
	for _, stem := range []string{"rec", "rec.cff"} {
		files := written(t, short(), stem, comtrade.Binary)
		name := "rec.cfg"
		if stem != "rec" {
			name = stem
		}
		whole := files[name]
		least := bytes.Index(whole, []byte("BINARY"))
		for n := range whole {
			files[name] = whole[:n]
			got, _, err := count(disk{files: files, sized: true}, name)
			if n < least && err == nil {
				t.Errorf("%s cut at byte %d: no error", name, n)
			}
			if err != nil && got > 0 {
				t.Errorf("%s cut at byte %d: %d records and %v", name, n, got, err)
			}
			var parse *wave.ParseError
			var other *wave.NotThisFormatError
			if err != nil && !errors.As(err, &parse) && !errors.As(err, &other) {
				t.Errorf("%s cut at byte %d: an error of the wrong kind: %v", name, n, err)
			}
		}
	}
}

// Readers may give a byte at a time, or data together with an error; an error in the middle is handed on.
func TestReadersThatDoAsTheyLike(t *testing.T) {
	broken := errors.New("the disk is broken")
	for _, form := range []string{comtrade.ASCII, comtrade.Binary} {
		for _, stem := range []string{"rec", "rec.cff"} {
			files := written(t, invented().segment(3.3, 6400, 100), stem, form) // timed by stamps
			name := "rec.cfg"
			if stem != "rec" {
				name = stem
			}
			for way, filter := range map[string]func(io.Reader) io.Reader{
				"one byte": iotest.OneByteReader, "half": iotest.HalfReader, "data with the error": iotest.DataErrReader,
			} {
				n, _, err := count(disk{files: files, filter: func(_ string, r io.Reader) io.Reader { return filter(r) }}, name)
				if n != 3300 || err != nil {
					t.Errorf("%s, %s, %s: %d records, want 3300; %v", form, stem, way, n, err)
				}
			}
			for file, data := range files {
				for _, after := range []int{0, len(data) / 3, len(data) - 1} {
					for _, cause := range []error{broken, input.ErrCut} {
						filter := func(name string, r io.Reader) io.Reader {
							if name != file {
								return r
							}
							return io.MultiReader(io.LimitReader(r, int64(after)), iotest.ErrReader(cause))
						}
						n, notes, err := count(disk{files: files, filter: filter}, name)
						what := fmt.Sprintf("%s, %s, %v after %d bytes", form, file, cause, after)
						switch {
						case cause == broken && !errors.Is(err, broken):
							t.Errorf("%s: %d records, %v", what, n, err)
						case cause == input.ErrCut && file == "rec.dat" && after > 0 && (n < 3300*after/len(data)-20 || err != nil || !has(notes, "truncated")):
							t.Errorf("%s: %d records, %v, %v", what, n, err, notes)
						}
					}
				}
			}
		}
	}
}

// Announced sizes cost nothing: a file that tells of billions is refused or read as it is, at once.
func TestAnnouncedSizesAreNotTrusted(t *testing.T) {
	for what, change := range map[string][2]string{
		"analog channels": {"1,1A,0D", "999999,4096A,0D"},
		"status channels": {"1,1A,0D", "999999,1A,999998D"},
		"rates":           {"1\r\n1000,5", "999999\r\n1000,5"},
		"samples":         {"1000,5", "1000,9007199254740992"},
	} {
		files := map[string][]byte{"rec.cfg": replaceOnce(t, []byte(small("x", "V1")), change[0], change[1]), "rec.dat": []byte(fiveRecords)}
		var n int
		var err error
		allocated := testing.AllocsPerRun(1, func() { n, _, err = count(disk{files: files, sized: true}, "rec.cfg") })
		if allocated > 2000 || (err == nil) != (what == "samples") || err == nil && n != 5 {
			t.Errorf("%s: %d records, %v, %g allocations", what, n, err, allocated)
		}
	}
}

// A file that changes between opening and reading is noticed.
func TestFileThatChanges(t *testing.T) {
	dir := t.TempDir()
	if err := comtrade.Write(filepath.Join(dir, "rec"), short(), comtrade.Binary); err != nil {
		t.Fatal(err)
	}
	src := open(t, filepath.Join(dir, "rec.cfg"))
	f, err := os.OpenFile(filepath.Join(dir, "rec.dat"), os.O_APPEND|os.O_WRONLY, 0)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if _, err := f.Write(make([]byte, 36)); err != nil {
		t.Fatal(err)
	}
	for _, e := range src.Blocks() {
		err = e
	}
	const want = "rec.dat: the file changed while it was read; wait until it is complete, or copy it, and run again"
	if err == nil || err.Error() != want {
		t.Errorf("%v", err)
	}
}

// A recording can be left in the middle and read again.
func TestReadingTwice(t *testing.T) {
	files := written(t, invented(), "rec", comtrade.Float32)
	src, err := comtrade.Open("rec.cfg", input.Options{FS: disk{files: files, sized: true}})
	if err != nil {
		t.Fatal(err)
	}
	for range src.Blocks() {
		break
	}
	compare(t, pieces(t, src), pieces(t, src), []float64{0, 0, 0, 0, 0}, 0)
	if n := len(src.Notes()); n != 2 { // two channels have missing samples
		t.Errorf("%d notes after two readings", n)
	}
}

// FuzzReader takes a configuration and data. Whatever they are, nothing panics, blocks are whole, and what is read
// survives being written and read again.
func FuzzReader(f *testing.F) {
	f.Add([]byte(small("x", "V1")), []byte(fiveRecords))
	f.Add(replaceOnce(f, []byte(small("x", "V1")), "1\r\n1000,5", "0\r\n0,5"), []byte(fiveRecords))
	f.Add(replaceOnce(f, []byte(small("x", "V1")), "1\r\n1000,5", "2\r\n1000,2\r\n500,5"), []byte(fiveRecords))
	for _, form := range []string{comtrade.ASCII, comtrade.Binary, comtrade.Binary32, comtrade.Float32} {
		files := written(f, short(), "rec", form)
		f.Add(files["rec.cfg"], files["rec.dat"])
		f.Add(written(f, short(), "rec.cff", form)["rec.cff"], []byte{})
	}
	f.Fuzz(func(t *testing.T, cfg, dat []byte) {
		files := map[string][]byte{"rec.cfg": cfg, "rec.dat": dat}
		src, err := comtrade.Open("rec.cfg", input.Options{FS: disk{files: files, sized: true}})
		if err != nil {
			return
		}
		for _, err := range src.Blocks() {
			if err != nil {
				return
			}
		}
		first := pieces(t, src)
		for _, p := range first {
			if len(p.data) > 64 || len(p.data[0]) < 8 || len(first) > 100 { // stamps of few records tell no rate
				return
			}
		}
		again := written(t, src, "rec", comtrade.Float32)
		second, err := comtrade.Open("rec.cfg", input.Options{FS: disk{files: again, sized: true}})
		if err != nil {
			t.Fatal(err)
		}
		same(t, first, pieces(t, second))
	})
}

// same checks that the samples of two recordings are the same to the resolution of single precision.
func same(t *testing.T, a, b []piece) {
	t.Helper()
	x, y := joined(a), joined(b)
	for c := range x {
		if len(x[c]) != len(y[c]) {
			t.Fatalf("%d samples became %d", len(x[c]), len(y[c]))
		}
		for i, v := range x[c] {
			w := y[c][i]
			lost := math.IsNaN(v) || math.Abs(v) > math.MaxFloat32*0.99 // single precision does not hold it
			if lost != math.IsNaN(w) && math.Abs(v) < math.MaxFloat32*0.99 || !lost && math.Abs(v-w) > 1e-6*math.Abs(v)+1e-40 {
				t.Fatalf("channel %d, sample %d: %g became %g", c, i, v, w)
			}
		}
	}
}

func joined(all []piece) [][]float64 {
	out := make([][]float64, len(all[0].data))
	for _, p := range all {
		for c, row := range p.data {
			out[c] = append(out[c], row...)
		}
	}
	return out
}
