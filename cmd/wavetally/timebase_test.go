package main

import (
	"bytes"
	"context"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// A time column in milliseconds under the heading of seconds is the commonest wrong time base: peek says so, survey
// refuses with the remedy, and the remedy works.
func TestMillisecondsTakenForSeconds(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "scope.csv")
	var b strings.Builder
	b.WriteString("time (s),V1 (V)\n")
	for i := range 12800 {
		at := float64(i) / 6400
		fmt.Fprintf(&b, "%.5f,%.3f\n", at*1000, 325*math.Sin(2*math.Pi*50.02*at)+9*math.Sin(2*math.Pi*250.1*at))
	}
	if err := os.WriteFile(path, []byte(b.String()), 0o666); err != nil {
		t.Fatal(err)
	}
	call := func(args ...string) (int, string, string) {
		var out, errs bytes.Buffer
		code := run(context.Background(), args, strings.NewReader(""), &out, &errs)
		return code, out.String(), errs.String()
	}
	if code, out, _ := call("peek", path); code != 0 || !strings.Contains(out, "time-column-wrong") || !strings.Contains(out, "sampling_rate = 6400") {
		t.Errorf("peek ends with %d:\n%s", code, out)
	}
	code, _, errs := call("survey", "--into", dir, path)
	if code != 1 || !strings.HasPrefix(errs, "wavetally: scope.csv: ") || strings.Count(errs, "\n") != 1 || !strings.Contains(errs, "milliseconds") {
		t.Errorf("survey ends with %d and says %q", code, errs)
	}
	if code, out, errs := call("survey", "--sampling-rate", "6400", "--formats", "json", "--into", dir, path); code != 0 || !strings.Contains(out, "50.02") {
		t.Errorf("with the rate declared, survey ends with %d: %s%s", code, out, errs)
	}
}
