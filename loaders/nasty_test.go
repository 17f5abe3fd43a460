package loaders_test

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"wavetally/harmonics/wave"
	"wavetally/loaders"
)

var update = flag.Bool("update", false, "rewrite golden files")

// TestNastyFiles reads each small, broken or misleading file in testdata/nasty and holds what is said about it, to the
// letter, against the golden file beside.
func TestNastyFiles(t *testing.T) {
	files, err := filepath.Glob("testdata/nasty/*")
	if err != nil || len(files) < 30 {
		t.Fatalf("found %d files, %v", len(files), err)
	}
	var b strings.Builder
	for _, path := range files {
		fmt.Fprintf(&b, "== %s\n", filepath.Base(path))
		tell(&b, path)
	}
	const golden = "testdata/nasty.golden"
	if *update {
		if err := os.WriteFile(golden, []byte(b.String()), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(golden)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(strings.Split(strings.ReplaceAll(string(want), "\r\n", "\n"), "\n"), strings.Split(b.String(), "\n")); diff != "" {
		t.Errorf("what is said differs from %s (-want +got); run with -update if it is meant to:\n%s", golden, diff)
	}
}

// tell writes how a file was understood, what was odd, and the error.
func tell(b *strings.Builder, path string) {
	src, err := loaders.Open([]string{path}, loaders.Options{})
	if err != nil {
		fmt.Fprintf(b, "error: %v\n", err)
		return
	}
	h := src.Header()
	samples, segments := 0, 0
	for block, err := range src.Blocks() {
		if err != nil {
			fmt.Fprintf(b, "error: %v\n", err)
		}
		samples += block.Len()
		segments = max(segments, block.Segment+1)
	}
	fmt.Fprintf(b, "%s, %.9g Hz, %d samples in %d segments: %s\n", channels(h), h.Rate, samples, segments, h.Files[0].Reading)
	for _, n := range append(h.Notes, src.Notes()...) {
		fmt.Fprintf(b, "%s %s: %s\n", n.Code, n.Channel, n.Text)
	}
}

func channels(h wave.Header) string {
	var all []string
	for _, c := range h.Channels {
		all = append(all, fmt.Sprintf("%s [%s]", c.Name, c.Unit))
	}
	return strings.Join(all, ", ")
}
