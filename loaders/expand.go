package loaders

import (
	"cmp"
	"fmt"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
)

// extensions are those of the files that a folder is searched for, in lower case.
var extensions = map[string]bool{".csv": true, ".txt": true, ".tsv": true, ".tab": true, ".asc": true, ".prn": true,
	".dat": true, ".cfg": true, ".cff": true, ".wav": true, ".xlsx": true, ".zip": true, ".gz": true}

// Expand turns what the user named into files: patterns such as *.csv, which some shells leave to the program, become
// the files that match, and a folder becomes the recordings right in it. Names come in natural order, rec2 before rec10,
// and none twice. An argument that leads to nothing is an error.
func Expand(args []string) ([]string, error) {
	var paths []string
	seen := map[string]bool{}
	for _, arg := range args {
		found, err := expandOne(arg)
		if err != nil {
			return nil, err
		}
		for _, path := range found {
			if key := filepath.Clean(path); !seen[key] {
				seen[key] = true
				paths = append(paths, path)
			}
		}
	}
	return paths, nil
}

func expandOne(arg string) ([]string, error) {
	info, err := os.Stat(arg)
	switch {
	case err == nil && info.IsDir():
		return folder(arg)
	case err == nil || !strings.ContainsAny(arg, "*?["):
		return []string{arg}, nil // a missing file is reported when it is opened
	}
	return pattern(arg)
}

// folder lists the recordings right in a folder, hidden files aside.
func folder(dir string) ([]string, error) {
	entries, err := os.ReadDir(dir)
	if err != nil {
		return nil, fmt.Errorf("%s: the folder cannot be listed: %w", dir, cause(err))
	}
	var paths []string
	for _, e := range entries {
		name := e.Name()
		if extensions[strings.ToLower(filepath.Ext(name))] && !strings.HasPrefix(name, ".") && !isFolder(filepath.Join(dir, name), e) {
			paths = append(paths, filepath.Join(dir, name))
		}
	}
	if len(paths) == 0 {
		return nil, fmt.Errorf("%s: no recording is in this folder (files ending in .csv, .txt, .cfg, .cff, .wav, .xlsx, .zip or .gz); name the files", dir)
	}
	slices.SortFunc(paths, Natural)
	return paths, nil
}

func isFolder(path string, e os.DirEntry) bool {
	if e.Type()&os.ModeSymlink == 0 {
		return e.IsDir()
	}
	info, err := os.Stat(path)
	return err == nil && info.IsDir()
}

// pattern lists the files whose name matches the last element; on Windows letter case does not count.
func pattern(arg string) ([]string, error) {
	dir, last := filepath.Split(arg)
	if strings.ContainsAny(dir, "*?[") {
		return glob(arg)
	}
	if _, err := filepath.Match(last, ""); err != nil {
		return nil, fmt.Errorf("%s: this is no pattern; close the bracket, or name the file", arg)
	}
	entries, err := os.ReadDir(cmp.Or(dir, "."))
	if err != nil {
		return nil, fmt.Errorf("%s: the folder cannot be listed: %w", arg, cause(err))
	}
	var paths []string
	for _, e := range entries {
		name := e.Name()
		if matches(last, name) && !isFolder(dir+name, e) {
			paths = append(paths, dir+name)
		}
	}
	return orNone(arg, paths)
}

func matches(pattern, name string) bool {
	if runtime.GOOS == "windows" {
		pattern, name = strings.ToLower(pattern), strings.ToLower(name)
	}
	ok, _ := filepath.Match(pattern, name)
	return ok && (!strings.HasPrefix(name, ".") || strings.HasPrefix(pattern, "."))
}

// glob serves patterns with wildcards in their folders too.
func glob(arg string) ([]string, error) {
	found, err := filepath.Glob(arg)
	if err != nil {
		return nil, fmt.Errorf("%s: this is no pattern; close the bracket, or name the file", arg)
	}
	found = slices.DeleteFunc(found, func(path string) bool {
		info, err := os.Stat(path)
		return err == nil && info.IsDir()
	})
	return orNone(arg, found)
}

func orNone(arg string, paths []string) ([]string, error) {
	if len(paths) == 0 {
		return nil, fmt.Errorf("%s: no file matches; check the folder and the pattern", arg)
	}
	slices.SortFunc(paths, Natural)
	return paths, nil
}

// Natural compares names so that runs of digits count as numbers: rec2 comes before rec10.
func Natural(a, b string) int {
	for i, j := 0, 0; ; {
		switch {
		case i == len(a) || j == len(b):
			return cmp.Or(cmp.Compare(len(a)-i, len(b)-j), cmp.Compare(a, b))
		case digit(a[i]) && digit(b[j]):
			m, n := digits(a[i:]), digits(b[j:])
			x, y := strings.TrimLeft(a[i:i+m], "0"), strings.TrimLeft(b[j:j+n], "0")
			if c := cmp.Or(cmp.Compare(len(x), len(y)), cmp.Compare(x, y)); c != 0 {
				return c
			}
			i, j = i+m, j+n
		case a[i] != b[j]:
			return cmp.Compare(a[i], b[j])
		default:
			i, j = i+1, j+1
		}
	}
}

func digit(c byte) bool { return c-'0' <= 9 }

func digits(s string) int {
	n := 0
	for n < len(s) && digit(s[n]) {
		n++
	}
	return n
}
