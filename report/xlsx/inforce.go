package xlsx

import (
	"fmt"
	"math"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

// Columns of sheet Limits in force.
const (
	forceSet = 1 + iota
	forceKind
	forceWhat
	forceOrder
	forceStatistic
	forceRow
	forceTable
	forceOfOrder
	forceOfStat
	forceLimit
	forceStatus
)

// A forceKey names one limit in force.
type forceKey struct {
	set, kind string
	order     int
	statistic string
}

// A force is one limit in force: where it stands, and what it is at the survey's inputs.
type force struct {
	regime *regime
	row    int
	limit  float64
	label  string
}

// forceSheet writes the limit of every order, total and statistic that the inputs choose.
func (b *book) forceSheet(s *sheet, regimes []*regime, refs map[*limits.RuleSet]factorRefs) map[forceKey]force {
	s.title("Limits in force at the inputs of sheet Site")
	s.note("Limit = the table's value × factor of the order × factor of the statistic. Nothing here is typed in: the tables and factors stand on sheet Limits.", noteWidth)
	units := s.header([]column{{head: "Rule set"}, {head: "On"}, {head: "What"}, {head: "Order"}, {head: "Statistic"}, {head: "Row of the table", width: 16}, {head: "Table", unit: "%"},
		{head: "× order", width: 10}, {head: "× statistic", width: 14}, {head: "Limit", unit: "%"}, {head: "Table's status"}})
	s.freeze(units, 0, units-1)
	out := map[forceKey]force{}
	for _, r := range regimes {
		for _, order := range r.orders() {
			for _, st := range r.statistics() {
				k := forceKey{r.set.Name, r.kind, order, st.String()}
				out[k] = s.force(r, order, st, refs[r.set])
			}
		}
	}
	if last := s.next() - 1; last > units {
		s.filter = fmt.Sprintf("A%d:%s", units, at(forceStatus, last))
		b.name("Limits_in_force", s.span(forceSet, units+1, forceStatus, last))
	}
	return out
}

func (s *sheet) force(r *regime, order int, st limits.Statistic, refs factorRefs) force {
	n := s.next()
	e, _ := r.entry(order)
	ofOrder, ofOrderCell := r.ofOrder(order, refs)
	ofStat, ofStatCell := r.ofStatistic(order, st, refs)
	limit := e.pct * ofOrder * ofStat
	orderCell := none
	if order > 0 {
		orderCell = count(order)
	}
	basis := ""
	if i := r.now(); i > 0 {
		basis = r.tables[i-1].Basis
	}
	s.add(text(report.RuleTitle(r.set.Name)), text(r.kind), text(orderWord(r.kind, order, basis)), orderCell, text(report.ShortStatistic(st.String())),
		result(e.row).live(e.rowFormula), number(e.pct, limitFormat).orEmpty().live(e.pctFormula), ofOrderCell, ofStatCell,
		number(limit, limitFormat).orEmpty().live(fmt.Sprintf(`IF(N(%[1]s)>0,%[1]s*%[2]s*%[3]s,"")`, at(forceTable, n), at(forceOfOrder, n), at(forceOfStat, n))),
		text(e.status))
	return force{regime: r, row: n, limit: limit, label: e.row}
}

// ofOrder is the factor that an order brings.
func (r *regime) ofOrder(order int, refs factorRefs) (float64, cell) {
	for i, f := range r.set.Factors {
		if f.Quantity == r.kind && f.Orders.Contains(order) {
			return f.Factor, number(f.Factor, limitFormat).live(refs.order[i])
		}
	}
	return 1, number(1, limitFormat)
}

// ofStatistic is the factor that the statistic brings.
func (r *regime) ofStatistic(order int, st limits.Statistic, refs factorRefs) (float64, cell) {
	v := st.FactorOf(order)
	if math.IsNaN(v) {
		v = 0
	}
	key := st.Quantity + " " + st.String()
	ref := refs.statistic[key]
	if order == 0 {
		ref = refs.total[key]
	}
	if ref == "" {
		return v, number(v, limitFormat) // by a formula of the document, or none
	}
	return v, number(v, limitFormat).live(ref)
}
