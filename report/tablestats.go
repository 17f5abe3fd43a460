package report

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// channelTable is one row a channel: what was measured over the whole recording.
func channelTable(s *Survey) Table {
	t := Table{Key: "channels", Title: "Channels over the whole recording", Columns: []Column{
		text("channel", "Channel"), text("source", "Recorded as"), text("unit", "Unit"), number("rms", "Rms", ""), number("fundamental", "Fundamental", ""), number("angle", "Angle", "°"),
		number("dc", "Dc", ""), number("peak", "Peak", ""), number("crest", "Crest factor", ""), number("thd", "THD", "%"), number("tdd", "TDD", "%"),
		number("k", "K-factor", ""), number("floor", "Noise floor", "% of fund.")},
		Notes: []string{"Angle: of the fundamental against that of the reference voltage. THD over orders 2 to 50, of the fundamental; THD and TDD are means over intervals where there are any."}}
	for i := range s.Channels {
		c := &s.Channels[i]
		tdd := blank
		if c.TDD != nil {
			tdd = value(c.TDD.Mean)
		}
		k := blank
		if c.Quantity == "current" {
			k = value(c.KFactor)
		}
		t.Rows = append(t.Rows, []Cell{word(c.Name), word(c.Source), word(c.Unit), value(c.RMS), value(c.Fundamental.RMS), degrees(c.Fundamental.Angle), value(c.DC), value(c.Peak),
			value(c.Crest), value(c.THD.Mean), tdd, k, value(c.NoiseFloor)})
	}
	return t
}

// statisticsTable is the statistics of the totals, by interval length.
func statisticsTable(s *Survey) Table {
	t := Table{Key: "statistics", Title: "Totals: statistics over valid intervals", Columns: []Column{
		text("channel", "Channel"), text("quantity", "Quantity"), text("interval", "Interval"), number("n", "Values", ""), number("mean", "Mean", "%"), number("p50", "P50", "%"),
		number("p95", "P95", "%"), text("bounds", "P95 bounds, %"), number("p99", "P99", "%"), number("max", "Highest", "%"), text("when", "Highest at")},
		Notes: []string{"P95 bounds: 95 % confidence, from order statistics, of the percentile alone; sensor uncertainty is not in them."}}
	for i := range s.Channels {
		c := &s.Channels[i]
		t.addStats(s, c, "THD", c.THD.Minutes, c.THD.Seconds)
		if c.TDD != nil {
			t.addStats(s, c, "TDD", c.TDD.Minutes, c.TDD.Seconds)
		}
	}
	return t
}

func (t *Table) addStats(s *Survey, c *Channel, quantity string, minutes, seconds *IntervalStats) {
	for _, set := range []struct {
		interval string
		stats    *IntervalStats
	}{{"10 min", minutes}, {"3 s", seconds}} {
		if set.stats == nil {
			continue
		}
		mean, at := s.rawTotal(c.Name, quantity, set.interval)
		bounds := Dash
		if set.stats.P95Low.Known() && set.stats.P95High.Known() {
			low, high := Apart(float64(set.stats.P95Low), float64(set.stats.P95High))
			bounds = low + " to " + high
		}
		when := blank
		if !math.IsNaN(at) {
			when = s.Recording.moment(at)
		}
		t.Rows = append(t.Rows, []Cell{word(c.Name), word(quantity), word(set.interval), whole(set.stats.N), value(mean), value(set.stats.P50), value(set.stats.P95), word(bounds),
			value(set.stats.P99), value(set.stats.Max), when})
	}
}

// rawTotal is the mean of a total in per cent, and when it was highest; NaN where the measurement is not at hand.
func (s *Survey) rawTotal(channel, quantity, interval string) (mean Number, at float64) {
	if s.Summary == nil {
		return NaN, math.NaN()
	}
	for i := range s.Summary.Channels {
		c := &s.Summary.Channels[i]
		if string(c.Role) != channel {
			continue
		}
		scale := 1.0
		pick := map[string]harmonics.Stats{"THD10 min": c.THD10m, "THD3 s": c.THD3s, "TDD10 min": c.THC10m, "TDD3 s": c.THC3s}[quantity+interval]
		if quantity == "TDD" {
			scale = 100 / s.Site.Supply.DemandCurrent
		}
		return Number(scale * pick.Mean), pick.MaxAt
	}
	return NaN, math.NaN()
}

// dayTable is the daily 99th percentiles of 3 s values, of the totals.
func dayTable(s *Survey) Table {
	t := Table{Key: "days", Title: "Daily 99th percentile of 3 s values", Columns: []Column{text("day", "Day from"), number("n", "Valid values", ""), number("coverage", "Of a day", "%")}}
	if s.Summary == nil || len(s.Summary.Days) == 0 {
		return t
	}
	il := s.Site.Supply.DemandCurrent
	for _, d := range s.Summary.Days {
		row := []Cell{s.Recording.moment(d.At), whole(d.N), value(Number(100 * float64(d.N) / float64(d.Want)))}
		for i := range s.Summary.Channels {
			v := d.Channels[i].THD
			if tdd(&s.Summary.Channels[i], il) {
				v = 100 * d.Channels[i].THC / il
			}
			row = append(row, value(Number(v)))
		}
		t.Rows = append(t.Rows, row)
	}
	for i := range s.Summary.Channels {
		c := &s.Summary.Channels[i]
		quantity := "THD"
		if tdd(c, il) {
			quantity = "TDD"
		}
		t.Columns = append(t.Columns, number(string(c.Role), string(c.Role)+" "+quantity, "%"))
	}
	return t
}

// tdd reports whether a channel's total is given as TDD.
func tdd(c *harmonics.ChannelSummary, demand float64) bool {
	return demand > 0 && groups[1].member(c.Role)
}

func powerTable(s *Survey) Table {
	t := Table{Key: "power", Title: "Power after IEEE 1459-2010, mean over the recording", Columns: []Column{text("phase", "Phase")}}
	if len(s.Power.Phases) == 0 {
		return t
	}
	type line struct {
		name                       string
		p, p1, q1, sa, sn, pf, pf1 Number
	}
	var lines []line
	var all []float64
	for _, p := range s.Power.Phases {
		lines = append(lines, line{p.Phase, p.P, p.P1, p.Q1, p.S, p.SN, p.PF, p.PF1})
		all = append(all, float64(p.S))
	}
	if p := s.Power.Total; p != nil && len(lines) > 1 {
		lines = append(lines, line{"all", p.P, p.P1, p.Q1, p.S, p.SN, p.PF, p.PF1})
		all = append(all, float64(p.S))
		t.Notes = append(t.Notes, "All: effective apparent power; P1, Q1 and PF1 of the positive sequence.")
	}
	w, q, a := ScaleFor("W", all...), ScaleFor("var", all...), ScaleFor("VA", all...)
	t.Columns = append(t.Columns, number("p", "P", w.Unit), number("p1", "P1", w.Unit), number("q1", "Q1", q.Unit), number("s", "S", a.Unit), number("sn", "SN", a.Unit), number("pf", "PF", ""), number("pf1", "PF1", ""))
	for _, l := range lines {
		k := Number(w.Factor)
		t.Rows = append(t.Rows, []Cell{word(l.name), value(k * l.p), value(k * l.p1), value(k * l.q1), value(k * l.sa), value(k * l.sn), value(l.pf), value(l.pf1)})
	}
	t.Notes = append(t.Notes, "The sign of a harmonic's power is no proof of where the harmonic comes from.")
	return t
}

// systemTable holds unbalance, neutral current and frequency.
func systemTable(s *Survey) Table {
	t := named("system", "Frequency, unbalance and neutral")
	f := s.Recording.Frequency
	if f.Mean.Known() {
		t.add("Frequency", fmt.Sprintf("%s Hz, from %s to %s Hz", sig(float64(f.Mean), 5), sig(float64(f.Min), 5), sig(float64(f.Max), 5)), "mean and ends over used windows")
	}
	for _, u := range []struct {
		name string
		v    Number
		text string
	}{{"Voltage unbalance u2", s.Unbalance.U2, "negative over positive sequence of the fundamental"}, {"Voltage unbalance u0", s.Unbalance.U0, "zero over positive sequence"},
		{"Current unbalance i2", s.Unbalance.I2, "negative over positive sequence"}, {"Current unbalance i0", s.Unbalance.I0, "zero over positive sequence"}} {
		if u.v.Known() {
			t.addNumber(u.name, float64(u.v), "%", u.text)
		}
	}
	if n := s.Neutral; n != nil {
		how := "recorded"
		if n.Computed {
			how = "computed from the three phase currents"
		}
		t.addNumber("Neutral current", float64(n.RMS), "A", how)
		t.addNumber("of it orders 3, 9, 15 …", float64(n.Triplen), "A", how)
	}
	return t
}

func plantTable(s *Survey) Table {
	t := Table{Key: "plant", Title: "What the harmonics do to the plant: screening, not design", Columns: []Column{
		text("topic", "Topic"), wide("name", "Figure"), number("value", "Value", ""), text("unit", "Unit"), wide("text", "What it means, and its source")}}
	for _, p := range s.Plant {
		t.Rows = append(t.Rows, []Cell{word(p.Topic), word(p.Name), value(p.Value), word(p.Unit), word(p.Text)})
	}
	return t
}
