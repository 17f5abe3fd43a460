package pdf

import (
	"fmt"
	"math/rand/v2"
	"strings"
	"testing"

	"wavetally/report"
	"wavetally/report/internal/fixture"
)

func blankDocument() *document { return newDocument(fixture.Tiny(), papers["a4"]) }

// numbers is a table of so many rows and columns of numbers, the first column its orders.
func numbers(rows, channels int) report.Table {
	t := report.Table{Title: "numbers", Columns: []report.Column{{Key: "order", Head: "Order", Right: true}}}
	for c := range channels {
		for _, what := range []string{"rms", "pct"} {
			t.Columns = append(t.Columns, report.Column{Key: fmt.Sprintf("V%d_%s", c, what), Head: fmt.Sprintf("V%d", c), Unit: "% of fund.", Right: true})
		}
	}
	for r := range rows {
		var row []report.Cell
		for range t.Columns {
			row = append(row, report.Cell{Text: fmt.Sprint(r)})
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}

// Whatever a table holds, its parts fit the page and hold every column once, the first at the head of each.
func TestTablesFitThePage(t *testing.T) {
	d := blankDocument()
	rng := rand.New(rand.NewPCG(5, 7))
	for range 200 {
		table := report.Table{}
		columns := 1 + rng.IntN(30)
		for i := range columns {
			table.Columns = append(table.Columns, report.Column{Key: fmt.Sprint(i), Head: strings.Repeat("head ", rng.IntN(4)), Wide: rng.IntN(4) == 0, Right: rng.IntN(2) == 0})
		}
		for range 1 + rng.IntN(5) {
			var row []report.Cell
			for range columns {
				row = append(row, report.Cell{Text: strings.Repeat("word", rng.IntN(3)) + strings.Repeat(" longer", rng.IntN(10)*rng.IntN(4))})
			}
			table.Rows = append(table.Rows, row)
		}
		next := 0
		for k, g := range d.layOut(table, d.full()) {
			if g.total() > d.full()+0.01 {
				t.Fatalf("a part of %d columns is %.0f wide, page %.0f", len(g.widths), g.total(), d.full())
			}
			own := g.t.Columns
			if k > 0 {
				if own[0].Key != "0" {
					t.Fatalf("part %d begins with column %s", k+1, own[0].Key)
				}
				own = own[1:]
			}
			for _, c := range own {
				if c.Key != fmt.Sprint(next) {
					t.Fatalf("column %s stands where %d should", c.Key, next)
				}
				next++
			}
		}
		if next != columns {
			t.Fatalf("%d columns of %d were set", next, columns)
		}
	}
}

// A table of many channels is divided between channels, into parts of about equal width.
func TestWideTablesAreDividedByChannel(t *testing.T) {
	d := blankDocument()
	parts := d.layOut(numbers(3, 11), d.full())
	if len(parts) < 2 {
		t.Fatalf("%d parts", len(parts))
	}
	for i, g := range parts {
		if len(g.widths)%2 != 1 { // the order, and two columns a channel
			t.Errorf("part %d has %d columns", i+1, len(g.widths))
		}
	}
	if first, last := len(parts[0].widths), len(parts[len(parts)-1].widths); last < first/2 {
		t.Errorf("the first part has %d columns, the last %d", first, last)
	}
}

// Fifty orders of one channel stand beside each other in two halves; a short table and a wide one do not.
func TestLongNarrowTablesFold(t *testing.T) {
	d := blankDocument()
	height := func(table report.Table) float64 {
		_, natural := heights(d.table(table), true)
		return natural
	}
	if one, half := height(numbers(50, 1)), height(numbers(24, 1)); one > 1.2*half {
		t.Errorf("50 rows are %.0f high and 24 rows %.0f: not folded", one, half)
	}
	if wide := d.layOut(numbers(50, 4), d.full())[0]; wide.folds(d.full()) {
		t.Error("a wide table was folded")
	}
}

// Orders that the sampling rate does not reach are left out, and said so.
func TestOrdersEndWhereMeasurementDoes(t *testing.T) {
	d := blankDocument()
	table := numbers(50, 1)
	for r := range table.Rows {
		for c := range table.Rows[r] {
			table.Rows[r][c] = report.Cell{Text: fmt.Sprint(r + 1), Number: report.Number(r), IsNum: r < 8 || c < 2}
		}
	}
	d.tables = map[string]report.Table{"orders-V": table}
	_, all := heights(d.table(table), true)
	_, shown := heights(d.orders("orders-V"), true)
	if shown > all/2 {
		t.Errorf("8 orders of 50 take %.0f of %.0f", shown, all)
	}
}

// A row of more lines than a page has is not cut.
func TestEndlessCells(t *testing.T) {
	d := blankDocument()
	table := report.Table{Columns: []report.Column{{Head: "What"}, {Head: "Why", Wide: true}},
		Rows: [][]report.Cell{{{Text: "a"}, {Text: strings.Repeat("a reason that does not end ", 500)}}}}
	for _, page := range compose(d.table(table), topMargin, d.pen.height-bottomMargin) {
		for _, p := range page {
			if p.y+p.h > d.pen.height-bottomMargin+1e-9 {
				t.Errorf("a block ends at %.0f of %.0f", p.y+p.h, d.pen.height)
			}
		}
	}
}
