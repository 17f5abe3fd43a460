package xlsx

import (
	"bytes"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// judged builds a survey from invented measurements, judged by the real rule sets.
func judged(t testing.TB, in report.Inputs, sets ...string) *report.Survey {
	t.Helper()
	in.Findings, in.RuleSets = nil, nil
	for _, name := range sets {
		set, err := limits.Load(name)
		if err != nil {
			t.Fatal(err)
		}
		in.RuleSets = append(in.RuleSets, set)
		in.Findings = append(in.Findings, set.Judge(in.Sheet, in.Summary)...)
	}
	in.Findings = fitness.Apply(in.Findings, in.Doubts)
	return report.Build(in)
}

func written(t testing.TB, s *report.Survey) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := Write(&b, s); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

func opened(t testing.TB, b []byte) *excelize.File {
	t.Helper()
	f, err := excelize.OpenReader(bytes.NewReader(b), excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	t.Cleanup(func() { _ = f.Close() })
	return f
}

// alwaysRecalculate is the setting of LibreOffice that makes it compute every formula on loading, whatever values the
// file holds (its documentation: "Recalculation on File Load, Excel 2007 and newer: Always").
const alwaysRecalculate = `<?xml version="1.0" encoding="UTF-8"?>
<oor:items xmlns:oor="http://openoffice.org/2001/registry" xmlns:xs="http://www.w3.org/2001/XMLSchema" xmlns:xsi="http://www.w3.org/2001/XMLSchema-instance">
<item oor:path="/org.openoffice.Office.Calc/Formula/Load"><prop oor:name="OOXMLRecalcMode" oor:op="fuse"><value>0</value></prop></item>
</oor:items>`

// recalculated is the workbook as another spreadsheet program computes it.
func recalculated(t testing.TB, b []byte) *excelize.File {
	t.Helper()
	office, err := exec.LookPath("soffice")
	if err != nil {
		t.Skip("LibreOffice (soffice) is not installed, so no other program recalculates the workbook here")
	}
	dir := t.TempDir()
	profile := filepath.Join(dir, "profile")
	if err := os.MkdirAll(filepath.Join(profile, "user"), 0o755); err != nil {
		t.Fatal(err)
	}
	for name, text := range map[string][]byte{filepath.Join(profile, "user", "registrymodifications.xcu"): []byte(alwaysRecalculate), filepath.Join(dir, "in.xlsx"): b} {
		if err := os.WriteFile(name, text, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	run := exec.Command(office, "-env:UserInstallation=file://"+profile, "--headless", "--convert-to", "xlsx:Calc MS Excel 2007 XML", "--outdir", filepath.Join(dir, "out"), filepath.Join(dir, "in.xlsx"))
	run.Env = append(os.Environ(), "HOME="+dir)
	if out, err := run.CombinedOutput(); err != nil {
		t.Fatalf("soffice: %v\n%s", err, out)
	}
	got, err := os.ReadFile(filepath.Join(dir, "out", "in.xlsx"))
	if err != nil {
		t.Fatal(err)
	}
	return opened(t, got)
}

// same compares two cells as numbers where they are numbers.
func same(a, b string) bool {
	x, errA := strconv.ParseFloat(a, 64)
	y, errB := strconv.ParseFloat(b, 64)
	if errA != nil || errB != nil {
		return a == b
	}
	return math.Abs(x-y) <= 1e-12*math.Max(math.Abs(x), math.Abs(y))
}

// grid is a sheet's cells by row and column, from 0.
func grid(t testing.TB, f *excelize.File, sheet string) [][]string {
	t.Helper()
	rows, err := f.GetRows(sheet, excelize.Options{RawCellValue: true})
	if err != nil {
		t.Fatal(err)
	}
	return rows
}

func cellOf(rows [][]string, r, c int) string {
	if r >= len(rows) || c >= len(rows[r]) {
		return ""
	}
	return rows[r][c]
}

// formulasAgree compares every formula's value in the file with what the other program computed. It returns how many
// there were.
func formulasAgree(t testing.TB, ours, theirs *excelize.File) int {
	t.Helper()
	n, bad := 0, 0
	for _, sheet := range ours.GetSheetList() {
		a, b := grid(t, ours, sheet), grid(t, theirs, sheet)
		for r := range a {
			for c := range a[r] {
				name := at(c+1, r+1)
				if strings.HasPrefix(cellOf(b, r, c), "#") {
					t.Errorf("%s!%s: %s", sheet, name, cellOf(b, r, c))
				}
				formula, err := ours.GetCellFormula(sheet, name)
				if err != nil {
					t.Fatal(err)
				}
				if formula == "" {
					continue
				}
				n++
				if !same(a[r][c], cellOf(b, r, c)) {
					if bad++; bad <= 10 {
						t.Errorf("%s!%s: the file says %q, recalculation %q: %s", sheet, name, a[r][c], cellOf(b, r, c), formula)
					}
				}
			}
		}
	}
	if bad > 10 {
		t.Errorf("and %d more", bad-10)
	}
	return n
}

func TestRecalculationGivesTheSurveysNumbers(t *testing.T) {
	s := judged(t, fixture.WeekInputs(), "ieee-519-2022", "ieee-519-2014", "en-50160", "iec-61000-2-4-class3")
	b := written(t, s)
	n := formulasAgree(t, opened(t, b), recalculated(t, b))
	if n < 7*len(s.Findings) {
		t.Errorf("%d formulas for %d findings", n, len(s.Findings))
	}
	t.Logf("%d formulas agree", n)
}
