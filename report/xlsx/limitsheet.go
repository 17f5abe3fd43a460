package xlsx

import (
	"fmt"
	"math"

	"wavetally/harmonics/limits"
)

// factorRefs tells where the factors of a rule set stand on sheet Limits.
type factorRefs struct {
	statistic map[string]string // factor, by the statistic's name
	total     map[string]string // factor of totals
	order     []string          // as the rule set's Factors
}

// limitSheet writes the rule sets' tables and factors, with what holds at the inputs, and tells the regimes where.
func (b *book) limitSheet(s *sheet, regimes []*regime) map[*limits.RuleSet]factorRefs {
	s.title("Limits")
	s.note("Tables and factors as the rule sets have them, with their source. They may be changed: what is judged by them follows. Column \"Holds\" is 1 for the row and the table that the inputs on sheet Site choose.", noteWidth)
	s.add(text("Isc / IL"), number(ratioOf(b.survey.Site.Supply), computedFormat).orEmpty().live(nameRatio),
		text("Voltage").as(style{right: true}), number(systemVoltage(b.survey.Site.Supply), computedFormat).orEmpty().live(nameSystem), text("V"))
	s.freeze(s.next()-1, 0, 0)
	s.repeat = 0
	s.width(colLabel, 40)
	for c := colLow; c <= colHolds; c++ {
		s.width(c, 10)
	}
	last := lastColumn(regimes)
	for c := colLimit; c < last; c++ {
		s.width(c, 13)
	}
	s.width(last, 17)
	s.width(last+1, 24)
	s.width(last+2, 80)
	out := map[*limits.RuleSet]factorRefs{}
	for _, set := range b.survey.RuleSets {
		s.gap()
		out[set] = s.ruleSet(set, regimes, last)
	}
	if len(b.survey.RuleSets) == 0 {
		s.gap()
		s.note("No rule set was applied, or the survey was read back from its JSON form, which does not hold the tables.", noteWidth)
	}
	return out
}

// orEmpty is an empty text where a formula will give one.
func (c cell) orEmpty() cell {
	if c.value == nil {
		c.value = ""
	}
	return c
}

// lastColumn is the first column right of all limits.
func lastColumn(regimes []*regime) int {
	n := 2 // statistics need room too
	for _, r := range regimes {
		for _, t := range r.tables {
			n = max(n, len(t.Columns))
		}
	}
	return colLimit + n
}

func (s *sheet) ruleSet(set *limits.RuleSet, regimes []*regime, last int) factorRefs {
	s.part(set.Title)
	for _, line := range [][2]string{{"Name", set.Name}, {"Document", set.Document}, {"Edition", set.Edition}, {"For", set.Scope}, {"Grouping", set.Grouping}, {"File", set.File}} {
		if line[1] != "" {
			s.add(text(line[0]), text(line[1]))
		}
	}
	for _, n := range set.Notes {
		s.note(n, noteWidth)
	}
	for _, r := range regimes {
		if r.set == set {
			s.regime(r, last)
		}
	}
	refs := factorRefs{statistic: map[string]string{}, total: map[string]string{}}
	s.statistics(set, &refs, last)
	s.orderFactors(set, &refs, last)
	s.raisings(set, last)
	return refs
}

// regime writes the tables for voltages or currents, and below them which one holds.
func (s *sheet) regime(r *regime, last int) {
	for _, t := range r.tables {
		s.limitTable(t, r, last)
	}
	s.gap()
	n := s.add(text("Table that holds, "+r.kind), none, none, count(r.now()).live(r.nowFormula()),
		text("number of the table above, in order; 0 for none").as(noteLook))
	r.nowRef = s.ref(colHolds, n)
	n = s.add(text("Why nothing is judged, "+r.kind), none, none, result(r.stop()).live(r.stopFormula()))
	r.stopRef = s.ref(colHolds, n)
}

func (s *sheet) limitTable(t *placed, r *regime, last int) {
	s.gap()
	t.sheet = s
	s.add(text(fmt.Sprintf("%s, per cent of the %s", t.Title, t.Basis)).as(boldLook))
	s.voltageSpan(t, r)
	s.head(t, last)
	t.first = s.next()
	for _, row := range t.Rows {
		s.limitRow(t, r, row, last)
	}
	t.last = s.next() - 1
	n := s.add(text("Row that holds").as(noteLook), none, none, count(t.row(r.supply)).live(s.rowFormula(t)))
	t.rowRef = s.ref(colHolds, n)
}

// rowFormula is the number of the first row that holds; 1 in a table by order, where all do.
func (s *sheet) rowFormula(t *placed) string {
	if t.RowHead == byOrder {
		return "1"
	}
	return fmt.Sprintf("IFERROR(MATCH(1,%s:%s,0),0)", at(colHolds, t.first), at(colHolds, t.last))
}

// voltageSpan says for which nominal voltages the table is, and whether it holds.
func (s *sheet) voltageSpan(t *placed, r *regime) {
	n := s.next()
	held := 0
	if t.holds(r.supply) {
		held = 1
	}
	words := "for any nominal voltage"
	if t.Voltage.Text != "" {
		words = "for a nominal voltage of " + t.Voltage.Text
	}
	s.add(text(words), end(t.Voltage.HasLow, t.Voltage.Low), end(t.Voltage.HasHigh, t.Voltage.High),
		count(held).live(inside(nameSystem, t.Voltage, at(colLow, n), at(colHigh, n))))
	t.holdsRef = s.ref(colHolds, n)
}

// end is one end of a span; empty where it has none.
func end(has bool, v float64) cell {
	if !has {
		return none
	}
	return number(v, limitFormat)
}

func (s *sheet) head(t *placed, last int) {
	row := []cell{text(t.RowHead).as(headLook), text("From").as(headLook), text("To").as(headLook), text("Holds").as(headLook)}
	for i, c := range t.Columns {
		if t.Orders != nil && t.Orders[i].Total == "" {
			c = "orders " + c
		}
		row = append(row, text(c).as(headLook))
	}
	s.add(withEvidenceHeads(row, last)...)
}

func withEvidenceHeads(row []cell, last int) []cell {
	row = padded(row, last-1, headLook)
	return append(row, text("Clause").as(headLook), text("Status").as(headLook), text("Source").as(headLook))
}

// padded fills a row up with empty cells.
func padded(row []cell, columns int, look style) []cell {
	for len(row) < columns {
		row = append(row, cell{style: look})
	}
	return row
}

func evidence(row []cell, e limits.Evidence, last int) []cell {
	return append(padded(row, last-1, plain), text(e.Clause), text(e.Status), text(e.Source))
}

func (s *sheet) limitRow(t *placed, r *regime, row limits.TableRow, last int) {
	n := s.next()
	holds := none
	if t.RowHead != byOrder {
		name, x := t.x(r.supply)
		is := 0
		if !math.IsNaN(x) && row.Span.Contains(x) || !row.Span.HasLow && !row.Span.HasHigh {
			is = 1
		}
		holds = count(is).live(inside(name, row.Span, at(colLow, n), at(colHigh, n)))
	}
	cells := []cell{text(row.Label), end(row.Span.HasLow, row.Span.Low), end(row.Span.HasHigh, row.Span.High), holds}
	for _, c := range row.Cells {
		cells = append(cells, number(c.Pct, limitFormat).as(inputLook))
	}
	e := row.Evidence
	if row.Formula != "" {
		e.Source = "by the formula " + row.Formula + "; " + e.Source
	}
	s.add(evidence(cells, e, last)...)
}

func (s *sheet) statistics(set *limits.RuleSet, refs *factorRefs, last int) {
	s.gap()
	s.add(text("Statistics: what is held against the limit, and what multiplies it").as(boldLook))
	s.add(withEvidenceHeads([]cell{text("Statistic").as(headLook), text("On").as(headLook), text("Judged").as(headLook), cell{style: headLook}, text("Factor").as(headLook), text("of totals").as(headLook)}, last)...)
	for _, st := range set.Statistics {
		judged := "yes"
		e := st.Evidence
		if st.Information != "" {
			judged = "no"
			e.Source += "; not judged: " + st.Information
		}
		factor := number(st.Factor, limitFormat).as(inputLook)
		if st.Formula != "" {
			factor = text(st.Formula)
		}
		total := number(st.TotalFactor, limitFormat).as(inputLook)
		if st.TotalFactor == 0 {
			total = none
		}
		n := s.add(evidence([]cell{text(st.String()), text(st.Quantity), text(judged), none, factor, total}, e, last)...)
		key := st.Quantity + " " + st.String()
		if st.Formula == "" {
			refs.statistic[key] = s.ref(colLimit, n)
		}
		if st.TotalFactor != 0 {
			refs.total[key] = s.ref(colLimit+1, n)
		}
	}
}

func (s *sheet) orderFactors(set *limits.RuleSet, refs *factorRefs, last int) {
	if len(set.Factors) == 0 {
		return
	}
	s.gap()
	s.add(text("Factors of single orders").as(boldLook))
	s.add(withEvidenceHeads([]cell{text("Orders").as(headLook), text("On").as(headLook), cell{style: headLook}, cell{style: headLook}, text("Factor").as(headLook)}, last)...)
	for _, f := range set.Factors {
		n := s.add(evidence([]cell{text(f.Orders.Text), text(f.Quantity), none, none, number(f.Factor, limitFormat).as(inputLook)}, f.Evidence, last)...)
		refs.order = append(refs.order, s.ref(colLimit, n))
	}
}

func (s *sheet) raisings(set *limits.RuleSet, last int) {
	if len(set.Raising) == 0 {
		return
	}
	s.gap()
	s.add(text("Raising of current limits: shown, never applied").as(boldLook))
	s.add(withEvidenceHeads([]cell{text("Where each of the orders").as(headLook), text("keeps to").as(headLook), text("of its limit").as(headLook), cell{style: headLook}, text("Factor").as(headLook)}, last)...)
	for _, r := range set.Raising {
		words := ""
		for i, o := range r.Orders {
			words += pick(i > 0, ", ", "") + itoa(o)
		}
		s.add(evidence([]cell{text(words), number(r.HeldTo, limitFormat), text("%"), none, number(r.Factor, limitFormat)}, r.Evidence, last)...)
	}
}
