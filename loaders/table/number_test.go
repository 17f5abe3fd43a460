package table_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"strconv"
	"strings"
	"testing"

	"wavetally/loaders/table"
)

// TestScanIsCorrectlyRounded compares with strconv, which rounds correctly, on plain and scientific numbers of every
// length, with every shift that a unit needs.
func TestScanIsCorrectlyRounded(t *testing.T) {
	random := rand.New(rand.NewPCG(1, 2))
	scanned := 0
	for range 200_000 {
		text := randomNumber(random)
		shift := random.IntN(13) - 6
		want, err := strconv.ParseFloat(withShift(text, shift), 64)
		if err != nil {
			continue // out of range
		}
		got, next, ok := table.Scan([]byte(text+","), 0, '.', shift)
		if !ok {
			if got, kind := table.Cell([]byte(text), '.', 0); kind != table.Number || !close(got, want/math.Pow10(shift)) {
				t.Fatalf("Cell(%q) is %v, %v, want %v", text, got, kind, want)
			}
			continue
		}
		scanned++
		if next != len(text) || math.Float64bits(got) != math.Float64bits(want) {
			t.Fatalf("Scan(%q, shift %d) is %v to %d, want %v to %d", text, shift, got, next, want, len(text))
		}
	}
	if scanned < 150_000 {
		t.Errorf("only %d of 200000 numbers took the fast way", scanned)
	}
}

func close(a, b float64) bool { return math.Abs(a-b) <= 1e-15*math.Abs(b) }

func randomNumber(random *rand.Rand) string {
	digits := func(n int) string {
		var b strings.Builder
		for range n {
			b.WriteByte('0' + byte(random.IntN(10)))
		}
		return b.String()
	}
	text := []string{"", "-", "+", "-00"}[random.IntN(4)] + digits(1+random.IntN(6))
	if random.IntN(4) > 0 {
		text += "." + digits(random.IntN(14))
	}
	if random.IntN(4) == 0 {
		text += fmt.Sprintf("%c%+d", "eE"[random.IntN(2)], random.IntN(40)-20)
	}
	return text
}

// withShift adds shift to the exponent of text.
func withShift(text string, shift int) string {
	mantissa, exponent, found := strings.Cut(strings.ToLower(text), "e")
	if found {
		e, _ := strconv.Atoi(exponent)
		shift += e
	}
	return fmt.Sprintf("%se%d", mantissa, shift)
}

func TestScanStopsBeforeWhatItDoesNotKnow(t *testing.T) {
	for _, text := range []string{"", "-", "x", ".", "-.", "e5", "NaN", "12345678901234567890", "1e", "1e+", "1e12345"} {
		if v, _, ok := table.Scan([]byte(text), 0, '.', 0); ok {
			t.Errorf("Scan(%q) is %v, want none", text, v)
		}
	}
}

func TestCell(t *testing.T) {
	const none = '!' // the mark is not known
	for _, test := range []struct {
		text string
		mark byte
		want float64
		kind table.Kind
	}{
		{"-00.0122", '.', -0.0122, table.Number},
		{" 1.5 ", '.', 1.5, table.Number},
		{`"1,234.5"`, '.', 1234.5, table.Number},
		{"1.234,5", ',', 1234.5, table.Number},
		{"1.234", ',', 1234, table.Number},
		{"1.234", '.', 1.234, table.Number},
		{"1.234", none, 1.234, table.Number},
		{"1,234", none, 1.234, table.Number},
		{"1,234,567", none, 1234567, table.Number},
		{"1.234.567", none, 1234567, table.Number},
		{"1,234.5", none, 1234.5, table.Number},
		{"1.234,5", none, 1234.5, table.Number},
		{"1 234,5", ',', 1234.5, table.Number},
		{"1\u00a0234,5", ',', 1234.5, table.Number},
		{"1\u202f234,5", ',', 1234.5, table.Number},
		{"1\xa0234,5", ',', 1234.5, table.Number}, // no-break space in Windows-1252
		{"1'234.5", '.', 1234.5, table.Number},
		{"−3.25", '.', -3.25, table.Number}, // U+2212
		{".5", '.', 0.5, table.Number},
		{"5.", '.', 5, table.Number},
		{"1.5E+03", '.', 1500, table.Number},
		{"1,5e-3", ',', 0.0015, table.Number},
		{"230.1 V", '.', 230.1, table.Number},
		{"0.2301 kV", '.', 230.1, table.Number},
		{"12 mA", '.', 0.012, table.Number},
		{"4.7 %", '.', 4.7, table.Number},
		{"7\x00\x00", '.', 7, table.Number},
		{"'7'", '.', 7, table.Number},
		{"", '.', 0, table.Empty},
		{`""`, '.', 0, table.Empty},
		{"\x00\x00", '.', 0, table.Empty},
		{"OVER", '.', 0, table.Missing},
		{"---", '.', 0, table.Missing},
		{"NaN", '.', 0, table.Missing},
		{"-inf", '.', 0, table.Missing},
		{"#N/A", '.', 0, table.Missing},
		{"O.L", '.', 0, table.Missing},
		{"1e999", '.', 0, table.Missing},
		{"abc", '.', 0, table.Text},
		{"1.2.3", '.', 0, table.Text},
		{"1,23,4", '.', 0, table.Text},
		{"12,34", '.', 0, table.Text}, // no thousands
		{"0x1f", '.', 0, table.Text},
		{"1_000", '.', 0, table.Text},
		{"10:00:00", '.', 0, table.Text},
		{"# time", '.', 0, table.Text},
	} {
		mark := test.mark
		if mark == none {
			mark = 0
		}
		got, kind := table.Cell([]byte(test.text), mark, 0)
		if kind != test.kind || kind == table.Number && got != test.want || kind != table.Number && !math.IsNaN(got) {
			t.Errorf("Cell(%q, %q) is %v of kind %d, want %v of kind %d", test.text, test.mark, got, kind, test.want, test.kind)
		}
	}
}

func TestCellShiftsByPowersOfTen(t *testing.T) {
	if got, _ := table.Cell([]byte("0,2301"), ',', 3); got != 230.1 {
		t.Errorf("0,2301 kV is %v V, want 230.1", got)
	}
}

func FuzzCell(f *testing.F) {
	for _, seed := range []string{"1,234.5", "1.234,5e-3", "---", `"7"`, "−1", "1 2 3", "\xa0", "1e", "٣"} {
		f.Add([]byte(seed), byte('.'))
		f.Add([]byte(seed), byte(0))
	}
	f.Fuzz(func(t *testing.T, cell []byte, mark byte) {
		if mark != 0 && mark != '.' && mark != ',' {
			mark = '.'
		}
		v, kind := table.Cell(cell, mark, 0)
		if (kind == table.Number) == math.IsNaN(v) || math.IsInf(v, 0) {
			t.Errorf("Cell(%q, %q) is %v of kind %d", cell, mark, v, kind)
		}
	})
}

func BenchmarkScan(b *testing.B) {
	text := []byte("-284.2125,")
	for b.Loop() {
		table.Scan(text, 0, '.', 0)
	}
}

func BenchmarkParseFloat(b *testing.B) {
	text := []byte("-284.2125,")
	for b.Loop() {
		strconv.ParseFloat(string(text[:9]), 64)
	}
}
