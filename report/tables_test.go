package report_test

import (
	"math"
	"strings"
	"testing"

	"wavetally/report"
	"wavetally/report/internal/fixture"
)

func TestTablesHoldTogether(t *testing.T) {
	for name, s := range surveys() {
		checkTables(t, name, s)
	}
}

func checkTables(t *testing.T, name string, s *report.Survey) {
	t.Helper()
	keys := map[string]bool{}
	for _, table := range append(report.Tables(s), report.FullTables(s)...) {
		if keys[table.Key] {
			t.Errorf("%s: two tables %q", name, table.Key)
		}
		keys[table.Key] = true
		columns := map[string]bool{}
		for _, c := range table.Columns {
			if columns[c.Key] {
				t.Errorf("%s %s: two columns %q", name, table.Key, c.Key)
			}
			columns[c.Key] = true
		}
		for i, row := range table.Rows {
			if len(row) != len(table.Columns) {
				t.Fatalf("%s %s row %d: %d cells, %d columns", name, table.Key, i, len(row), len(table.Columns))
			}
			for k, cell := range row {
				if cell.IsNum && cell.Number.Known() == (cell.Text == report.Dash) {
					t.Errorf("%s %s row %d %s: %g is shown as %q", name, table.Key, i, table.Columns[k].Key, float64(cell.Number), cell.Text)
				}
				if strings.Contains(cell.Text, "NaN") {
					t.Errorf("%s %s row %d: %q", name, table.Key, i, cell.Text)
				}
			}
		}
	}
}

func cells(t *testing.T, s *report.Survey, key string) (report.Table, func(row int, column string) report.Cell) {
	t.Helper()
	table, ok := report.TableByKey(s, key)
	if !ok {
		t.Fatalf("no table %q", key)
	}
	return table, func(row int, column string) report.Cell {
		t.Helper()
		for i, c := range table.Columns {
			if c.Key == column {
				return table.Rows[row][i]
			}
		}
		t.Fatalf("no column %q", column)
		return report.Cell{}
	}
}

// The verdict table falls by share of the limit, and no finding graver than its row is hidden behind it.
func TestVerdictTable(t *testing.T) {
	s := surveys()["week"]
	table, at := cells(t, s, "verdict")
	rows := map[string]string{}
	last := math.Inf(1)
	for i := range table.Rows {
		share := float64(at(i, "share_pct").Number)
		if share > last {
			t.Errorf("row %d: share %g after %g", i, share, last)
		}
		last = share
		rows[at(i, "rule_set").Text+at(i, "what").Text] = at(i, "result").Result
	}
	for _, f := range s.Findings {
		kind := "Voltage "
		if f.Channel[0] == 'I' {
			kind = "Current "
		}
		row := rows[report.RuleTitle(f.RuleSet)+kind+report.QuantityName(f.Quantity, f.Order)]
		if row == "" {
			t.Fatalf("no row for %+v", f)
		}
		if f.Result == "exceeds" && row != "exceeds" {
			t.Errorf("%s order %d exceeds, its row says %q", f.Channel, f.Order, row)
		}
		if row == "within" && f.Result != "within" {
			t.Errorf("%s order %d is %q, its row says within", f.Channel, f.Order, f.Result)
		}
	}
}

// Time over the limit, counted here from the series.
func TestTimeOverLimit(t *testing.T) {
	s := surveys()["week"]
	table, at := cells(t, s, "findings")
	for i := range table.Rows {
		f := s.Findings[i]
		if f.Channel != "I2" || f.Order != 11 || f.Statistic != "95th percentile of 10 min values over a week" {
			continue
		}
		over, n := 0, 0
		for _, iv := range s.Summary.Tens {
			if iv.Valid() {
				n++
				if iv.Channels[4].H[11]/410*100 > 3.5 {
					over++
				}
			}
		}
		if got := float64(at(i, "over_pct").Number); math.Abs(got-100*float64(over)/float64(n)) > 1e-9 || over == 0 {
			t.Errorf("%g %%, counted %d of %d", got, over, n)
		}
		return
	}
	t.Fatal("no such finding")
}

// A harmonic that does not stand clear of noise is marked.
func TestOrdersInNoiseAreMarked(t *testing.T) {
	s := surveys()["week"]
	_, at := cells(t, s, "orders-V")
	for order, marked := range map[int]bool{5: false, 6: true, 50: true} {
		if got := strings.HasPrefix(at(order-1, "V1_rms").Text, "~"); got != marked {
			t.Errorf("order %d: %q", order, at(order-1, "V1_rms").Text)
		}
		if got := at(order-1, "V1_rms").Number; got != s.Channels[0].Harmonics[order-1].RMS {
			t.Errorf("order %d: the cell's number is %g", order, float64(got))
		}
	}
}

// Noise as large as the limit needs four windows: 0.8 s at 50 Hz.
func TestNoiseTable(t *testing.T) {
	in := fixture.WeekInputs()
	for i, f := range in.Findings {
		if f.Channel == "I1" && f.Order == 33 { // IEEE 519-2022 limits it to 1 %
			in.Findings[i].Floor = 1
		}
	}
	table, at := cells(t, report.Build(in), "noise")
	if len(table.Rows) != 1 || at(0, "channel").Text != "I1" || at(0, "order").Number != 33 {
		t.Fatalf("%+v", table.Rows)
	}
	if got := float64(at(0, "time").Number); math.Abs(got-4*10/50.0021) > 1e-9 {
		t.Errorf("%g s", got)
	}
}
