package comtrade_test

import (
	"encoding/hex"
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"
	"github.com/rogpeppe/go-internal/txtar"

	"wavetally/harmonics/wave"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/input"
)

var update = flag.Bool("update", false, "write what is said into testdata")

// Each case of testdata/odd.txtar is opened and read, and what is said about it must be what stands there.
func TestOddRecordings(t *testing.T) {
	path := filepath.Join("testdata", "odd.txtar")
	archive, err := txtar.ParseFile(path)
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	recording := map[string]string{}
	for _, f := range archive.Files {
		name, base := filepath.Split(filepath.FromSlash(f.Name))
		if base == "want" {
			continue
		}
		data := f.Data
		if bare, isHex := strings.CutSuffix(base, ".hex"); isHex {
			base = bare
			if data, err = hex.DecodeString(strings.Join(strings.Fields(string(f.Data)), "")); err != nil {
				t.Fatalf("%s: %v", f.Name, err)
			}
		}
		if err := os.MkdirAll(filepath.Join(dir, name), 0o777); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(filepath.Join(dir, name, base), data, 0o666); err != nil {
			t.Fatal(err)
		}
		if base != "rec.dat" {
			recording[filepath.Clean(name)] = filepath.Join(dir, name, base)
		}
	}
	for i, f := range archive.Files {
		name, ok := strings.CutSuffix(f.Name, "/want")
		if !ok {
			continue
		}
		got := account(recording[filepath.FromSlash(name)])
		if *update {
			archive.Files[i].Data = []byte(got)
		} else if diff := cmp.Diff(string(f.Data), got); diff != "" {
			t.Errorf("%s: what is said changed (-want +got):\n%s", name, diff)
		}
	}
	if *update {
		if err := os.WriteFile(path, txtar.Format(archive), 0o666); err != nil {
			t.Fatal(err)
		}
	}
}

// account says what a recording holds: its header, segments, samples and notes, or the error.
func account(path string) string {
	src, err := comtrade.Open(path, input.Options{})
	if err != nil {
		return fmt.Sprintf("%s: %v\n", kind(err), err)
	}
	var out strings.Builder
	h := src.Header()
	start := "no start"
	if !h.Start.IsZero() {
		start = h.Start.Format("2006-01-02 15:04:05.999999999 -07:00")
	}
	fmt.Fprintf(&out, "%s, %d samples, %g Hz; start %s, zone known: %t\n", h.Files[0].Format, h.Samples, h.Nominal, start, h.HasZone)
	for _, ch := range h.Channels {
		fmt.Fprintf(&out, "channel %q [%s] of phase %q: step %.6g, %.6g to %.6g, skew %g s\n", ch.Name, ch.Unit, ch.Phase, ch.Step, ch.Low, ch.High, ch.Skew)
	}
	for b, err := range src.Blocks() {
		if err != nil {
			fmt.Fprintf(&out, "%s: %v\n", kind(err), err)
			break
		}
		fmt.Fprintf(&out, "segment %d at %.9g s, %.9g Hz:", b.Segment, b.At, b.Rate)
		for _, row := range b.Data {
			fmt.Fprintf(&out, " %.6g", row)
		}
		fmt.Fprintln(&out)
	}
	for _, n := range append(h.Notes, src.Notes()...) {
		fmt.Fprintf(&out, "note %s %s: %s\n", n.Code, n.Channel, n.Text)
	}
	return out.String()
}

func kind(err error) string {
	switch err.(type) {
	case *wave.NotThisFormatError:
		return "not this format"
	case *wave.ParseError:
		return "malformed"
	case *wave.UnsupportedError:
		return "unsupported"
	}
	return "other"
}
