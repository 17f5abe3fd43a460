package xlsx

import (
	"bytes"
	"sync"
	"testing"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// The invented surveys, judged by the real rule sets, and their workbooks: made once, for tests that only look.
var (
	weekSurvey  = sync.OnceValue(func() *report.Survey { return judgedBy(fixture.WeekInputs(), "ieee-519-2022", "en-50160") })
	shortSurvey = sync.OnceValue(func() *report.Survey { return judgedBy(fixture.ShortInputs(), "ieee-519-2022", "en-50160") })
	weekBook    = sync.OnceValue(func() []byte { return mustWrite(weekSurvey()) })
	shortBook   = sync.OnceValue(func() []byte { return mustWrite(shortSurvey()) })
)

// judgedBy is judged for values made once; a rule set that is not there panics.
func judgedBy(in report.Inputs, sets ...string) *report.Survey {
	s, err := judge(in, sets)
	if err != nil {
		panic(err)
	}
	return s
}

func mustWrite(s *report.Survey) []byte {
	var b bytes.Buffer
	if err := Write(&b, s); err != nil {
		panic(err)
	}
	return b.Bytes()
}

// judged builds a survey from invented measurements, judged by the real rule sets.
func judged(t testing.TB, in report.Inputs, sets ...string) *report.Survey {
	t.Helper()
	s, err := judge(in, sets)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func judge(in report.Inputs, sets []string) (*report.Survey, error) {
	in.Findings, in.RuleSets = nil, nil
	for _, name := range sets {
		set, err := limits.Load(name)
		if err != nil {
			return nil, err
		}
		in.RuleSets = append(in.RuleSets, set)
		in.Findings = append(in.Findings, set.Judge(in.Sheet, in.Summary)...)
	}
	in.Findings = fitness.Apply(in.Findings, in.Doubts)
	return report.Build(in), nil
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
