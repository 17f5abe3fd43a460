package limits

import (
	"fmt"
	"math"
	"slices"
)

// A Table is one table of a rule set as a person reads it: rows and columns of limits, for the reports' Limits pages
// and `wavetally rules`.
type Table struct {
	ID       string
	Title    string
	Quantity string // "voltage" or "current"
	Basis    string // what the percentages are of: "nominal voltage", "fundamental" or "demand current"
	Voltage  Span   // nominal voltages, line to line in V, that the table is for
	RowHead  string // what tells rows apart: "nominal voltage", "Isc/IL" or "order"
	Columns  []string
	Orders   []Orders // of each column; nil in a table by order, where Label tells
	Rows     []TableRow
	Evidence
}

// A TableRow is one row of a Table.
type TableRow struct {
	Label   string
	Span    Span   // of the nominal voltage in V or of Isc/IL; the zero Span in a table by order
	Formula string // that the row's numbers were computed by, "" where they are the document's own
	Cells   []Cell // as many as the table has columns
	Evidence
}

// A Cell is one limit before factors.
type Cell struct {
	Key string  // RuleSet/Table/Row/Column, as Finding.TableKey
	Pct float64 // per cent of the table's basis
}

type table struct {
	id, title       string
	quantity, basis string
	voltage         Span
	rowsBy          string // "order", "voltage" or "isc_il"
	columns         []Orders
	rows            []row
	Evidence
}

// A row holds limits for some voltages or some Isc/IL. A table by order has one row, which holds for all.
type row struct {
	span  Span
	cells []cell
	Evidence
}

type cell struct {
	orders  Orders
	pct     float64
	formula formula // at is nil where pct holds for all orders
	Evidence
}

func (c cell) limit(order int) float64 {
	if c.formula.at != nil {
		return c.formula.at(order)
	}
	return c.pct
}

// single returns the limit of an order, nil where the row has none.
func (r row) single(order int) *cell {
	for i := range r.cells {
		if r.cells[i].orders.Contains(order) {
			return &r.cells[i]
		}
	}
	return nil
}

// total returns the limit of the total, nil where the row has none.
func (r row) total() *cell {
	for i := range r.cells {
		if r.cells[i].orders.Total != "" {
			return &r.cells[i]
		}
	}
	return nil
}

// of returns the limit of an order, of the total for order 0; nil where the row has none.
func (r row) of(order int) *cell {
	if order == 0 {
		return r.total()
	}
	return r.single(order)
}

// key names a cell: RuleSet/Table/Row/Column.
func (t table) key(set string, r row, c cell, order int) string {
	if t.rowsBy == byOrder {
		return fmt.Sprintf("%s/%s/%s/limit", set, t.id, orderLabel(c, order))
	}
	return fmt.Sprintf("%s/%s/%s/%s", set, t.id, r.span.Text, c.orders.Text)
}

// label names a cell's row.
func (t table) label(r row, c cell, order int) string {
	if t.rowsBy == byOrder {
		return orderLabel(c, order)
	}
	return r.span.Text
}

func orderLabel(c cell, order int) string {
	if c.orders.Total != "" {
		return c.orders.Total
	}
	return fmt.Sprint(order)
}

const (
	byOrder   = "order"
	byVoltage = "voltage"
	byRatio   = "isc_il"
)

var rowHeads = map[string]string{byOrder: "order", byVoltage: "nominal voltage", byRatio: "Isc/IL"}

var basisNames = map[string]string{basisNominal: "nominal voltage", basisFundamental: "fundamental", basisDemand: "demand current"}

// Tables returns the rule set's tables, limits before factors. In a table by order each order has a row of its own.
func (r *RuleSet) Tables() []Table {
	var out []Table
	for _, t := range r.tables {
		p := Table{ID: t.id, Title: t.title, Quantity: t.quantity, Basis: basisNames[t.basis], Voltage: t.voltage,
			RowHead: rowHeads[t.rowsBy], Evidence: t.Evidence}
		if t.rowsBy == byOrder {
			p.Columns, p.Rows = []string{"limit"}, r.rowsByOrder(t)
		} else {
			p.Columns, p.Orders, p.Rows = columnNames(t), t.columns, r.rowsBySpan(t)
		}
		out = append(out, p)
	}
	return out
}

func columnNames(t table) []string {
	var names []string
	for _, c := range t.columns {
		names = append(names, c.Text)
	}
	return names
}

func (r *RuleSet) rowsBySpan(t table) []TableRow {
	var out []TableRow
	for _, from := range t.rows {
		to := TableRow{Label: from.span.Text, Span: from.span, Evidence: from.Evidence}
		for _, c := range from.cells {
			to.Cells = append(to.Cells, Cell{Key: t.key(r.Name, from, c, 0), Pct: c.pct})
		}
		out = append(out, to)
	}
	return out
}

func (r *RuleSet) rowsByOrder(t table) []TableRow {
	var out []TableRow
	add := func(order int) {
		from := t.rows[0]
		if c := from.of(order); c != nil {
			out = append(out, TableRow{Label: orderLabel(*c, order), Formula: c.formula.text, Evidence: c.Evidence,
				Cells: []Cell{{Key: t.key(r.Name, from, *c, order), Pct: c.limit(order)}}})
		}
	}
	for order := 2; order <= topOrder; order++ {
		add(order)
	}
	add(0)
	return out
}

// strictest returns the row with the lowest limit for an order.
func (t table) strictest(order int) *row {
	best, lowest := -1, math.Inf(1)
	for i, r := range t.rows {
		if c := r.of(order); c != nil && c.limit(order) < lowest {
			best, lowest = i, c.limit(order)
		}
	}
	if best < 0 {
		return nil
	}
	return &t.rows[best]
}

// rowFor returns the row that holds x, nil for none.
func (t table) rowFor(x float64) *row {
	i := slices.IndexFunc(t.rows, func(r row) bool { return r.span.Contains(x) })
	if i < 0 {
		return nil
	}
	return &t.rows[i]
}

// orderFactor returns what multiplies the table's limit of an order, and where that comes from.
func (r *RuleSet) orderFactor(quantity string, order int) (float64, Evidence) {
	for _, f := range r.Factors {
		if f.Quantity == quantity && f.Orders.Contains(order) {
			return f.Factor, f.Evidence
		}
	}
	return 1, Evidence{}
}
