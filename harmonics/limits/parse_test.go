package limits

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"wavetally/harmonics/wave"
)

// example is the rule file of the package comment.
func example(t testing.TB) string {
	t.Helper()
	text, err := os.ReadFile("doc.go")
	if err != nil {
		t.Fatal(err)
	}
	var lines []string
	for _, line := range strings.Split(string(text), "\n") {
		if code, ok := strings.CutPrefix(line, "//\t"); ok {
			lines = append(lines, code)
		} else if line == "//" && len(lines) > 0 {
			lines = append(lines, "")
		}
	}
	return strings.TrimSpace(strings.Join(lines, "\n"))
}

func TestPackageCommentsRuleFile(t *testing.T) {
	r, err := parse(example(t), "example.toml")
	if err != nil {
		t.Fatal(err)
	}
	if r.Name != "kestrel-grid-2026" || len(r.tables) != 2 || len(r.Statistics) != 2 {
		t.Errorf("read %+v", r)
	}
	if got := limitOf(r, current, 11e3, 50, 8); got != 8*0.25 {
		t.Errorf("order 8 at Isc/IL 50: %v %%, want 2 %%", got)
	}
	if got := limitOf(r, voltage, 11e3, 0, 19); math.Abs(got-(1.9*17/19-0.2)) > 1e-12 {
		t.Errorf("order 19: %v %%", got)
	}
	if got := r.Tables()[0].Rows[0].Status; got != fromMemory {
		t.Errorf("order 2 has status %q, want its own", got)
	}
}

const small = `name = "x-1"
title = "X"
document = "X"
edition = "1"
[[table]]
id = "a"
title = "A"
clause = "1"
quantity = "voltage"
basis = "fundamental"
rows_by = "order"
limits = [
  { orders = "5", limit = 6.0 },
  { orders = "7", limit = 5.0 },
]
status = "read from the document"
source = "here"
[[statistic]]
quantity = "voltage"
interval = "10 min"
percentile = 95
period = "week"
clause = "2"
status = "read from the document"
source = "here"
`

// grid is small with a table of rows in the place of its table by order.
var grid = func() string {
	head, rest, _ := strings.Cut(small, "rows_by = \"order\"\nlimits = [\n")
	_, tail, _ := strings.Cut(rest, "]\n")
	s := head + "rows_by = \"isc_il\"\ncolumns = [\"2-10\", \"tdd 2-50\"]\nrows = [\n  { isc_il = \"<20\", limits = [4.0, 5.0] },\n  { isc_il = \">=20\", limits = [7.0, 8.0] },\n]\n" + tail
	s = strings.Replace(s, `"fundamental"`, `"demand current"`, 1)
	return strings.ReplaceAll(s, `quantity = "voltage"`, `quantity = "current"`)
}()

func TestRuleFileErrors(t *testing.T) {
	if _, err := parse(small, "r.toml"); err != nil {
		t.Fatal(err)
	}
	if _, err := parse(grid, "r.toml"); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		text, from, to string
		want           string
	}{
		{small, `title = "X"`, `titel = "X"`, `r.toml:2: unknown key "titel"; did you mean "title"?`},
		{small, `basis = "fundamental"`, `basis = "fundamentl"`, `r.toml:10: basis is "fundamentl"; did you mean "fundamental"?`},
		{small, `basis = "fundamental"`, `basis = "peak"`, `r.toml:10: basis is "peak"; it must be one of "fundamental", "nominal", "demand current"`},
		{small, `basis = "fundamental"`, `basis = "demand current"`, `r.toml:10: basis "demand current" does not go with quantity "voltage"`},
		{small, `rows_by = "order"`, ``, `r.toml:5: rows_by is missing from this [[table]]; write rows_by = "order"`},
		{small, `limit = 5.0`, `limits = 5.0`, `r.toml:14: unknown key "limits"; did you mean "limit"?`},
		{small, `limit = 5.0`, `limit = -5.0`, `r.toml:14: limit is -5; it must be above 0`},
		{small, `limit = 5.0`, `limit = nan`, `r.toml:14: limit is NaN; it must be above 0`},
		{small, `limit = 5.0`, `limit = inf`, `r.toml:14: limit is +Inf; it must be above 0`},
		{small, `limit = 5.0`, `limit = "5"`, `r.toml:14: limit must be a number, without quotes or unit`},
		{small, `limit = 5.0`, `formula = "5/h"`, `r.toml:14: formula "5/h" is no formula that is known here; ` + formulaHelp},
		{small, `limit = 5.0`, `formula = "1 (7/h) - 2"`, `r.toml:14: formula gives no limit above 0 for order 7`},
		{small, `limit = 5.0`, `limit = 5, formula = "1 (7/h)"`, `r.toml:14: formula stands beside limit; keep one of them`},
		{small, `, limit = 5.0`, ``, `r.toml:14: limit is missing from this entry of limits; write limit = 6.0`},
		{small, `orders = "7"`, `orders = "4-6"`, `r.toml:14: order 5 of "4-6" has a limit already, in "5"; an order has one limit`},
		{small, `orders = "7"`, `orders = "51"`, `r.toml:14: orders "51": orders go from 2 to 50; ` + ordersHelp},
		{small, `orders = "7"`, `orders = "7 odd even"`, `r.toml:14: orders "7 odd even": what does "even" mean; ` + ordersHelp},
		{small, `orders = "7"`, `orders = "7 even"`, `r.toml:14: orders "7 even": holds no order; ` + ordersHelp},
		{small, `orders = "7"`, `orders = "tdd 2-50"`, `r.toml:14: "tdd 2-50" does not go with basis "fundamental"; its total is "thd"`},
		{small, `percentile = 95`, `percentile = 950`, `r.toml:21: percentile is 950; it is in per cent, 100 for the maximum`},
		{small, `interval = "10 min"`, `interval = "3 s"`, `r.toml:20: interval "3 s" goes with percentile = 99 and period = "day" only: no other statistic of 3 s values is kept over a long recording`},
		{small, `status = "read from the document"`, `status = "sure"`, `r.toml:16: status is "sure"; it must be "from memory", "common practice", "read from the document" or "corroborated by 2" (public sources)`},
		{small, `source = "here"`, ``, `r.toml:5: source is missing from this [[table]]; write source = "where the numbers were read"`},
		{small, `[[statistic]]` + "\n" + `quantity = "voltage"`, `[[statistic]]` + "\n" + `quantity = "current"`, `r.toml:5: there is no [[statistic]] with quantity = "voltage", so this table is never used; add one`},
		{small, `name = "x-1"`, `name = "X 1"`, `r.toml:1: name is "X 1"; use small letters, digits, dots and hyphens`},
		{small, `name = "x-1"`, `name = 7`, `r.toml:1: name must be a text; put it in quotes`},
		{small, `edition = "1"`, `edition = "1`, `r.toml:4: edition: strings cannot contain newlines; each line is key = value, texts in quotes`},
		{small, `edition = "1"`, `title = "Y"`, `r.toml:4: title: is written twice; remove one of the lines`},
		{small, `edition = "1"`, "edition = \"1\"\napplies_at = [\"pcc\"]", `r.toml:5: applies_at is "pcc"; did you mean "PCC"?`},
		{small, `edition = "1"`, "edition = \"1\"\nnotes = [\n  \"a\",\n  7,\n]", `r.toml:7: notes must hold texts; put each in quotes`},
		{grid, `isc_il = ">=20"`, `isc_il = ">=19"`, `r.toml:15: row ">=19" holds what row "<20" holds too; keep the rows apart`},
		{grid, `isc_il = ">=20"`, `isc_il = "20 and up"`, `r.toml:15: isc_il "20 and up" is no range: has no end; ` + spanHelp},
		{grid, `isc_il = ">=20"`, `isc_il = "50 to 20"`, `r.toml:15: isc_il "50 to 20" is no range: ends before it begins; ` + spanHelp},
		{grid, `limits = [7.0, 8.0]`, `limits = [7.0]`, `r.toml:15: limits has 1 numbers for 2 columns; give one for each`},
		{grid, `limits = [7.0, 8.0]`, `limits = [7.0, 0]`, `r.toml:15: limits must hold numbers above 0, not 0`},
		{grid, `"tdd 2-50"`, `"thd 2-50"`, `r.toml:12: "thd 2-50" does not go with basis "demand current"; its total is "tdd"`},
		{grid, `"tdd 2-50"`, `"9-50"`, `r.toml:12: order 9 of "9-50" has a limit already, in "2-10"; an order has one limit`},
		{grid, "columns = [\"2-10\", \"tdd 2-50\"]\n", "", `r.toml:5: columns is missing from this [[table]]; write columns = ["2-10", "11-16", "tdd 2-50"]`},
	} {
		text := strings.Replace(c.text, c.from, c.to, 1)
		if text == c.text {
			t.Fatalf("%q is not in the text", c.from)
		}
		_, err := parse(text, "r.toml")
		var at *wave.ParseError
		if err == nil || err.Error() != c.want || !errors.As(err, &at) {
			t.Errorf("%q for %q:\n got %v\nwant %s", c.to, c.from, err, c.want)
		}
	}
}

// A rule file made to be slow or large is refused in time, with one message.
func TestHostileRuleFiles(t *testing.T) {
	head, tail, _ := strings.Cut(grid, "rows = [\n")
	for name, text := range map[string]string{
		"rows":    head + "rows = [\n" + strings.Repeat("{ isc_il = \"<9\", limits = [1, 1] },\n", 6000) + tail,
		"columns": strings.Replace(grid, `"2-10"`, strings.Repeat("\"5\",\n", 40000)+`"2-10"`, 1),
		"depth":   "a = " + strings.Repeat("[\n", 100000),
		"tables":  small + strings.Repeat("[[table]]\n", 20000),
		"keys":    strings.Repeat(strings.Repeat("a.", 1990)+"b = 1\n", 60),
	} {
		start := time.Now()
		if _, err := parse(text, name); err == nil || strings.Contains(err.Error(), "\n") || len(err.Error()) > 500 {
			t.Errorf("%s: %.200v", name, err)
		}
		if took := time.Since(start); took > 20*time.Second {
			t.Errorf("%s took %v", name, took)
		} else {
			t.Logf("%s: %v", name, took)
		}
	}
}

func TestLoadErrors(t *testing.T) {
	dir := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(dir, name)
		if err := os.WriteFile(path, []byte(text), 0o666); err != nil {
			t.Fatal(err)
		}
		return path
	}
	for _, c := range []struct{ name, want string }{
		{"ieee-519-2020", `there is no rule set "ieee-519-2020"; did you mean "ieee-519-2022"?`},
		{"qq", `there is no rule set "qq"; there are en-50160,`},
		{filepath.Join(dir, "none.toml"), "none.toml: no such file"},
		{dir, "is a directory; name the rule file in it"},
		{write("same.toml", strings.Replace(small, "x-1", "en-50160", 1)), `same.toml: name "en-50160" is that of a built-in rule set; choose another`},
		{write("latin.toml", "name = \"x\"\ntitle = \"\xe9\"\n"), "latin.toml:2: is not UTF-8 text; save the rule file as UTF-8"},
		{write("large.toml", strings.Repeat("# recording\n", 1<<17)), "large.toml: is larger than 256 kB; this is no rule file"},
		{write("empty.toml", ""), "empty.toml: name is missing from the top of the file"},
	} {
		_, err := Load(c.name)
		if err == nil || !strings.Contains(err.Error(), c.want) {
			t.Errorf("Load(%q): %v, want %q", c.name, err, c.want)
		}
	}
	r, err := Load(write("mine.toml", "\ufeff"+small))
	if err != nil || r.File == "" {
		t.Errorf("a good file of one's own: %v", err)
	}
}

func TestSpans(t *testing.T) {
	for _, c := range []struct {
		text    string
		in, out []float64
	}{
		{"<20", []float64{0, math.Nextafter(20, 0)}, []float64{20}},
		{"20 to <50", []float64{20, math.Nextafter(50, 0)}, []float64{math.Nextafter(20, 0), 50}},
		{"100 to 1000", []float64{100, 1000}, []float64{math.Nextafter(1000, 2000)}},
		{">1000", []float64{math.Nextafter(1000, 2000), 1e9}, []float64{1000}},
		{">=50", []float64{50}, []float64{math.Nextafter(50, 0)}},
		{"up to 1 kV", []float64{230, 1000}, []float64{1000.001}},
		{">1 kV to 69 kV", []float64{1000.001, 69e3}, []float64{1000, 69001}},
		{"120 V to 69kV", []float64{120}, []float64{119, math.NaN()}},
	} {
		s, err := parseSpan(c.text)
		if err != nil {
			t.Errorf("%q: %v", c.text, err)
		}
		for _, x := range c.in {
			if !s.Contains(x) {
				t.Errorf("%q does not hold %v", c.text, x)
			}
		}
		for _, x := range c.out {
			if s.Contains(x) {
				t.Errorf("%q holds %v", c.text, x)
			}
		}
	}
	for _, text := range []string{"", "20", "to", " to ", "<", ">x", "5 to 5", "up to ", "-5 to 5", "<nan", ">inf"} {
		if s, err := parseSpan(text); err == nil {
			t.Errorf("%q is read as %+v", text, s)
		}
	}
	if !(Span{}).Contains(7) || !(Span{}).Contains(math.NaN()) {
		t.Error("the zero Span must hold everything")
	}
}

func TestPercentileNames(t *testing.T) {
	for p, want := range map[float64]string{95: "95th percentile", 99: "99th percentile", 100: "maximum", 50: "50th percentile", 91: "91st percentile",
		92: "92nd percentile", 93: "93rd percentile", 11: "11th percentile", 99.5: "99.5th percentile"} {
		if got := percentileName(p); got != want {
			t.Errorf("%v: %q, want %q", p, got, want)
		}
	}
}

// FuzzParse: no rule file makes the parser panic or hang, and one that it accepts can be shown and looked up.
func FuzzParse(f *testing.F) {
	f.Add(small)
	f.Add(grid)
	f.Add(example(f))
	for _, name := range Names() {
		text, err := data.ReadFile("data/" + name + ".toml")
		if err != nil {
			f.Fatal(err)
		}
		f.Add(string(text))
	}
	f.Add("a = '''\n[[b]]\n'''\n[[table]]\nrows = [{ x = [1, [2, {y = 3}]] }]\n")
	f.Fuzz(func(t *testing.T, text string) {
		r, err := parse(text, "fuzz.toml")
		if err != nil {
			if strings.Contains(err.Error(), "\n") {
				t.Errorf("the message has several lines: %q", err)
			}
			return
		}
		for _, tab := range r.Tables() {
			for _, row := range tab.Rows {
				for _, c := range row.Cells {
					if !(c.Pct > 0) {
						t.Errorf("%s is %v", c.Key, c.Pct)
					}
				}
			}
		}
	})
}
