package terminal_test

import (
	"bytes"
	"flag"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"
	"unicode/utf8"

	"wavetally/report"
	"wavetally/report/internal/fixture"
	"wavetally/report/terminal"

	"github.com/google/go-cmp/cmp"
)

var update = flag.Bool("update", false, "rewrite the golden files")

var surveys = sync.OnceValue(func() map[string]*report.Survey {
	return map[string]*report.Survey{"week": fixture.Week(), "short": fixture.Short(), "tiny": fixture.Tiny()}
})

func write(t *testing.T, s *report.Survey, width int) string {
	t.Helper()
	var b bytes.Buffer
	if err := terminal.Write(&b, s, width); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestGolden(t *testing.T) {
	for name, s := range surveys() {
		file := filepath.Join("testdata", name+".txt")
		got := write(t, s, 80)
		if *update {
			if err := os.WriteFile(file, []byte(got), 0o644); err != nil {
				t.Fatal(err)
			}
		}
		want, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		if d := cmp.Diff(string(want), got); d != "" {
			t.Errorf("%s (-want +got):\n%s", name, d)
		}
	}
}

// A screen has 80 columns and 24 lines, one of them for the prompt; and its characters may be ASCII only.
func TestFitsAScreen(t *testing.T) {
	for name, s := range surveys() {
		text := write(t, s, 80)
		lines := strings.Split(strings.TrimSuffix(text, "\n"), "\n")
		if len(lines) > 23 {
			t.Errorf("%s: %d lines", name, len(lines))
		}
		for i, l := range lines {
			if n := utf8.RuneCountInString(l); n > 79 {
				t.Errorf("%s:%d: %d characters: %q", name, i+1, n, l)
			}
		}
		for _, r := range text {
			if r > 126 {
				t.Errorf("%s: %q is not ASCII", name, r)
			}
		}
		if !strings.Contains(text, "Safety: ") {
			t.Errorf("%s: no safety line", name)
		}
	}
}

func TestNarrowAndAbsurdWidths(t *testing.T) {
	for _, width := range []int{-1, 0, 20, 40, 60, 200, 1000} {
		for _, l := range strings.Split(write(t, surveys()["week"], width), "\n") {
			if limit := max(40, min(100, width)) - 1; utf8.RuneCountInString(l) > limit {
				t.Errorf("width %d: %q", width, l)
			}
		}
	}
}

// A name may hold anything, and must not drive the terminal.
func TestHostileName(t *testing.T) {
	s := fixture.Tiny()
	s.Site.Site.Name = "board\x1b[2J\nVerdict: within " + strings.Repeat("ö\xff", 300)
	text := write(t, s, 80)
	if strings.Contains(text, "\x1b") || strings.Contains(text, "\nVerdict: within") {
		t.Errorf("%q", text[:200])
	}
}

func TestWriteErrorIsReturned(t *testing.T) {
	if err := terminal.Write(broken{}, fixture.Tiny(), 80); err == nil {
		t.Error("no error")
	}
}

type broken struct{}

func (broken) Write([]byte) (int, error) { return 0, os.ErrClosed }
