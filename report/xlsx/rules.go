package xlsx

import (
	"fmt"
	"math"
	"strings"

	"wavetally/harmonics"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/report"
)

// A regime is one rule set on voltages or on currents: its tables, where they stand on sheet Limits, and what holds at
// the survey's inputs.
type regime struct {
	set    *limits.RuleSet
	kind   string // "voltage" or "current"
	tables []*placed
	supply site.Supply

	nowRef  string // the number, from 1, of the table that holds; 0 for none
	stopRef string // why nothing can be judged, "" where something can
}

// A placed table is a limit table on sheet Limits.
type placed struct {
	limits.Table
	sheet       *sheet
	first, last int    // its rows
	holdsRef    string // 1 where the table is for the nominal voltage
	rowRef      string // the row that holds, from 1; 0 for none
}

// Columns of the limit tables on sheet Limits.
const (
	colLabel = 1 + iota
	colLow
	colHigh
	colHolds
	colLimit // the first of the limits
)

const (
	byOrder   = "order"
	byVoltage = "nominal voltage"
	byRatio   = "Isc/IL"
)

// regimes lists the rule sets that were applied, on voltage and current each.
func (b *book) regimes() []*regime {
	var out []*regime
	for _, set := range b.survey.RuleSets {
		for _, kind := range []string{"voltage", "current"} {
			r := &regime{set: set, kind: kind, supply: b.survey.Site.Supply}
			for _, t := range set.Tables() {
				if t.Quantity == kind {
					r.tables = append(r.tables, &placed{Table: t})
				}
			}
			if len(r.tables) > 0 {
				out = append(out, r)
			}
		}
	}
	return out
}

// statistics are those of the regime that are judged.
func (r *regime) statistics() []limits.Statistic {
	var out []limits.Statistic
	for _, s := range r.set.Statistics {
		if s.Quantity == r.kind && s.Information == "" {
			out = append(out, s)
		}
	}
	return out
}

// inside is a formula that is 1 where x is in the span whose ends stand in two cells, else 0. x may be empty.
func inside(x string, s limits.Span, low, high string) string {
	if !s.HasLow && !s.HasHigh {
		return "1"
	}
	var parts []string
	if s.HasLow {
		parts = append(parts, x+pick(s.LowOut, ">", ">=")+low)
	}
	if s.HasHigh {
		parts = append(parts, x+pick(s.HighOut, "<", "<=")+high)
	}
	return fmt.Sprintf(`IF(ISNUMBER(%s),IF(AND(%s),1,0),0)`, x, strings.Join(parts, ","))
}

func pick(which bool, yes, no string) string {
	if which {
		return yes
	}
	return no
}

// holds reports whether the table is for the supply's voltage.
func (t *placed) holds(s site.Supply) bool {
	return !t.Voltage.HasLow && !t.Voltage.HasHigh || t.Voltage.Contains(systemVoltage(s)) && systemVoltage(s) > 0
}

// x is what rows are chosen by: the cell's name, and the number.
func (t *placed) x(s site.Supply) (name string, v float64) {
	if t.RowHead == byRatio {
		return nameRatio, ratioOf(s)
	}
	return nameSystem, systemVoltage(s)
}

// row is the number of the row that holds, from 1; 0 for none.
func (t *placed) row(s site.Supply) int {
	_, x := t.x(s)
	for i, r := range t.Rows {
		if !math.IsNaN(x) && r.Span.Contains(x) || !r.Span.HasLow && !r.Span.HasHigh {
			return i + 1
		}
	}
	return 0
}

// now is the number of the table that holds, from 1; 0 for none.
func (r *regime) now() int {
	for i, t := range r.tables {
		if t.holds(r.supply) {
			return i + 1
		}
	}
	return 0
}

func (r *regime) nowFormula() string {
	out := "0"
	for i := len(r.tables) - 1; i >= 0; i-- {
		out = fmt.Sprintf("IF(%s=1,%d,%s)", r.tables[i].holdsRef, i+1, out)
	}
	return out
}

// Why nothing can be judged.
const (
	stopPoint   = "these limits are made for another point"
	stopTable   = "no table for this nominal voltage"
	stopVoltage = "nominal voltage missing, or in no row of the table"
	stopIsc     = "short-circuit current Isc missing"
	stopRatio   = "Isc/IL is in no row of the table"
	stopIL      = "demand current IL missing"
	stopNominal = "nominal voltage missing"
)

// stop is the reason why nothing can be judged at the survey's inputs.
func (r *regime) stop() string {
	if wrongPoint(r.set, r.supply.Point) {
		return stopPoint
	}
	n := r.now()
	if n == 0 {
		return stopTable
	}
	t, s := r.tables[n-1], r.supply
	switch {
	case t.RowHead == byVoltage && t.row(s) == 0:
		return stopVoltage
	case t.RowHead == byRatio && !(s.ShortCircuitCurrent > 0):
		return stopIsc
	case t.Basis == "demand current" && !(s.DemandCurrent > 0):
		return stopIL
	case t.RowHead == byRatio && s.DemandCurrent > 0 && t.row(s) == 0:
		return stopRatio
	case t.Basis == "nominal voltage" && !(s.NominalVoltage > 0):
		return stopNominal
	}
	return ""
}

// stopFormula is stop as a formula.
func (r *regime) stopFormula() string {
	inner := quote(stopTable)
	for i := len(r.tables) - 1; i >= 0; i-- {
		inner = fmt.Sprintf("IF(%s=%d,%s,%s)", r.nowRef, i+1, r.tables[i].stopFormula(), inner)
	}
	if wrong := wrongPointFormula(r.set); wrong != "" {
		return fmt.Sprintf("IF(%s,%s,%s)", wrong, quote(stopPoint), inner)
	}
	return inner
}

func (t *placed) stopFormula() string {
	out := `""`
	first := func(condition, reason string) { out = fmt.Sprintf("IF(%s,%s,%s)", condition, quote(reason), out) }
	if t.Basis == "nominal voltage" {
		first("N("+nameNominal+")<=0", stopNominal)
	}
	if t.RowHead == byRatio {
		first("AND(N("+nameIL+")>0,"+t.rowRef+"=0)", stopRatio)
	}
	if t.Basis == "demand current" {
		first("N("+nameIL+")<=0", stopIL)
	}
	if t.RowHead == byRatio {
		first("N("+nameIsc+")<=0", stopIsc)
	}
	if t.RowHead == byVoltage {
		first(t.rowRef+"=0", stopVoltage)
	}
	return out
}

func quote(s string) string { return `"` + strings.ReplaceAll(s, `"`, `""`) + `"` }

// wrongPoint reports whether the limits are made for another point than the one declared. Nothing declared is taken as
// the PCC.
func wrongPoint(set *limits.RuleSet, point string) bool {
	if len(set.AppliesAt) != 1 {
		return false
	}
	return point != set.AppliesAt[0] && !(point == "" && set.AppliesAt[0] == "PCC")
}

func wrongPointFormula(set *limits.RuleSet) string {
	if len(set.AppliesAt) != 1 {
		return ""
	}
	out := namePoint + "<>" + quote(set.AppliesAt[0])
	if set.AppliesAt[0] == "PCC" {
		out = "AND(" + out + "," + namePoint + `<>"")`
	}
	return out
}

// column is the place of an order's limit (0: of the total) among the table's columns, from 0; -1 where it has none.
func (t *placed) column(order int) int {
	for i, o := range t.Orders {
		if order == 0 && o.Total != "" || order > 0 && o.Contains(order) {
			return i
		}
	}
	return -1
}

// orderRow is the row of an order in a table by order, from 0; -1 where it has none.
func (t *placed) orderRow(order int) int {
	for i, r := range t.Rows {
		if r.Label == fmt.Sprint(order) || order == 0 && (r.Label == "thd" || r.Label == "tdd") {
			return i
		}
	}
	return -1
}

// An entry is a table's limit for one order: the formulas that find it, and what they give at the survey's inputs.
type entry struct {
	pct    float64 // NaN where there is none
	row    string  // its label
	status string

	pctFormula, rowFormula string
}

// entry returns the limit of an order in the table; ok is false where the table has none.
func (t *placed) entry(order int, s site.Supply) (e entry, ok bool) {
	if t.RowHead == byOrder {
		i := t.orderRow(order)
		if i < 0 {
			return e, false
		}
		r := t.Rows[i]
		return entry{pct: r.Cells[0].Pct, row: r.Label, status: r.Status,
			pctFormula: t.sheet.ref(colLimit, t.first+i), rowFormula: t.sheet.ref(colLabel, t.first+i)}, true
	}
	c := t.column(order)
	if c < 0 {
		return e, false
	}
	limits := t.sheet.span(colLimit+c, t.first, colLimit+c, t.last)
	labels := t.sheet.span(colLabel, t.first, colLabel, t.last)
	i := t.row(s)
	if i == 0 {
		i = t.strictest(c)
	}
	which := fmt.Sprintf("IF(%s>0,%s,MATCH(MIN(%s),%s,0))", t.rowRef, t.rowRef, limits, limits)
	r := t.Rows[i-1]
	return entry{pct: r.Cells[c].Pct, row: r.Label, status: r.Status,
		pctFormula: fmt.Sprintf("INDEX(%s,%s)", limits, which), rowFormula: fmt.Sprintf("INDEX(%s,%s)", labels, which)}, true
}

// strictest is the row, from 1, with the lowest limit in a column.
func (t *placed) strictest(c int) int {
	best := 0
	for i, r := range t.Rows {
		if r.Cells[c].Pct < t.Rows[best].Cells[c].Pct {
			best = i
		}
	}
	return best + 1
}

// entry returns the limit of an order in whichever table holds; ok is false where no table of the regime has one.
func (r *regime) entry(order int) (e entry, ok bool) {
	e = entry{pct: math.NaN(), pctFormula: `""`, rowFormula: `""`}
	for i := len(r.tables) - 1; i >= 0; i-- {
		t, has := r.tables[i].entry(order, r.supply)
		if !has {
			t = entry{pct: math.NaN(), pctFormula: `""`, rowFormula: `""`}
		}
		ok = ok || has
		e.pctFormula = fmt.Sprintf("IF(%s=%d,%s,%s)", r.nowRef, i+1, t.pctFormula, e.pctFormula)
		e.rowFormula = fmt.Sprintf("IF(%s=%d,%s,%s)", r.nowRef, i+1, t.rowFormula, e.rowFormula)
		if r.now() == i+1 {
			e.pct, e.row, e.status = t.pct, t.row, t.status
		}
	}
	return e, ok
}

// orders are those that some table of the regime limits, the total last as 0.
func (r *regime) orders() []int {
	var out []int
	for order := 2; order <= harmonics.MaxOrder; order++ {
		if _, ok := r.entry(order); ok {
			out = append(out, order)
		}
	}
	if _, ok := r.entry(0); ok {
		out = append(out, 0)
	}
	return out
}

func orderWord(kind string, order int, basis string) string {
	if order > 0 {
		return report.QuantityName("", order)
	}
	if kind == "current" && basis == "demand current" {
		return "TDD"
	}
	return "THD"
}
