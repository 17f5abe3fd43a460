package limits

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// Judge holds every limit of the rule set against every line channel: each order and each total, each statistic that
// the rule set asks for, phases apart. The neutral conductor and dc have no limits and are not judged. Findings come in
// the order of the summary's channels, then of orders with the total last, then of statistics.
//
// The package comment says what each result means.
func (r *RuleSet) Judge(sheet site.Sheet, sum *harmonics.Summary) []Finding {
	j := &judge{set: r, sheet: sheet, sum: sum, reader: newReader(sum)}
	var out []Finding
	for c := range sum.Channels {
		if role := sum.Channels[c].Role; !role.Neutral() && (role.Voltage() || role.Current()) {
			out = append(out, j.channel(c)...)
		}
	}
	return out
}

type judge struct {
	set    *RuleSet
	sheet  site.Sheet
	sum    *harmonics.Summary
	reader *reader
}

// A setting is what is the same for all limits of one channel.
type setting struct {
	channel int
	table   *table
	fixed   *row     // the row that holds; nil where it is not known and the strictest is shown
	ratio   float64  // Isc/IL; NaN where the table has no such rows or it is not known
	stops   []string // why nothing can be judged
	mind    []string // what to mind beside a verdict
}

func (j *judge) channel(c int) []Finding {
	kind := voltage
	if j.sum.Channels[c].Role.Current() {
		kind = current
	}
	s := setting{channel: c, ratio: math.NaN()}
	var known bool
	if s.table, known = j.tableFor(kind); s.table == nil {
		if !known {
			return nil // the document says nothing about this kind
		}
		return j.noTable(c, kind)
	}
	j.point(&s)
	j.row(&s)
	var out []Finding
	for order := 2; order <= topOrder; order++ {
		out = append(out, j.order(&s, order)...)
	}
	out = append(out, j.order(&s, 0)...)
	j.tellRaising(out)
	return out
}

// systemVoltage is the nominal voltage that tells a voltage class: between lines.
func systemVoltage(s site.Supply) float64 {
	if s.Connection == site.SplitPhase {
		return 2 * s.NominalVoltage
	}
	return s.NominalVoltage
}

// tableFor returns the table for a kind of quantity at the supply's voltage. known reports whether there is any table
// for the kind.
func (j *judge) tableFor(kind string) (t *table, known bool) {
	volts := systemVoltage(j.sheet.Supply)
	for i := range j.set.tables {
		t := &j.set.tables[i]
		if t.quantity != kind {
			continue
		}
		known = true
		if volts > 0 && t.voltage.Contains(volts) || !t.voltage.HasLow && !t.voltage.HasHigh {
			return t, true
		}
	}
	return nil, known
}

// noTable is the one finding of a channel that the rule set has tables for, but none for its voltage.
func (j *judge) noTable(c int, kind string) []Finding {
	why := "the nominal voltage is not declared, so the table is not known; nominal_voltage in the site sheet settles it"
	if v := systemVoltage(j.sheet.Supply); v > 0 {
		why = fmt.Sprintf("the document has no %s limits for a nominal voltage of %s V", kind, sig(v, 4))
	}
	nan := math.NaN()
	f := Finding{RuleSet: j.set.Name, Channel: j.sum.Channels[c].Role, Quantity: map[string]string{voltage: "thd", current: "tdd"}[kind],
		Value: nan, ValueLow: nan, ValueHigh: nan, SampleLow: nan, SampleHigh: nan, OverPct: nan, Level: nan, Limit: nan, Share: nan,
		TablePct: nan, Factor: nan, OfOrder: nan, OfStat: nan, BasisSize: nan, Floor: nan, Unit: "%", Result: NotAssessed, Why: why}
	for _, t := range j.set.tables {
		if t.quantity == kind {
			f.Clause = t.Clause
			break
		}
	}
	return []Finding{f}
}

// point minds where the recording was made.
func (j *judge) point(s *setting) {
	at := j.set.AppliesAt
	here := j.sheet.Supply.Point
	switch {
	case len(at) != 1 || here == at[0]:
	case here == "" && at[0] == "PCC":
		s.mind = append(s.mind, "taken to be measured at the PCC, since the site sheet does not say (supply.point)")
	case at[0] == "PCC":
		s.stops = append(s.stops, "measured at an internal point, and these limits are made for the PCC: the limit is for information; a recording at the PCC would settle it")
	default:
		s.stops = append(s.stops, `these limits are made for points inside an installation: the limit is for information; supply.point = "internal" in the site sheet, where that is so, settles it`)
	}
	if j.sheet.Supply.Generation && s.table.quantity == current && j.set.Generation != "" {
		s.mind = append(s.mind, "generation is declared: "+j.set.Generation)
	}
}

// row chooses the row of the table.
func (j *judge) row(s *setting) {
	supply := j.sheet.Supply
	switch s.table.rowsBy {
	case byOrder:
		s.fixed = &s.table.rows[0]
	case byVoltage:
		if s.fixed = s.table.rowFor(systemVoltage(supply)); s.fixed == nil {
			s.stops = append(s.stops, "the nominal voltage is not declared or in no row of the table, so the strictest row is shown; nominal_voltage in the site sheet settles it")
		}
	case byRatio:
		j.rowByRatio(s, supply)
	}
	if s.table.basis == basisDemand && supply.DemandCurrent == 0 {
		s.stops = append(s.stops, "the demand current IL is not declared, and these limits are shares of it, never of the fundamental; "+
			"supply.demand_current in the site sheet (mean of the last 12 monthly maximum demands) settles it")
	}
	if s.table.basis == basisNominal && supply.NominalVoltage == 0 {
		s.stops = append(s.stops, "the nominal voltage is not declared, and these limits are shares of it; nominal_voltage in the site sheet settles it")
	}
}

func (j *judge) rowByRatio(s *setting, supply site.Supply) {
	if supply.ShortCircuitCurrent == 0 {
		s.stops = append(s.stops, "the short-circuit current Isc is not declared, so the row of the table is not known and the strictest is shown; "+
			"supply.short_circuit_current in the site sheet (the utility's maximum at the PCC) settles it")
	}
	if supply.ShortCircuitCurrent == 0 || supply.DemandCurrent == 0 {
		return
	}
	s.ratio = supply.ShortCircuitCurrent / supply.DemandCurrent
	if s.fixed = s.table.rowFor(s.ratio); s.fixed == nil {
		s.stops = append(s.stops, fmt.Sprintf("Isc/IL of %s is in no row of the table, so the strictest is shown", sig(s.ratio, 4)))
	}
}

// order judges one order, the total for order 0, by each statistic.
func (j *judge) order(s *setting, order int) []Finding {
	r := s.fixed
	if r == nil {
		r = s.table.strictest(order)
	}
	if r == nil {
		return nil
	}
	c := r.of(order)
	if c == nil {
		return nil
	}
	q := j.quantity(s, c, order)
	var out []Finding
	for _, st := range j.set.Statistics {
		if st.Quantity == s.table.quantity && st.Information == "" {
			out = append(out, j.finding(s, r, c, q, st))
		}
	}
	return out
}

func (j *judge) quantity(s *setting, c *cell, order int) quantity {
	role := j.sum.Channels[s.channel].Role
	q := quantity{channel: s.channel, role: role, order: order, top: c.orders.To, basis: s.table.basis, size: math.NaN()}
	switch {
	case q.basis == basisNominal && j.sheet.Supply.NominalVoltage > 0:
		q.size = j.sheet.Supply.NominalOf(role)
	case q.basis == basisDemand && j.sheet.Supply.DemandCurrent > 0:
		q.size = j.sheet.Supply.DemandCurrent
	}
	return q
}

func (j *judge) finding(s *setting, r *row, c *cell, q quantity, st Statistic) Finding {
	f := Finding{RuleSet: j.set.Name, Clause: c.Clause, Channel: q.role, Quantity: q.name(), Order: q.order, Statistic: st.String(),
		Unit: "%", Basis: q.basisText(), BasisSize: q.size,
		LimitRow: s.table.label(*r, *c, q.order), TableKey: s.table.key(j.set.Name, *r, *c, q.order), TablePct: c.limit(q.order)}
	var from Evidence
	f.OfOrder, from = j.set.orderFactor(s.table.quantity, q.order)
	f.OfStat = st.FactorOf(q.order)
	f.Factor = f.OfOrder * f.OfStat
	f.Limit = f.TablePct * f.Factor
	f.Unverified = c.Unverified() || from.Unverified() || st.Unverified() && f.OfStat != 1
	got := j.read(st, q)
	f.take(got, j.sum.Channels[s.channel].Uncertainty)
	f.Floor = q.floor(&j.sum.Channels[s.channel])
	if q.order == 0 {
		f.Top = q.top
	}
	v := verdict{judge: j, setting: s, cell: c, quantity: q, statistic: st, reading: got, finding: &f}
	v.decide()
	return f
}

// read returns the statistic; a reading without value for an order that the sampling rate does not support.
func (j *judge) read(st Statistic, q quantity) reading {
	if top := j.sum.Channels[q.channel].TopOrder; top > 0 && q.order > top {
		nan := math.NaN()
		return reading{value: nan, level: nan, sampleLow: nan, sampleHigh: nan}
	}
	return j.reader.read(st, q)
}

// take puts a reading into the finding. uncertainty is that declared for the channel, in per cent of reading.
func (f *Finding) take(got reading, uncertainty float64) {
	u := uncertainty / 100
	f.Value, f.Level, f.N, f.From, f.To = got.value, got.level, got.n, got.from, got.to
	f.Share = 100 * f.Value / f.Limit
	f.SampleLow, f.SampleHigh = got.sampleLow, got.sampleHigh
	f.Indicative = got.indicative != "" && !math.IsNaN(got.value)
	low, high := got.value, got.value
	if f.Indicative {
		low, high = orElse(got.sampleLow, low), orElse(got.sampleHigh, high)
	}
	f.ValueLow, f.ValueHigh = low*(1-u), high*(1+u)
	f.OverPct = math.NaN()
	if n := len(got.sorted); n > 0 {
		f.OverPct = 100 * float64(got.sorted.above(f.Limit)) / float64(n)
	}
}

func orElse(v, otherwise float64) float64 {
	if math.IsNaN(v) {
		return otherwise
	}
	return v
}
