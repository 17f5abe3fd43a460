package report_test

import (
	"bytes"
	"encoding/json"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"wavetally/report"
	"wavetally/report/internal/fixture"

	"github.com/google/go-cmp/cmp"
)

var update = flag.Bool("update", false, "rewrite the golden files")

func golden(t *testing.T, name, got string) {
	t.Helper()
	file := filepath.Join("testdata", name)
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

func writeJSON(t *testing.T, s *report.Survey) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := report.WriteJSON(&b, s); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func TestJSONGolden(t *testing.T) { golden(t, "tiny.json", string(writeJSON(t, fixture.Tiny()))) }

// What is read back is written again byte by byte.
func TestJSONRoundTrip(t *testing.T) {
	for name, s := range surveys() {
		first := writeJSON(t, s)
		back, err := report.ReadJSON(bytes.NewReader(first))
		if err != nil {
			t.Fatal(err)
		}
		if again := writeJSON(t, back); !bytes.Equal(first, again) {
			t.Errorf("%s: %d bytes became %d", name, len(first), len(again))
		}
	}
}

// A survey read back from JSON lacks the series: whatever needs them is left out, and nothing fails.
func TestReadBackStillMakesDocuments(t *testing.T) {
	for name, s := range surveys() {
		back, err := report.ReadJSON(bytes.NewReader(writeJSON(t, s)))
		if err != nil {
			t.Fatal(err)
		}
		if n := len(report.Charts(back)); n == 0 {
			t.Errorf("%s: no chart at all", name)
		}
		if n := len(report.Tables(back)) + len(report.FullTables(back)); n < 10 {
			t.Errorf("%s: %d tables", name, n)
		}
	}
}

// The contract of survey.json: these keys, and null for what was not measured.
func TestJSONContract(t *testing.T) {
	var m map[string]any
	if err := json.Unmarshal(writeJSON(t, fixture.Tiny()), &m); err != nil {
		t.Fatal(err)
	}
	for _, key := range []string{"schema", "program", "made_at", "site", "recording", "channels", "power", "unbalance", "neutral", "findings", "doubts"} {
		if _, ok := m[key]; !ok {
			t.Errorf("no %q", key)
		}
	}
	if m["schema"] != "wavetally.survey/1" {
		t.Errorf("schema %v", m["schema"])
	}
	if v := m["recording"].(map[string]any)["start"]; v != nil {
		t.Errorf("start %v of a recording without one", v)
	}
	channel := m["channels"].([]any)[0].(map[string]any)
	inter := channel["interharmonics"].([]any)
	if len(inter) != 51 || inter[7].(map[string]any)["rms"] != nil {
		t.Errorf("%d interharmonics, the 7th %v; want 51, and null where not measured", len(inter), inter[7])
	}
	if channel["tdd_pct"] != nil || channel["thd_pct"].(map[string]any)["10min"] != nil {
		t.Error("statistics that there cannot be are not null")
	}
	if got := len(channel["harmonics"].([]any)); got != 50 {
		t.Errorf("%d harmonics", got)
	}
}

func TestNumberJSON(t *testing.T) {
	for _, c := range []struct {
		in   float64
		want string
	}{
		{0, "0"}, {math.Copysign(0, -1), "0"}, {math.NaN(), "null"}, {math.Inf(1), "null"}, {math.Inf(-1), "null"},
		{230.9401076758503, "230.94011"}, {-1.5, "-1.5"}, {1e-6, "0.000001"}, {math.Nextafter(1e-6, 0), "0.000001"}, {9.9e-7, "9.9e-07"},
		{999999999999999, "1e+15"}, {123456789, "123456790"}, {1e15, "1e+15"},
	} {
		got, err := json.Marshal(report.Number(c.in))
		if err != nil || string(got) != c.want {
			t.Errorf("%g is %s, %v; want %s", c.in, got, err, c.want)
		}
		var back report.Number
		if err := json.Unmarshal(got, &back); err != nil {
			t.Fatal(err)
		}
		if c.want == "null" && back.Known() {
			t.Errorf("null read as %g", float64(back))
		}
	}
}

func TestReadJSONRefuses(t *testing.T) {
	for in, want := range map[string]string{
		"":                                  "not a survey",
		"[1,2]":                             "not a survey",
		`{"schema":"other/1"}`:              `its schema is "other/1"`,
		`{"schema":"wavetally.survey/1"} x`: "after the survey",
		`{"schema":"wavetally.survey/1","channels":[{"rms":"x"}]}`: "not a survey",
	} {
		if _, err := report.ReadJSON(strings.NewReader(in)); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%q: %v", in, err)
		}
	}
}

func TestWriteJSONReturnsTheWritersError(t *testing.T) {
	if err := report.WriteJSON(full{}, fixture.Tiny()); !errors.Is(err, os.ErrClosed) {
		t.Error(err)
	}
}

type full struct{}

func (full) Write([]byte) (int, error) { return 0, os.ErrClosed }
