package xlsx

import (
	"math"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/limits"
)

// Dates as the documentation of a spreadsheet program's DATE function gives them: DATE(2008,1,1) is 39448; and the day
// from which Unix time counts, 25569 (common practice).
func TestSerial(t *testing.T) {
	for _, c := range []struct {
		when string
		want float64
	}{{"2008-01-01T00:00:00Z", 39448}, {"1970-01-01T00:00:00Z", 25569}, {"2008-01-01T18:00:00+06:00", 39448.5}, {"2026-03-02T04:00:00Z", 46083.1666666667}} {
		when, err := time.Parse(time.RFC3339, c.when)
		if err != nil {
			t.Fatal(err)
		}
		if got := serial(when); math.Abs(got-c.want) > 1e-9 {
			t.Errorf("%s is %v, want %v", c.when, got, c.want)
		}
	}
}

// A number is shown with three or four significant digits, by every program's rules for formats.
func TestFormats(t *testing.T) {
	f := excelize.NewFile()
	defer func() { _ = f.Close() }()
	for _, c := range []struct {
		v      float64
		format string
		want   string
	}{
		{0.0123456, formatFor(0.0123456), "0.01235"}, {1.23456, formatFor(1.23456), "1.235"}, {99.94, formatFor(99.94), "99.94"}, {12345.678, formatFor(12345.678), "12346"},
		{0, formatFor(0), "0"}, {-138.94, formatFor(-138.94), "-138.9"}, {1e-9, formatFor(1e-9), "1.00E-09"},
		{231.4, decimalsOf("231"), "231"}, {0.031, decimalsOf("0.031"), "0.031"}, {4.5, decimalsOf("<4.5 kA"), "4.5"},
	} {
		id, err := f.NewStyle(&excelize.Style{CustomNumFmt: &c.format})
		if err != nil {
			t.Fatal(err)
		}
		if err := f.SetCellValue("Sheet1", "A1", c.v); err != nil {
			t.Fatal(err)
		}
		if err := f.SetCellStyle("Sheet1", "A1", "A1", id); err != nil {
			t.Fatal(err)
		}
		if got, err := f.GetCellValue("Sheet1", "A1"); err != nil || got != c.want {
			t.Errorf("%g as %s is %q, want %q (%v)", c.v, c.format, got, c.want, err)
		}
	}
}

func TestFold(t *testing.T) {
	for _, c := range []struct {
		words string
		width int
		want  string
	}{{"a bb ccc", 4, "a bb|ccc"}, {"a bb ccc", 8, "a bb ccc"}, {"", 5, ""}, {"toolongword x", 4, "toolongword|x"}, {"one\ntwo", 20, "one|two"}, {"  spaced   out ", 20, "spaced out"}} {
		if got := strings.Join(fold(c.words, c.width), "|"); got != c.want {
			t.Errorf("fold(%q, %d) = %q, want %q", c.words, c.width, got, c.want)
		}
	}
}

func TestCut(t *testing.T) {
	for _, c := range []struct {
		s    string
		n    int
		want string
	}{{"abc", 3, "abc"}, {"abcd", 3, "ab…"}, {"\U0001F600\U0001F600", 4, "\U0001F600\U0001F600"}, {"\U0001F600\U0001F600", 3, "\U0001F600…"}, {"", 3, ""}} {
		if got := cut(c.s, c.n); got != c.want || units(got) > c.n {
			t.Errorf("cut(%q, %d) = %q, want %q", c.s, c.n, got, c.want)
		}
	}
}

// Rounding keeps eight digits, and leaves alone what it cannot round exactly.
func TestRounded(t *testing.T) {
	for _, v := range []float64{231.23456789012, 0.000123456789012, 1, 0, -17.98765432109, 1e30, 3e-18, 99999999.6} {
		want, err := strconv.ParseFloat(strconv.FormatFloat(v, 'e', 7, 64), 64)
		if err != nil {
			t.Fatal(err)
		}
		if got := rounded(v); got != want && got != v {
			t.Errorf("rounded(%v) = %v, want %v", v, got, want)
		}
	}
	if got := rounded(231.23456789012); got != 231.23457 {
		t.Errorf("rounded to %v", got)
	}
}

// The rule of the verdict, case by case, in Go and as a formula; the edges are those of limits.Judge, which the recalculation test compares all
// findings with.
func TestDecide(t *testing.T) {
	nan := math.NaN()
	f := excelize.NewFile()
	defer func() { _ = f.Close() }()
	for _, c := range []struct {
		name, stop, allows            string
		value, low, high, limit, loud float64
		want                          string
	}{
		{"below", "", allowsAny, 4, 3.9, 4.1, 5, 0.1, limits.Within},
		{"its upper bound at the limit", "", allowsAny, 4.9, 4.8, 5, 5, 0.1, limits.Within},
		{"its upper bound just above", "", allowsAny, 4.9, 4.8, math.Nextafter(5, 6), 5, 0.1, limits.Undecided},
		{"its lower bound at the limit", "", allowsAny, 5.1, 5, 5.2, 5, 0.1, limits.Undecided},
		{"its lower bound just above", "", allowsAny, 5.1, math.Nextafter(5, 6), 5.2, 5, 0.1, limits.Exceeds},
		{"noise at half the limit", "", allowsAny, 4, 3.9, 4.1, 5, 2.5, limits.Within},
		{"noise above half the limit", "", allowsAny, 4, 3.9, 4.1, 5, 2.6, limits.Undecided},
		{"above whatever the noise", "", allowsAny, 9, 8.9, 9.1, 5, 2.6, limits.Exceeds},
		{"noise unknown", "", allowsAny, 4, 3.9, 4.1, 5, nan, limits.Within},
		{"record too short", "", allowsOpen, 9, 8.9, 9.1, 5, 0.1, limits.Undecided},
		{"a total that lacks orders, below", "", allowsExceeds, 4, 3.9, 4.1, 5, 0.1, limits.Undecided},
		{"a total that lacks orders, above", "", allowsExceeds, 9, 8.9, 9.1, 5, 0.1, limits.Exceeds},
		{"a doubt", "", allowsNothing, 4, 3.9, 4.1, 5, 0.1, limits.NotAssessed},
		{"an input missing", stopIsc, allowsAny, 4, 3.9, 4.1, 5, 0.1, limits.NotAssessed},
		{"no value", "", allowsAny, nan, nan, nan, 5, 0.1, limits.NotAssessed},
		{"no limit", "", allowsAny, 4, 3.9, 4.1, nan, 0.1, limits.NotAssessed},
	} {
		if got := decide(c.stop, c.allows, c.value, c.low, c.high, c.limit, c.loud); got != c.want {
			t.Errorf("%s: %s, want %s", c.name, got, c.want)
		}
		if strings.Contains(c.name, "just above") {
			c.low, c.high = c.low*(1+1e-9), c.high*(1+1e-9) // spreadsheets compare 15 digits
		}
		row := map[int]any{verdictStop: c.stop, verdictAllows: c.allows, verdictValue: c.value, verdictLow: c.low, verdictHigh: c.high, verdictLimit: c.limit, verdictNoisePct: c.loud}
		if got := computed(t, f, row); got != c.want {
			t.Errorf("%s: the formula says %s, want %s", c.name, got, c.want)
		}
	}
}

// computed is the result by formula, of a row with the given cells; NaN is an empty text, as formulas give.
func computed(t *testing.T, f *excelize.File, row map[int]any) string {
	t.Helper()
	for column, v := range row {
		if x, ok := v.(float64); ok && math.IsNaN(x) {
			v = ""
		}
		if err := f.SetCellValue("Sheet1", at(column, 1), v); err != nil {
			t.Fatal(err)
		}
	}
	if err := f.SetCellFormula("Sheet1", at(verdictResult, 1), resultFormula(func(c int) string { return at(c, 1) })); err != nil {
		t.Fatal(err)
	}
	got, err := f.CalcCellValue("Sheet1", at(verdictResult, 1))
	if err != nil {
		t.Fatal(err)
	}
	return got
}

// The library that writes the workbook can also compute it: a second opinion where LibreOffice is missing.
func TestFormulasByTheLibrary(t *testing.T) {
	f := opened(t, written(t, bare(weekSurvey())))
	for _, sheet := range []string{"Verdicts voltage", "Verdicts current"} {
		rows := grid(t, f, sheet)
		for r := 8; r < len(rows); r += 37 {
			for _, c := range []int{verdictValue, verdictLow, verdictHigh, verdictLimit, verdictShare, verdictResult, verdictRow} {
				got, err := f.CalcCellValue(sheet, at(c, r+1), excelize.Options{RawCellValue: true})
				if want := cellOf(rows, r, c-1); err != nil || !same(want, got) && !nearly(got, number64(want), 1e-9) {
					t.Errorf("%s!%s: %q, want %q (%v)", sheet, at(c, r+1), got, want, err)
				}
			}
		}
	}
}

func nearly(cell string, want, tolerance float64) bool {
	return math.Abs(number64(cell)-want) <= tolerance*math.Abs(want)
}

// The formula of a span agrees with limits.Span at, beside and far from each end.
func TestInside(t *testing.T) {
	f := excelize.NewFile()
	defer func() { _ = f.Close() }()
	for _, s := range []limits.Span{
		{}, {High: 20, HighOut: true, HasHigh: true}, {Low: 20, High: 50, HighOut: true, HasLow: true, HasHigh: true}, {Low: 100, High: 1000, HasLow: true, HasHigh: true},
		{Low: 1000, LowOut: true, HasLow: true}, {Low: 50, HasLow: true},
	} {
		for _, end := range []float64{20, 50, 100, 1000} {
			for _, x := range []float64{end, end * (1 - 1e-9), end * (1 + 1e-9), 0, 1e6} {
				for cell, v := range map[string]any{"A1": x, "B1": s.Low, "C1": s.High} {
					if err := f.SetCellValue("Sheet1", cell, v); err != nil {
						t.Fatal(err)
					}
				}
				if err := f.SetCellFormula("Sheet1", "D1", inside("A1", s, "B1", "C1")); err != nil {
					t.Fatal(err)
				}
				got, err := f.CalcCellValue("Sheet1", "D1")
				if want := pick(s.Contains(x), "1", "0"); err != nil || got != want {
					t.Errorf("%v in %+v: %s, want %s (%v)", x, s, got, want, err)
				}
			}
		}
	}
}
