package loaders_test

import (
	"archive/zip"
	"bytes"
	"compress/gzip"
	"errors"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"wavetally/harmonics/wave"
	"wavetally/loaders"
	"wavetally/loaders/comtrade"
)

func gzipped(t *testing.T, text string) []byte {
	t.Helper()
	var b bytes.Buffer
	z := gzip.NewWriter(&b)
	io.WriteString(z, text)
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func zipped(t *testing.T, files map[string]string) []byte {
	t.Helper()
	var b bytes.Buffer
	z := zip.NewWriter(&b)
	for name, text := range files {
		w, err := z.Create(name)
		if err != nil {
			t.Fatal(err)
		}
		io.WriteString(w, text)
	}
	if err := z.Close(); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func write(t *testing.T, name string, content []byte) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, content, 0o600); err != nil {
		t.Fatal(err)
	}
	return path
}

func TestGzipIsReadInPlace(t *testing.T) {
	path := write(t, "a.csv.gz", gzipped(t, table([]string{"V1", "V2"}, 0, 5000, clock)))
	src, err := loaders.Open([]string{path}, loaders.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if got := stretches(t, src, "V1 V2"); len(got) != 1 || got[0].to != 5000 {
		t.Errorf("samples are in %v, want 5000", got)
	}
	if f := src.Header().Files[0]; f.Name != "a.csv.gz" || f.Path != path {
		t.Errorf("file is %q at %q, want a.csv.gz at %q", f.Name, f.Path, path)
	}
}

func TestGzipCutShort(t *testing.T) {
	whole := gzipped(t, table([]string{"V1", "V2"}, 0, 5000, clock))
	src, err := loaders.Open([]string{write(t, "a.csv.gz", whole[:len(whole)*2/3])}, loaders.Options{})
	if err != nil {
		t.Fatal(err)
	}
	got := stretches(t, src, "V1 V2")
	if len(got) != 1 || got[0].to < 2000 || got[0].to >= 5000 {
		t.Errorf("samples are in %v, want some of 5000", got)
	}
	if n := src.Notes(); len(n) != 1 || n[0].Code != "truncated" {
		t.Errorf("notes are %v, want truncated", n)
	}
}

func TestZipIsReadInPlaceAsASession(t *testing.T) {
	path := write(t, "week.zip", zipped(t, map[string]string{
		"day/b.csv": table([]string{"V1", "V2"}, 5000, 9000, clock), "day/a.csv": table([]string{"V1", "V2"}, 0, 5000, clock),
		"readme.md": "made up", "__MACOSX/day/._a.csv": "\x00\x05", ".hidden.csv": "x"}))
	src, err := loaders.Open([]string{path}, loaders.Options{})
	if err != nil {
		t.Fatal(err)
	}
	if got := stretches(t, src, "V1 V2"); len(got) != 1 || got[0].to != 9000 {
		t.Errorf("samples are in %v, want 9000 in a run", got)
	}
	for i, want := range []string{"week.zip/a.csv", "week.zip/b.csv"} {
		if f := src.Header().Files[i]; f.Name != want || f.Path != path {
			t.Errorf("file %d is %q at %q, want %q at %q", i, f.Name, f.Path, want, path)
		}
	}
}

func TestBadArchives(t *testing.T) {
	good := zipped(t, map[string]string{"a.csv": table([]string{"V1"}, 0, 50, clock)})
	for _, test := range []struct {
		name    string
		content []byte
		want    string
	}{
		{"cut.zip", good[:len(good)-30], "cut.zip: the zip is damaged (zip: not a valid zip file); copy it again from where it came from"},
		{"empty.zip", zipped(t, map[string]string{"notes.md": "x"}), "empty.zip: no recording is in this zip (files ending in .csv, .txt, .cfg, .cff or .wav); unpack it and name the files"},
		{"nested.zip", zipped(t, map[string]string{"inner.zip": string(good)}), "nested.zip: no recording is in this zip (files ending in .csv, .txt, .cfg, .cff or .wav); unpack it and name the files"},
		{"noise.csv.gz", []byte("\x1f\x8b\x08\x00garbage that is no deflate stream"), ""},
		{"text.zip", zipped(t, map[string]string{"a.csv": "no numbers here\nnor here\n"}), "text.zip/a.csv: not a recording that can be read: it is none of COMTRADE, WAV and XLSX, and as a table of text no rows of numbers were found in it; export the waveforms as one of these"},
		{"broken.zip", zipped(t, map[string]string{"a.csv": ""}), "broken.zip/a.csv: the file is empty; export the recording again"},
		{"renamed.csv", gzipped(t, "x"), "renamed.csv: it is packed with gzip but its name does not end in .gz; rename it"},
	} {
		_, err := loaders.Open([]string{write(t, test.name, test.content)}, loaders.Options{})
		switch {
		case err == nil:
			t.Errorf("%s: no error", test.name)
		case test.want == "" && !strings.HasPrefix(err.Error(), test.name+": "):
			t.Errorf("%s: error is %v, which does not name the file", test.name, err)
		case test.want != "" && err.Error() != test.want:
			t.Errorf("%s: error is\n%v, want\n%s", test.name, err, test.want)
		}
	}
}

// TestBomb reads a gzip file that unpacks to a thousand times its size: it is refused after a bounded amount of work.
func TestBomb(t *testing.T) {
	var b bytes.Buffer
	z, _ := gzip.NewWriterLevel(&b, gzip.BestCompression)
	io.WriteString(z, "V1 (V)\n")
	line := bytes.Repeat([]byte("0.0\n"), 1<<18)
	for range 100 {
		z.Write(line)
	}
	z.Close()
	src, err := loaders.Open([]string{write(t, "bomb.csv.gz", b.Bytes())}, loaders.Options{Rate: rate})
	if err != nil {
		t.Fatal(err)
	}
	var before, after runtime.MemStats
	runtime.ReadMemStats(&before)
	var last error
	for _, err := range src.Blocks() {
		last = err
	}
	runtime.ReadMemStats(&after)
	const want = "bomb.csv.gz: it unpacks to more than 300 times its size, which no recording does; it may be made to harm: do not use it"
	var parse *wave.ParseError
	if !errors.As(last, &parse) || last.Error() != want {
		t.Errorf("error is %v, want %s", last, want)
	}
	if grown := after.TotalAlloc - before.TotalAlloc; grown > 64<<20 {
		t.Errorf("reading it allocated %d MB", grown>>20)
	}
}

func TestEndlessLine(t *testing.T) {
	path := write(t, "line.csv.gz", gzipped(t, strings.Repeat("1,", 20<<20)))
	_, err := loaders.Open([]string{path}, loaders.Options{})
	const want = "line.csv.gz:1: the line is longer than 1 MiB; this is no table with one sample a row: export it so"
	if err == nil || err.Error() != want {
		t.Errorf("error is %v, want %s", err, want)
	}
}

func TestPathsThatCannotBeRead(t *testing.T) {
	dir := t.TempDir()
	loop := filepath.Join(dir, "loop.csv")
	if err := os.Symlink(loop, loop); err != nil {
		t.Skip("no symbolic links here: ", err)
	}
	sub := filepath.Join(dir, "sub.csv")
	if err := os.Mkdir(sub, 0o700); err != nil {
		t.Fatal(err)
	}
	for path, want := range map[string]string{
		os.DevNull:                     os.DevNull + ": it is a pipe or a device, which cannot be read twice; write the recording to a file",
		loop:                           loop + ": it cannot be opened: too many levels of symbolic links",
		sub:                            sub + ": it is a folder; name it alone, or the files in it",
		filepath.Join(dir, "none.csv"): filepath.Join(dir, "none.csv") + ": there is no such file; check the name and the folder",
	} {
		_, err := loaders.Open([]string{path}, loaders.Options{})
		if err == nil || err.Error() != want && runtime.GOOS == "linux" {
			t.Errorf("error is %v, want %s", err, want)
		}
	}
	if _, err := loaders.Open(nil, loaders.Options{}); err == nil {
		t.Error("no paths give no error")
	}
}

func TestExpand(t *testing.T) {
	dir := t.TempDir()
	for _, name := range []string{"rec10.csv", "rec2.csv", "REC3.CSV", "a[1].csv", ".hidden.csv", "survey.json", "note.md", "x.wav"} {
		if err := os.WriteFile(filepath.Join(dir, name), nil, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Mkdir(filepath.Join(dir, "old.csv"), 0o700); err != nil {
		t.Fatal(err)
	}
	for arg, want := range map[string]string{
		"":           "REC3.CSV a[1].csv rec2.csv rec10.csv x.wav",
		"rec*.csv":   "rec2.csv rec10.csv",
		"rec?.csv":   "rec2.csv",
		"a[1].csv":   "a[1].csv",
		"*.json":     "survey.json",
		"absent.csv": "absent.csv",
	} {
		if runtime.GOOS == "windows" && strings.HasPrefix(arg, "rec") {
			continue // letter case does not count there
		}
		paths, err := loaders.Expand([]string{filepath.Join(dir, arg)})
		if err != nil {
			t.Errorf("%s: %v", arg, err)
			continue
		}
		var names []string
		for _, p := range paths {
			names = append(names, filepath.Base(p))
		}
		if got := strings.Join(names, " "); got != want {
			t.Errorf("%q expands to %s, want %s", arg, got, want)
		}
	}
	if got, _ := loaders.Expand([]string{filepath.Join(dir, "x.wav"), filepath.Join(dir, "x.*")}); len(got) != 1 {
		t.Errorf("a file named twice comes as %v", got)
	}
	for _, arg := range []string{"none*.csv", "a[.csv"} {
		if got, err := loaders.Expand([]string{filepath.Join(dir, arg)}); err == nil {
			t.Errorf("%s expands to %v, want an error", arg, got)
		}
	}
	if _, err := loaders.Expand([]string{filepath.Join(dir, "old.csv")}); err == nil {
		t.Error("an empty folder gives no error")
	}
}

// TestComtradeWhereverItLies opens one recording as a folder's pair of files, in a zip, packed one by one, and as one
// file, and must find the same samples.
func TestComtradeWhereverItLies(t *testing.T) {
	text := write(t, "a.csv", []byte(table([]string{"V1", "V2"}, 0, 3000, clock)))
	src, err := loaders.Open([]string{text}, loaders.Options{})
	if err != nil {
		t.Fatal(err)
	}
	want := stretches(t, src, "V1 V2")
	dir := t.TempDir()
	if err := comtrade.Write(filepath.Join(dir, "rec"), src, comtrade.Float32); err != nil {
		t.Fatal(err)
	}
	cfg, _ := os.ReadFile(filepath.Join(dir, "rec.cfg"))
	dat, _ := os.ReadFile(filepath.Join(dir, "rec.dat"))
	single := t.TempDir()
	if err := comtrade.Write(filepath.Join(single, "rec.cff"), src, comtrade.Float32); err != nil {
		t.Fatal(err)
	}
	packedPair := t.TempDir()
	os.WriteFile(filepath.Join(packedPair, "rec.cfg.gz"), gzipped(t, string(cfg)), 0o600)
	os.WriteFile(filepath.Join(packedPair, "REC.DAT.gz"), gzipped(t, string(dat)), 0o600)
	inZip := filepath.Dir(write(t, "rec.zip", zipped(t, map[string]string{"x/REC.CFG": string(cfg), "x/rec.dat": string(dat)})))
	for _, dir := range []string{dir, single, packedPair, inZip} {
		paths, err := loaders.Expand([]string{dir})
		if err != nil {
			t.Fatal(err)
		}
		src, err := loaders.Open(paths, loaders.Options{})
		if err != nil {
			t.Errorf("%v: %v", paths, err)
			continue
		}
		if got := stretches(t, src, "V1 V2"); len(got) != 1 || got[0] != want[0] {
			t.Errorf("%v: samples are in %v, want %v", paths, got, want)
		}
		for _, f := range src.Header().Files {
			if _, err := os.Stat(f.Path); err != nil {
				t.Errorf("%v: file %q is not on disk", paths, f.Path)
			}
		}
	}
}
