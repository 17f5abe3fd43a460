package limits

import (
	"cmp"
	"errors"
	"fmt"
	"regexp"
	"strings"
	"unicode/utf8"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics"
	"wavetally/harmonics/wave"
)

const topOrder = harmonics.MaxOrder

// Words of a rule file.
const (
	voltage = "voltage"
	current = "current"

	basisNominal     = "nominal"
	basisFundamental = "fundamental"
	basisDemand      = "demand current"

	threeSeconds = "3 s"
	tenMinutes   = "10 min"
	day          = "day"
	week         = "week"
)

// parse reads a rule file; name is the file's, for errors.
func parse(text, name string) (*RuleSet, error) {
	text = strings.TrimPrefix(text, "\ufeff")
	if err := checkText(text, name); err != nil {
		return nil, err
	}
	var keys map[string]any
	if _, err := toml.Decode(text, &keys); err != nil {
		return nil, syntaxError(err, name)
	}
	doc := &document{}
	r := readRuleSet(&node{doc: doc, keys: keys})
	if err := doc.first(name, indexLines(text)); err != nil {
		return nil, err
	}
	return r, nil
}

// checkText refuses what cannot be a rule file before it is taken apart.
func checkText(text, name string) error {
	if len(text) > largest {
		return &wave.ParseError{File: name, Msg: fmt.Sprintf("is larger than %d kB; this is no rule file", largest>>10)}
	}
	n := 0
	for line := range strings.Lines(text) {
		n++
		switch {
		case !utf8.ValidString(line):
			return &wave.ParseError{File: name, Line: n, Msg: "is not UTF-8 text; save the rule file as UTF-8"}
		case len(line) > longestLine:
			return &wave.ParseError{File: name, Line: n, Msg: fmt.Sprintf("is longer than %d bytes; break the line, or name a rule file if this is none", longestLine)}
		}
	}
	return nil
}

func syntaxError(err error, name string) error {
	var p toml.ParseError
	if !errors.As(err, &p) {
		return &wave.ParseError{File: name, Msg: strings.TrimPrefix(err.Error(), "toml: ") + "; see a built-in rule file for the form", Err: err}
	}
	msg := strings.Join(strings.Fields(strings.TrimSuffix(p.Message, ".")), " ") + "; each line is key = value, texts in quotes"
	if strings.Contains(p.Message, "already been defined") {
		msg = "is written twice; remove one of the lines"
	}
	if p.LastKey != "" {
		msg = p.LastKey + ": " + msg
	}
	return &wave.ParseError{File: name, Line: p.Position.Line, Msg: shorten(msg), Err: err}
}

var namePattern = regexp.MustCompile(`^[a-z0-9][a-z0-9.-]*$`)

func readRuleSet(n *node) *RuleSet {
	r := &RuleSet{
		Name:       n.need("name", `"my-utility-2026"`),
		Title:      n.need("title", `"one line for people"`),
		Document:   n.need("document", `"the document's name"`),
		Edition:    n.need("edition", `"2026"`),
		Scope:      n.text("scope"),
		AppliesAt:  n.texts("applies_at"),
		Grouping:   n.text("grouping"),
		Generation: n.text("generation"),
		Notes:      n.texts("notes"),
	}
	if r.Name != "" && !namePattern.MatchString(r.Name) {
		n.fail("name", "is %q; use small letters, digits, dots and hyphens", r.Name)
	}
	for _, p := range r.AppliesAt {
		n.word("applies_at", p, []string{"PCC", "internal"})
	}
	for _, t := range n.nodes("table") {
		r.tables = append(r.tables, readTable(t))
	}
	for _, f := range n.nodes("order_factor") {
		r.Factors = append(r.Factors, readOrderFactor(f))
	}
	for _, s := range n.nodes("statistic") {
		r.Statistics = append(r.Statistics, readStatistic(s))
	}
	for _, s := range n.nodes("raising") {
		r.Raising = append(r.Raising, readRaising(s))
	}
	n.done()
	checkWhole(n, r)
	return r
}

// checkWhole wants parts that belong together.
func checkWhole(n *node, r *RuleSet) {
	if len(r.tables) == 0 {
		n.doc.missing("", "there is no [[table]], so nothing could be judged; add one")
	}
	ids := map[string]bool{}
	for i, t := range r.tables {
		path := fmt.Sprintf("table[%d]", i)
		if ids[t.id] {
			n.doc.fail(path+".id", "id %q is that of an earlier table; choose another", t.id)
		}
		ids[t.id] = true
		judged := false
		for _, s := range r.Statistics {
			judged = judged || s.Quantity == t.quantity
		}
		if !judged && t.quantity != "" {
			n.doc.missing(path, "there is no [[statistic]] with quantity = %q, so this table is never used; add one", t.quantity)
		}
		for _, u := range r.tables[:i] {
			if u.quantity == t.quantity && u.voltage.overlaps(t.voltage) {
				n.doc.fail(path, "table %q holds for voltages that table %q holds for too; keep their voltage ranges apart", t.id, u.id)
				break
			}
		}
	}
}

var statusPattern = regexp.MustCompile(`^(from memory|common practice|read from the document|corroborated by [1-9][0-9]*)$`)

// evidence reads clause, status and source; what is absent is taken over from what encloses it.
func (n *node) evidence(from Evidence) Evidence {
	e := from
	e.Clause = cmp.Or(n.text("clause"), e.Clause)
	e.Status = cmp.Or(n.text("status"), e.Status)
	e.Source = cmp.Or(n.text("source"), e.Source)
	if _, isText := n.keys["status"].(string); isText && !statusPattern.MatchString(e.Status) {
		n.fail("status", `is %q; it must be "from memory", "common practice", "read from the document" or "corroborated by 2" (public sources)`, e.Status)
	}
	return e
}

// fullEvidence wants all three to be there.
func (n *node) fullEvidence() Evidence {
	e := n.evidence(Evidence{})
	n.needGiven("clause", e.Clause, `"5.2, Table 2"`)
	n.needGiven("status", e.Status, `"read from the document"`)
	n.needGiven("source", e.Source, `"where the numbers were read"`)
	return e
}

func (n *node) needGiven(key, value, example string) {
	if _, there := n.keys[key]; !there || value == "" {
		n.missing(key, example)
	}
}

func readTable(n *node) table {
	t := table{
		id:       n.need("id", `"table-1"`),
		title:    n.need("title", `"the table's heading"`),
		quantity: n.oneOf("quantity", voltage, current),
		basis:    n.oneOf("basis", basisFundamental, basisNominal, basisDemand),
		voltage:  n.span("voltage"),
		rowsBy:   n.oneOf("rows_by", byOrder, byVoltage, byRatio),
		Evidence: n.fullEvidence(),
	}
	if t.basis == basisNominal && t.quantity == current || t.basis == basisDemand && t.quantity == voltage {
		n.fail("basis", "%q does not go with quantity %q", t.basis, t.quantity)
	}
	if t.rowsBy == byRatio && t.quantity == voltage {
		n.fail("rows_by", "%q goes with quantity \"current\" only", t.rowsBy)
	}
	switch t.rowsBy {
	case byOrder:
		readByOrder(n, &t)
	case byVoltage, byRatio:
		readGrid(n, &t)
	default:
		return t // what the rest should be is not known
	}
	n.done()
	return t
}

func (n *node) span(key string) Span {
	text := n.text(key)
	if text == "" {
		return Span{}
	}
	s, err := parseSpan(text)
	if err != nil {
		n.fail(key, "%v", err)
	}
	return s
}

func readByOrder(n *node, t *table) {
	r := row{Evidence: t.Evidence}
	var given taken
	for _, e := range n.nodes("limits") {
		c := cell{orders: e.orders("orders"), Evidence: e.evidence(t.Evidence)}
		readLimit(e, &c)
		e.checkTotal(c.orders, t.basis)
		given.add(e, c.orders)
		r.cells = append(r.cells, c)
		e.done()
	}
	if len(r.cells) == 0 {
		n.doc.missing(n.path, "table %q has no limits; write limits = [ { orders = \"5\", limit = 6.0 } ]", t.id)
	}
	t.rows = []row{r}
}

func (n *node) orders(key string) Orders {
	text := n.need(key, `"5"`)
	if text == "" {
		return Orders{}
	}
	o, err := parseOrders(text)
	if err != nil {
		n.fail(key, "%v", err)
	}
	return o
}

// checkTotal wants tdd for shares of the demand current and thd for all others.
func (n *node) checkTotal(o Orders, basis string) {
	want := "thd"
	if basis == basisDemand {
		want = "tdd"
	}
	if o.Total != "" && o.Total != want {
		n.doc.fail(n.path, "%q does not go with basis %q; its total is %q", o.Text, basis, want)
	}
}

func readLimit(n *node, c *cell) {
	c.pct = n.positive("limit", 0)
	text := n.text("formula")
	switch {
	case text == "" && c.pct == 0 && n.keys["limit"] == nil:
		n.missing("limit", "6.0")
	case text != "" && c.pct != 0:
		n.fail("formula", "stands beside limit; keep one of them")
	case text != "" && c.orders.Total != "":
		n.fail("formula", "cannot give the limit of a total; write limit = 8.0")
	case text != "":
		n.formulaFor(text, c)
	}
}

func (n *node) formulaFor(text string, c *cell) {
	f, err := parseFormula(text)
	if err != nil {
		n.fail("formula", "%v", err)
		return
	}
	for h := 2; h <= topOrder; h++ {
		if c.orders.Contains(h) && !positiveFinite(f.at(h)) {
			n.fail("formula", "gives no limit above 0 for order %d", h)
			return
		}
	}
	c.formula = f
}

func positiveFinite(v float64) bool { return v > 0 && v < 1e9 }

// taken tells, by order, the entry that gives an order its limit; [0] is the total.
type taken [topOrder + 1]string

// add complains about an order that has a limit already.
func (t *taken) add(n *node, o Orders) {
	if o.Total != "" {
		if t[0] != "" {
			n.doc.fail(n.path, "%q: the table has a limit for a total already; remove one", o.Text)
		}
		t[0] = o.Text
		return
	}
	for h := 2; h <= topOrder; h++ {
		if !o.Contains(h) {
			continue
		}
		if t[h] != "" {
			n.doc.fail(n.path, "order %d of %q has a limit already, in %q; an order has one limit", h, o.Text, t[h])
			return
		}
		t[h] = o.Text
	}
}

func readGrid(n *node, t *table) {
	var given taken
	for i, text := range n.texts("columns") {
		o, err := parseOrders(text)
		path := fmt.Sprintf("%s.columns[%d]", n.path, i)
		if err != nil {
			n.doc.fail(path, "columns: %v", err)
			continue
		}
		at := &node{doc: n.doc, path: path}
		at.checkTotal(o, t.basis)
		given.add(at, o)
		t.columns = append(t.columns, o)
	}
	if len(t.columns) == 0 {
		n.missing("columns", `["2-10", "11-16", "tdd 2-50"]`)
	}
	for _, e := range n.nodes("rows") {
		t.rows = append(t.rows, readRow(e, t))
	}
	if len(t.rows) == 0 {
		n.doc.missing(n.path, "table %q has no rows; write rows = [ { %s = \"<20\", limits = [4.0, 5.0] } ]", t.id, t.rowsBy)
	}
}

func readRow(n *node, t *table) row {
	r := row{Evidence: n.evidence(t.Evidence)}
	n.need(t.rowsBy, `"20 to <50"`)
	r.span = n.span(t.rowsBy)
	for _, before := range t.rows {
		if before.span.overlaps(r.span) {
			n.doc.fail(n.path, "row %q holds what row %q holds too; keep the rows apart", r.span.Text, before.span.Text)
			break
		}
	}
	limits := n.numbers("limits")
	if len(limits) != len(t.columns) && len(t.columns) > 0 {
		n.doc.fail(join(n.path, "limits"), "limits has %d numbers for %d columns; give one for each", len(limits), len(t.columns))
	}
	for i := range min(len(limits), len(t.columns)) {
		r.cells = append(r.cells, cell{orders: t.columns[i], pct: limits[i], Evidence: r.Evidence})
	}
	n.done()
	return r
}

func readOrderFactor(n *node) OrderFactor {
	f := OrderFactor{
		Quantity: n.oneOf("quantity", voltage, current),
		Orders:   n.orders("orders"),
		Factor:   n.positive("factor", 0),
		Evidence: n.fullEvidence(),
	}
	if n.keys["factor"] == nil {
		n.missing("factor", "0.5")
	}
	if f.Orders.Total != "" {
		n.fail("orders", "is a total; a factor is for single orders")
	}
	n.done()
	return f
}

func readStatistic(n *node) Statistic {
	s := Statistic{
		Quantity:    n.oneOf("quantity", voltage, current),
		Interval:    n.oneOf("interval", tenMinutes, threeSeconds),
		Percentile:  n.positive("percentile", 0),
		Period:      n.oneOf("period", week, day),
		Factor:      n.positive("factor", 1),
		Formula:     n.text("factor_formula"),
		Information: n.text("information"),
		Evidence:    n.fullEvidence(),
	}
	s.TotalFactor = n.positive("total_factor", 0)
	if n.keys["percentile"] == nil {
		n.missing("percentile", "95")
	}
	if s.Percentile > 100 {
		n.fail("percentile", "is %v; it is in per cent, 100 for the maximum", s.Percentile)
	}
	if s.Interval == threeSeconds && (s.Period != day || s.Percentile != 99) {
		n.fail("interval", `"3 s" goes with percentile = 99 and period = "day" only: no other statistic of 3 s values is kept over a long recording`)
	}
	if s.Formula != "" {
		n.statisticFormula(&s)
	} else if s.TotalFactor == 0 {
		s.TotalFactor = s.Factor
	}
	n.done()
	return s
}

func (n *node) statisticFormula(s *Statistic) {
	f, err := parseFormula(s.Formula)
	switch {
	case err != nil:
		n.fail("factor_formula", "%v", err)
		return
	case n.keys["factor"] != nil:
		n.fail("factor_formula", "stands beside factor; keep one of them")
	}
	for h := 2; h <= topOrder; h++ {
		if !positiveFinite(f.at(h)) {
			n.fail("factor_formula", "gives no factor above 0 for order %d", h)
			return
		}
	}
	s.byOrder = f
}

func readRaising(n *node) Raising {
	r := Raising{HeldTo: n.positive("held_to", 25), Factor: n.positive("factor", 0), Evidence: n.fullEvidence()}
	for i, h := range n.numbers("orders") {
		if h != float64(int(h)) || h < 2 || h > topOrder {
			n.doc.fail(fmt.Sprintf("%s.orders[%d]", n.path, i), "orders holds %v; orders go from 2 to %d", h, topOrder)
			continue
		}
		r.Orders = append(r.Orders, int(h))
	}
	if len(r.Orders) == 0 {
		n.missing("orders", "[5, 7]")
	}
	if n.keys["factor"] == nil {
		n.missing("factor", "1.4")
	}
	n.done()
	return r
}
