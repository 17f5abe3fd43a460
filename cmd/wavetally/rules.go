package main

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"wavetally/harmonics/limits"
)

func newRules(a *app) *cobra.Command {
	return &cobra.Command{
		Use:   "rules [NAME|FILE]",
		Short: "List the rule sets, or show one with its limits and their source",
		Long: `Lists the rule sets that a survey can judge by. With a name, or the path of a rule file of your own, shows that one:
its statistics, its limits in per cent, where each table comes from, and whether it is corroborated or from memory.
The purchased text of the document prevails.`,
		Example: `  wavetally rules
  wavetally rules ieee-519-2022
  wavetally rules ./our-utility.toml`,
		Args: arguments(0, 1, ""),
		RunE: func(_ *cobra.Command, args []string) error {
			if len(args) == 0 {
				return a.listRules()
			}
			return a.showRules(args[0])
		},
	}
}

func (a *app) listRules() error {
	p := printer{w: a.out, width: a.width()}
	rows := [][]string{{"name", "document"}}
	for _, name := range limits.Names() {
		set, err := limits.Load(name)
		if err != nil {
			return err
		}
		rows = append(rows, []string{name, set.Title})
	}
	p.table(rows, 2, 0)
	p.printf("\n`wavetally rules NAME` shows one; a site sheet's limits.apply, or --rules, names those to judge by.\n")
	return p.err
}

func (a *app) showRules(name string) error {
	set, err := limits.Load(name)
	if err != nil {
		return err
	}
	p := printer{w: a.out, width: a.width()}
	p.printf("%s\n\n", set.Title)
	p.row("Document", strings.TrimSpace(set.Document+" "+set.Edition))
	p.row("Scope", set.Scope)
	p.row("Made for", strings.Join(set.AppliesAt, ", "))
	p.row("Grouping", set.Grouping)
	if set.Generation != "" {
		p.row("Generation", set.Generation)
	}
	p.list("Judged", statisticTexts(set.Statistics))
	p.list("Multiplied", factorTexts(set.Factors))
	for _, t := range set.Tables() {
		p.limitTable(t)
	}
	p.list("Notes", set.Notes)
	return p.err
}

func statisticTexts(statistics []limits.Statistic) (out []string) {
	for _, s := range statistics {
		most := times(s.Factor)
		if s.Formula != "" {
			most = fmt.Sprintf("(%s) ×, h the order,", s.Formula)
		}
		text := fmt.Sprintf("%s: %s, at most %s the table's limits", s.Quantity, s, most)
		if s.Information != "" {
			text += "; for information: " + s.Information
		}
		out = append(out, text+origin(s.Evidence))
	}
	return out
}

func factorTexts(factors []limits.OrderFactor) (out []string) {
	for _, f := range factors {
		out = append(out, fmt.Sprintf("%s, orders %s: %s the table's limits%s", f.Quantity, f.Orders, times(f.Factor), origin(f.Evidence)))
	}
	return out
}

// times writes a factor.
func times(f float64) string { return strconv.FormatFloat(f, 'g', -1, 64) + " ×" }

// origin tells clause, status and source, as far as there are any.
func origin(e limits.Evidence) string {
	clause := e.Clause
	if clause != "" && clause[0] >= '0' && clause[0] <= '9' {
		clause = "clause " + clause
	}
	var parts []string
	for _, p := range []string{clause, e.Status, e.Source} {
		if p != "" && !slices.Contains(parts, p) {
			parts = append(parts, p)
		}
	}
	if len(parts) == 0 {
		return ""
	}
	return " (" + strings.Join(parts, "; ") + ")"
}

// limitTable prints a table of limits. A table by order has a row an order and would be long: its rows are put side by
// side.
func (p *printer) limitTable(t limits.Table) {
	p.printf("\n")
	p.row("Table", fmt.Sprintf("%s, %s, per cent of the %s%s", t.Title, t.Quantity, t.Basis, origin(t.Evidence)))
	if t.RowHead == "order" {
		p.byOrder(t.Rows)
		return
	}
	rows := [][]string{append([]string{t.RowHead}, t.Columns...)}
	for _, r := range t.Rows {
		row := []string{r.Label}
		for _, c := range r.Cells {
			row = append(row, percent(c.Pct))
		}
		rows = append(rows, row)
	}
	p.table(rows, 1, 0)
}

// byOrder prints order and limit, several columns of them beside each other.
func (p *printer) byOrder(rows []limits.TableRow) {
	const columns = 5
	high := (len(rows) + columns - 1) / columns
	var cells [][]string
	for i := range high {
		var line []string
		for k := i; k < len(rows); k += high {
			line = append(line, rows[k].Label, percent(rows[k].Cells[0].Pct), "")
		}
		for len(line) < 3*columns {
			line = append(line, "")
		}
		cells = append(cells, line)
	}
	p.table(cells, 0, 0)
}

func percent(v float64) string {
	if math.IsNaN(v) {
		return "-"
	}
	return strconv.FormatFloat(v, 'g', 4, 64)
}
