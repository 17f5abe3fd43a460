package trend

import (
	"bytes"
	"encoding/json"
	"flag"
	"os"
	"testing"
)

var update = flag.Bool("update", false, "rewrite the golden files")

// The form of trend.json, held by a golden file. After a change that is meant: go test ./report/trend -update
func TestGoldenJSON(t *testing.T) {
	r := build(t, siteFacts(14, 0.1, 8, map[int]course{5: func(i int) float64 { return 4 + 0.3*float64(i) }, 7: flat(2)}), Event{Date: "2024-06-01", Text: "drive added"})
	var b bytes.Buffer
	if err := WriteJSON(&b, r); err != nil {
		t.Fatal(err)
	}
	const path = "testdata/trend.json"
	if *update {
		if err := os.WriteFile(path, b.Bytes(), 0o666); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(b.Bytes(), want) {
		t.Errorf("trend.json has changed; look at it, and run with -update if it is meant")
	}
	// The keys that the contract names are there.
	var doc struct {
		Schema, Site string
		Series       []map[string]any
	}
	if err := json.Unmarshal(b.Bytes(), &doc); err != nil || doc.Schema != Schema || len(doc.Series) == 0 {
		t.Fatalf("%v, schema %q, %d series", err, doc.Schema, len(doc.Series))
	}
	for _, key := range []string{"channel", "quantity", "order", "unit", "months", "mann_kendall", "theil_sen", "answer", "step", "reaches_limit"} {
		if _, ok := doc.Series[0][key]; !ok {
			t.Errorf("a series has no %q", key)
		}
	}
}

func BenchmarkTenYearsOfASite(b *testing.B) {
	orders := map[int]course{3: flat(2), 5: flat(5), 7: flat(3), 11: flat(1)}
	facts := siteFacts(120, 0.2, 1, orders)
	for b.Loop() {
		build(b, facts)
	}
}
