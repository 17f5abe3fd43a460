package xlsx

import (
	"wavetally/harmonics"
	"wavetally/report"
)

// powerSheet is power in base units, unbalance, sequences, the neutral and the phasors.
func (b *book) powerSheet(s *sheet, p *plotter) {
	s.title("Power, unbalance, neutral and phasors")
	s.gap()
	s.tight = true
	any := s.tables("power")
	if t := systemTable(b.survey); len(t.Rows) > 0 {
		s.gap()
		s.table(t)
		any = true
	}
	if len(b.survey.Power.Phases) > 0 {
		s.gap()
		s.table(powerParts(b.survey.Power))
	}
	any = p.phasors(s) || any
	if sum := b.survey.Summary; sum != nil && sum.Power != nil {
		for _, t := range []report.Table{orderPower(sum.Power), sequences(sum.Power), neutralOrders(sum.Power.Neutral)} {
			if len(t.Rows) > 0 {
				s.gap()
				s.table(t)
				any = true
			}
		}
	}
	if !any {
		s.note("Not measured: power needs voltage and current of a phase.", noteWidth)
	}
	s.freeze(1, 1, 0)
	s.repeat = 0
}

func numeric(key, head, unit string) report.Column {
	return report.Column{Key: key, Head: head, Unit: unit, Right: true}
}

func figure(v float64) report.Cell {
	return report.Cell{Text: report.Sig(v), Number: report.Number(v), IsNum: true}
}

// systemTable is frequency, unbalance and neutral, each a number of its own.
func systemTable(s *report.Survey) report.Table {
	t := report.Table{Key: "system", Title: "Frequency, unbalance and neutral", Columns: []report.Column{{Key: "name", Head: "What"}, numeric("value", "Value", ""), {Key: "unit", Head: "Unit"}, {Key: "remark", Head: "Remark"}}}
	how := "recorded"
	neutral := report.Neutral{RMS: report.NaN, Triplen: report.NaN}
	if s.Neutral != nil {
		neutral = *s.Neutral
		if neutral.Computed {
			how = "computed from the phase currents"
		}
	}
	f, u := s.Recording.Frequency, s.Unbalance
	for _, r := range []struct {
		name         string
		v            report.Number
		unit, remark string
	}{
		{"Frequency, mean", f.Mean, "Hz", "over used windows"}, {"Frequency, lowest", f.Min, "Hz", "of a window"}, {"Frequency, highest", f.Max, "Hz", "of a window"},
		{"Voltage unbalance u2", u.U2, "%", "negative over positive sequence of the fundamental"}, {"Voltage unbalance u0", u.U0, "%", "zero over positive sequence"},
		{"Current unbalance i2", u.I2, "%", "negative over positive sequence"}, {"Current unbalance i0", u.I0, "%", "zero over positive sequence"},
		{"Neutral current", neutral.RMS, "A", how}, {"Orders 3, 9, 15 … of it", neutral.Triplen, "A", how},
	} {
		if !r.v.Known() {
			continue
		}
		c := figure(float64(r.v))
		if r.unit == "Hz" {
			c.Text = "0.000"
		}
		t.Rows = append(t.Rows, []report.Cell{{Text: r.name}, c, {Text: r.unit}, {Text: r.remark}})
	}
	return t
}

// powerParts are all parts of each phase's power, in base units.
func powerParts(p report.Power) report.Table {
	t := report.Table{Key: "power-parts", Title: "Parts of the power of each phase, IEEE 1459-2010, in W, var and VA", Columns: []report.Column{
		{Key: "phase", Head: "Phase"}, numeric("p", "P", "W"), numeric("p1", "P1", "W"), numeric("q1", "Q1", "var"), numeric("s", "S", "VA"), numeric("s1", "S1", "VA"),
		numeric("sn", "SN", "VA"), numeric("di", "DI", "var"), numeric("dv", "DV", "var"), numeric("sh", "SH", "VA"), numeric("pf", "PF", ""), numeric("pf1", "PF1", "")}}
	for _, q := range p.Phases {
		row := []report.Cell{{Text: q.Phase}}
		for _, v := range []report.Number{q.P, q.P1, q.Q1, q.S, q.S1, q.SN, q.DI, q.DV, q.SH, q.PF, q.PF1} {
			row = append(row, figure(float64(v)))
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}

// orderPower is active and reactive power by order.
func orderPower(p *harmonics.Power) report.Table {
	t := report.Table{Key: "power-orders", Title: "Power order by order; its sign is no proof of where a harmonic comes from", Columns: []report.Column{numeric("order", "Order", "")}}
	for _, q := range p.Phases {
		name := "L" + itoa(q.Phase)
		t.Columns = append(t.Columns, numeric(name+"p", name+" P", "W"), numeric(name+"q", name+" Q", "var"), numeric(name+"a", name+" angle V to I", "°"))
	}
	for h := 1; h <= harmonics.MaxOrder && len(p.Phases) > 0; h++ {
		row := []report.Cell{figure(float64(h))}
		for _, q := range p.Phases {
			if h > len(q.Orders) {
				row = append(row, report.Cell{}, report.Cell{}, report.Cell{})
				continue
			}
			o := q.Orders[h-1]
			row = append(row, figure(o.P), figure(o.Q), figure(o.Theta))
		}
		t.Rows = append(t.Rows, row)
	}
	return t
}

// sequences are the symmetrical components by order.
func sequences(p *harmonics.Power) report.Table {
	t := report.Table{Key: "sequences", Title: "Symmetrical components order by order, rms", Columns: []report.Column{numeric("order", "Order", ""),
		numeric("v1", "V positive", "V"), numeric("v2", "V negative", "V"), numeric("v0", "V zero", "V"), numeric("i1", "I positive", "A"), numeric("i2", "I negative", "A"), numeric("i0", "I zero", "A")}}
	for _, q := range p.Sequence {
		t.Rows = append(t.Rows, []report.Cell{figure(float64(q.Order)), figure(q.VPos), figure(q.VNeg), figure(q.VZero), figure(q.IPos), figure(q.INeg), figure(q.IZero)})
	}
	return t
}

// neutralOrders is the neutral's current by order, where it was computed; a measured one is on sheet Spectrum.
func neutralOrders(n *harmonics.NeutralCurrent) report.Table {
	t := report.Table{Key: "neutral", Title: "Neutral current computed from the phase currents, order by order", Columns: []report.Column{numeric("order", "Order", ""), numeric("rms", "Rms", "A")}}
	if n == nil || !n.Computed {
		return t
	}
	for h := 1; h < len(n.H); h++ {
		t.Rows = append(t.Rows, []report.Cell{figure(float64(h)), figure(n.H[h])})
	}
	return t
}
