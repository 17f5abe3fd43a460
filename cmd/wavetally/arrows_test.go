package main

import (
	"os/exec"
	"strings"
	"testing"
)

// arrows tells which of the module's packages each may import, by prefix: the first line that fits a package holds.
// Tests may import more.
var arrows = []struct {
	pkg string
	may []string
}{
	{"harmonics/wave", nil},
	{"harmonics/site", []string{"harmonics/wave"}},
	{"harmonics/synth", []string{"harmonics/wave"}},
	{"harmonics/internal", nil},
	{"harmonics/limits", []string{"harmonics", "harmonics/site", "harmonics/wave"}},
	{"harmonics/plant", []string{"harmonics", "harmonics/site"}},
	{"harmonics/fitness", []string{"harmonics", "harmonics/limits", "harmonics/site", "harmonics/wave"}},
	{"harmonics", []string{"harmonics/wave", "harmonics/site", "harmonics/internal/*"}},
	{"loaders", []string{"harmonics/wave", "harmonics/site", "loaders/*"}},
	{"report/trend/stat", nil},
	{"report/trend/example", []string{"report", "report/trend", "harmonics", "harmonics/*"}},
	{"report/trend", []string{"report", "report/trend/stat", "harmonics", "harmonics/*"}},
	{"report/internal", []string{"report", "harmonics", "harmonics/*"}},
	{"report/chart", []string{"report", "harmonics", "harmonics/*"}},
	{"report/pdf", []string{"report", "report/chart", "report/trend", "harmonics", "harmonics/*"}},
	{"report/xlsx", []string{"report", "report/chart", "report/trend", "harmonics", "harmonics/*"}},
	{"report/terminal", []string{"report", "harmonics", "harmonics/*"}},
	{"report/logbook", []string{"report", "report/trend", "harmonics", "harmonics/*"}},
	{"report", []string{"harmonics", "harmonics/*"}},
	{"cmd", []string{"*"}},
}

func TestImportsGoOneWay(t *testing.T) {
	if testing.Short() {
		t.Skip("go list takes a second or two")
	}
	out, err := exec.Command("go", "list", "-f", `{{.ImportPath}} {{join .Imports " "}}`, "wavetally/...").CombinedOutput()
	if err != nil {
		t.Fatalf("go list: %v\n%s", err, out)
	}
	for line := range strings.Lines(string(out)) {
		fields := strings.Fields(line)
		pkg := strings.TrimPrefix(fields[0], "wavetally/")
		may, known := allowed(pkg)
		if !known {
			t.Errorf("package %s stands in no line of the arrows; decide what it may import", pkg)
		}
		for _, path := range fields[1:] {
			if imported, ours := strings.CutPrefix(path, "wavetally/"); ours && !fits(imported, may) {
				t.Errorf("%s imports %s, against the arrows", pkg, imported)
			}
		}
	}
}

func allowed(pkg string) (may []string, known bool) {
	for _, a := range arrows {
		if pkg == a.pkg || strings.HasPrefix(pkg, a.pkg+"/") {
			return append([]string{a.pkg + "/internal/*"}, a.may...), true
		}
	}
	return nil, false
}

func fits(pkg string, patterns []string) bool {
	for _, p := range patterns {
		prefix, open := strings.CutSuffix(p, "*")
		if pkg == p || open && strings.HasPrefix(pkg, prefix) {
			return true
		}
	}
	return false
}

func TestArrowsAreFollowed(t *testing.T) {
	for _, c := range []struct {
		pkg, imports string
		ok           bool
	}{
		{"harmonics", "harmonics/wave", true}, {"harmonics", "report", false}, {"harmonics", "harmonics/limits", false},
		{"loaders/csv", "harmonics/wave", true}, {"loaders/csv", "harmonics", false}, {"loaders", "loaders/csv", true},
		{"report/pdf", "report/xlsx", false}, {"report/pdf", "report/chart", true}, {"harmonics/wave", "harmonics/site", false},
		{"harmonics/limits", "report", false}, {"report", "report/pdf", false}, {"cmd/wavetally", "report/pdf", true},
	} {
		may, _ := allowed(c.pkg)
		if got := fits(c.imports, may); got != c.ok {
			t.Errorf("%s importing %s: allowed %t, want %t", c.pkg, c.imports, got, c.ok)
		}
	}
}
