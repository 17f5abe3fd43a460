package pdf

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

// The verdict table on paper shows what exceeds and what is near a limit. The rest would fill pages with rows that
// nobody acts on; it is counted below the table and listed in the spreadsheet.
const (
	nearLimit   = 25.0 // per cent of the limit
	fewestShown = 15
	mostShown   = 60
)

func (d *document) verdicts() []block {
	t := d.tables["verdict"]
	var shown, rest [][]report.Cell
	for i, row := range t.Rows {
		if i < fewestShown || i < mostShown && near(t, row) || exceeds(row) {
			shown = append(shown, row)
		} else {
			rest = append(rest, row)
		}
	}
	t.Rows = shown
	if len(rest) > 0 {
		t.Notes = append([]string{restNote(rest)}, t.Notes...)
	}
	return d.table(t)
}

func near(t report.Table, row []report.Cell) bool {
	for i, c := range t.Columns {
		if c.Key == "share_pct" && float64(row[i].Number) >= nearLimit {
			return true
		}
	}
	return false
}

func exceeds(row []report.Cell) bool {
	return slices.ContainsFunc(row, func(c report.Cell) bool { return c.Result == limits.Exceeds })
}

// restNote counts the rows that are not shown.
func restNote(rest [][]report.Cell) string {
	n := map[string]int{}
	for _, row := range rest {
		for _, c := range row {
			if c.Result != "" {
				n[c.Result]++
			}
		}
	}
	var parts []string
	for _, r := range []string{limits.Undecided, limits.NotAssessed, limits.Within} {
		if n[r] > 0 {
			parts = append(parts, fmt.Sprintf("%d %s", n[r], r))
		}
	}
	return fmt.Sprintf("Not shown: %d more orders and totals at lower shares of their limit (%s); the spreadsheet lists them.", len(rest), strings.Join(parts, ", "))
}
