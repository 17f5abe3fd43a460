package xlsx

import (
	"bytes"
	"testing"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/report"
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
