package xlsx

import (
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// alwaysRecalculate is the setting of LibreOffice that makes it compute every formula on loading, whatever values the
// file holds (its help: "Recalculation on File Load, Excel 2007 and newer: Always recalculate").
const alwaysRecalculate = `<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>`

// recalculated are the workbooks as another spreadsheet program computes them, in one run of it.
func recalculated(t testing.TB, books map[string][]byte) map[string]*excelize.File {
	t.Helper()
	office, err := exec.LookPath("soffice")
	if err != nil {
		t.Skip("LibreOffice (soffice) is not installed, so no other program recalculates the workbook here; apt-get install libreoffice-calc")
	}
	dir := t.TempDir()
	profile, out := filepath.Join(dir, "profile"), filepath.Join(dir, "out")
	save(t, filepath.Join(profile, "user", "registrymodifications.xcu"), []byte(alwaysRecalculate))
	args := []string{"-env:UserInstallation=file://" + profile, "--headless", "--convert-to", "xlsx:Calc MS Excel 2007 XML", "--outdir", out}
	for name, b := range books {
		save(t, filepath.Join(dir, name+".xlsx"), b)
		args = append(args, filepath.Join(dir, name+".xlsx"))
	}
	run := exec.Command(office, args...)
	run.Env = append(os.Environ(), "HOME="+dir)
	if text, err := run.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, text)
	}
	got := map[string]*excelize.File{}
	for name := range books {
		b, err := os.ReadFile(filepath.Join(out, name+".xlsx"))
		if err != nil {
			t.Fatal(err)
		}
		got[name] = opened(t, b)
	}
	return got
}

func save(t testing.TB, path string, b []byte) {
	t.Helper()
	if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, b, 0o644); err != nil {
		t.Fatal(err)
	}
}

// lean drops the long series, which no formula of a verdict rests on, so that the other program has less to load.
func lean(s *report.Survey) *report.Survey {
	out, sum := *s, *s.Summary
	sum.Tens, sum.Threes, sum.Spectrogram = sum.Tens[:min(20, len(sum.Tens))], nil, nil
	out.Summary = &sum
	return &out
}

// bare keeps nothing but what verdicts need.
func bare(s *report.Survey) *report.Survey {
	out := lean(s)
	out.Channels = nil
	out.Summary.Tens, out.Summary.Capture, out.Summary.Power = nil, nil, nil
	return out
}

// A scenario is a change that a reviewer makes in the workbook, and what limits.Judge then says.
type scenario struct {
	name    string
	cells   map[string]any    // named cells, or "Sheet!A1"; nil empties one
	before  func(*site.Sheet) // what was declared when the survey was made
	sheet   func(*site.Sheet)
	measure func(*report.Inputs) // for uncertainties, which the summary holds
}

var scenarios = []scenario{
	{name: "a weaker network, so the first row, and coarser sensors on V2 and I2", cells: map[string]any{nameIsc: 6000.0, "V2": 9.0, "I2": 20.0},
		sheet: func(s *site.Sheet) { s.Supply.ShortCircuitCurrent = 6000 },
		measure: func(in *report.Inputs) {
			for i := range in.Summary.Channels {
				switch c := &in.Summary.Channels[i]; c.Role {
				case "V2":
					c.Uncertainty = 9
				case "I2":
					c.Uncertainty = 20
				}
			}
		}},
	{name: "a smaller demand, Isc/IL of exactly 1000, a lower nominal voltage", cells: map[string]any{nameIsc: 250000.0, nameIL: 250.0, nameNominal: 230.0},
		sheet: func(s *site.Sheet) {
			s.Supply.ShortCircuitCurrent, s.Supply.DemandCurrent, s.Supply.NominalVoltage = 250000, 250, 230
		}},
	{name: "no short-circuit current, so the strictest row, and 160 kV, so other tables and none of EN 50160", cells: map[string]any{nameIsc: nil, nameNominal: 160000.0},
		sheet: func(s *site.Sheet) { s.Supply.ShortCircuitCurrent, s.Supply.NominalVoltage = 0, 160000 }},
	{name: "currents that were not declared are entered", cells: map[string]any{nameIsc: 12500.0, nameIL: 410.0},
		before: func(s *site.Sheet) { s.Supply.ShortCircuitCurrent, s.Supply.DemandCurrent = 0, 0 }},
	{name: "an internal point", cells: map[string]any{namePoint: "internal"}, sheet: func(s *site.Sheet) { s.Supply.Point = "internal" }},
}

// TestRecalculation has LibreOffice compute the workbook: as written, every formula must give the value that the file
// holds; with an input changed, every verdict must become what limits.Judge gives for a site sheet with that change.
func TestRecalculation(t *testing.T) {
	if testing.Short() {
		t.Skip("LibreOffice takes some seconds")
	}
	sets := []string{"ieee-519-2022", "en-50160"}
	survey := weekSurvey()
	books := map[string][]byte{
		"week":  written(t, lean(survey)),
		"short": written(t, lean(judged(t, fixture.ShortInputs(), "ieee-519-2014", "iec-61000-2-4-class3"))),
		"tiny":  written(t, fixture.Tiny()),
	}
	base := written(t, bare(survey))
	surveys := map[string]*report.Survey{}
	for i, c := range scenarios {
		name, from := strconv.Itoa(i), base
		surveys[name] = survey
		if c.before != nil {
			in := fixture.WeekInputs()
			c.before(&in.Sheet)
			surveys[name] = judged(t, in, sets...)
			from = written(t, bare(surveys[name]))
		}
		books[name] = changed(t, from, c)
	}
	got := recalculated(t, books)
	for _, name := range []string{"week", "short", "tiny"} {
		n := formulasAgree(t, name, opened(t, books[name]), got[name])
		t.Logf("%s: %d formulas agree", name, n)
	}
	for i, c := range scenarios {
		t.Run(c.name, func(t *testing.T) {
			in := fixture.WeekInputs()
			if c.sheet != nil {
				c.sheet(&in.Sheet)
			}
			if c.measure != nil {
				c.measure(&in)
			}
			want := judged(t, in, sets...)
			moved := verdictsAgree(t, got[strconv.Itoa(i)], want, surveys[strconv.Itoa(i)])
			if moved == 0 {
				t.Error("no verdict moved, so the scenario shows nothing")
			}
			sheet, cell := place(t, opened(t, books[strconv.Itoa(i)]), "Results_changed")
			if told, err := got[strconv.Itoa(i)].GetCellValue(sheet, cell); err != nil || told != strconv.Itoa(moved) {
				t.Errorf("the summary tells that %s results changed, and %d did (%v)", told, moved, err)
			}
			t.Logf("%d of %d verdicts moved as limits.Judge has it", moved, len(survey.Judged))
		})
	}
}

// changed is the workbook with a scenario's cells.
func changed(t testing.TB, b []byte, c scenario) []byte {
	t.Helper()
	f := opened(t, b)
	for name, v := range c.cells {
		sheet, cell := place(t, f, name)
		if err := f.SetCellValue(sheet, cell, v); err != nil {
			t.Fatal(err)
		}
	}
	out, err := f.WriteToBuffer()
	if err != nil {
		t.Fatal(err)
	}
	return out.Bytes()
}

// place finds an input: by its name, or a channel's uncertainty by its role.
func place(t testing.TB, f *excelize.File, name string) (sheet, cell string) {
	t.Helper()
	for _, d := range f.GetDefinedName() {
		if d.Name == name {
			sheet, cell, _ = strings.Cut(strings.ReplaceAll(d.RefersTo, "$", ""), "!")
			return strings.Trim(sheet, "'"), cell
		}
	}
	for i, r := range grid(t, f, "Site") {
		if len(r) > 2 && r[0] == name && r[2] == "% of reading" {
			return "Site", at(2, i+1)
		}
	}
	t.Fatalf("no input %q", name)
	return "", ""
}

// verdictsAgree compares the recalculated verdict sheets with findings, and counts those that are not as before.
func verdictsAgree(t *testing.T, f *excelize.File, want, before *report.Survey) (moved int) {
	t.Helper()
	expect, old := map[string]limits.Finding{}, map[string]string{}
	for _, x := range want.Judged {
		expect[rowKey(x)] = x
	}
	for _, x := range before.Judged {
		old[rowKey(x)] = x.Result
	}
	bad := 0
	for _, sheet := range []string{"Verdicts voltage", "Verdicts current"} {
		for i, r := range grid(t, f, sheet) {
			if len(r) < verdictSurveyed || old[rowOf(r)] == "" {
				continue
			}
			x, ok := expect[rowOf(r)]
			if !ok { // no limit is left for it
				x = limits.Finding{Result: limits.NotAssessed, Limit: math.NaN(), Share: math.NaN(), Value: number64(r[verdictValue-1])}
			}
			if got := r[verdictResult-1]; got != x.Result || !close(r[verdictLimit-1], x.Limit) || !close(r[verdictShare-1], x.Share) || !close(r[verdictValue-1], x.Value) {
				if bad++; bad <= 5 {
					t.Errorf("%s row %d %s: %s, value %s, limit %s, share %s; Judge says %s, %g, %g, %g (%s)", sheet, i+1, rowOf(r), got, r[verdictValue-1], r[verdictLimit-1], r[verdictShare-1],
						x.Result, x.Value, x.Limit, x.Share, x.Why)
				}
			}
			if r[verdictResult-1] != old[rowOf(r)] {
				moved++
			}
		}
	}
	if bad > 5 {
		t.Errorf("and %d more", bad-5)
	}
	return moved
}

func rowKey(f limits.Finding) string {
	return fmt.Sprint(report.RuleTitle(f.RuleSet), "|", f.Channel, "|", report.QuantityName(f.Quantity, f.Order), "|", report.ShortStatistic(f.Statistic))
}

func rowOf(r []string) string { return strings.Join(r[:4], "|") }

func number64(s string) float64 {
	v, err := strconv.ParseFloat(s, 64)
	if err != nil {
		return math.NaN()
	}
	return v
}

// close compares a cell with a number; an empty cell is NaN.
func close(cell string, want float64) bool {
	got := number64(cell)
	if math.IsNaN(got) || math.IsNaN(want) {
		return math.IsNaN(got) == math.IsNaN(want)
	}
	return math.Abs(got-want) <= 1e-12*math.Max(math.Abs(got), math.Abs(want))
}

// formulasAgree compares every formula's value in the file with what the other program computed. It returns how many
// there were.
func formulasAgree(t *testing.T, name string, ours, theirs *excelize.File) int {
	t.Helper()
	n, bad := 0, 0
	for _, sheet := range ours.GetSheetList() {
		a, b := grid(t, ours, sheet), grid(t, theirs, sheet)
		for r := range a {
			for c := range a[r] {
				if strings.HasPrefix(cellOf(b, r, c), "#") {
					t.Errorf("%s, %s!%s: %s", name, sheet, at(c+1, r+1), cellOf(b, r, c))
				}
				formula, err := ours.GetCellFormula(sheet, at(c+1, r+1))
				if err != nil {
					t.Fatal(err)
				}
				if formula == "" {
					continue
				}
				n++
				if !same(a[r][c], cellOf(b, r, c)) {
					if bad++; bad <= 10 {
						t.Errorf("%s, %s!%s: the file says %q, recalculation %q: %s", name, sheet, at(c+1, r+1), a[r][c], cellOf(b, r, c), formula)
					}
				}
			}
		}
	}
	if bad > 10 {
		t.Errorf("%s: and %d more", name, bad-10)
	}
	return n
}

// same compares two cells, as numbers where they are numbers.
func same(a, b string) bool {
	if _, err := strconv.ParseFloat(b, 64); err != nil {
		return a == b
	}
	return close(a, number64(b))
}
