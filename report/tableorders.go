package report

import (
	"fmt"
	"strings"
)

// orderTable sets the channels of a group side by side, one row an order: rms, share of the fundamental and its highest
// statistic for each.
func orderTable(s *Survey, g group) Table {
	channels := g.channels(s)
	t := Table{Key: "orders-" + g.key, Columns: []Column{number("order", "Order", ""), number("frequency", "Frequency", "Hz")}}
	if len(channels) == 0 {
		return t
	}
	for i, h := range channels[0].Harmonics {
		t.Rows = append(t.Rows, []Cell{whole(h.Order), value(channels[0].Harmonics[i].Frequency)})
	}
	name := ""
	for _, c := range channels {
		p95, interval := p95Of(c)
		name = interval
		t.Columns = append(t.Columns, number(c.Name+"_rms", c.Name, c.Unit), number(c.Name+"_pct", c.Name, "% of fund."))
		addColumns(t.Rows, belowFirst(c, func(h Harmonic) Number { return h.RMS }), belowFirst(c, func(h Harmonic) Number { return h.Pct }))
		if p95 != nil {
			t.Columns = append(t.Columns, number(c.Name+"_p95", c.Name+" P95", "% of fund."))
			addColumns(t.Rows, belowFirst(c, p95))
		}
	}
	markNoise(t.Rows, channels)
	t.Title = fmt.Sprintf("%s, order by order: rms over the whole recording, and share of each channel's own fundamental", g.name)
	t.Notes = []string{"~ marks a value that does not stand clear of noise. " + Dash + " is not measured, which is not 0."}
	if name != "" {
		t.Notes = append(t.Notes, "P95: 95th percentile of valid "+name+" values of the share.")
	}
	return t
}

// p95Of returns what gives the 95th percentile of an order's share, and of which intervals; nil when there are none.
func p95Of(c *Channel) (get func(Harmonic) Number, interval string) {
	switch {
	case len(c.Harmonics) == 0:
		return nil, ""
	case c.Harmonics[0].Stats.Minutes != nil:
		return func(h Harmonic) Number { return p95(h.Stats.Minutes) }, "10 min"
	case c.Harmonics[0].Stats.Seconds != nil:
		return func(h Harmonic) Number { return p95(h.Stats.Seconds) }, "3 s"
	}
	return nil, ""
}

func p95(s *IntervalStats) Number {
	if s == nil {
		return NaN
	}
	return s.P95
}

// belowFirst formats a column of orders: order 1, which dwarfs the others, by itself, the others alike.
func belowFirst(c *Channel, get func(Harmonic) Number) []Cell {
	var rest []Number
	for _, h := range c.Harmonics[1:] {
		rest = append(rest, get(h))
	}
	return append([]Cell{value(get(c.Harmonics[0]))}, column(rest)...)
}

// markNoise puts a tilde before the rms of orders that do not stand clear of noise.
func markNoise(rows [][]Cell, channels []*Channel) {
	each := (len(rows[0]) - 2) / len(channels)
	for k, c := range channels {
		for i, h := range c.Harmonics {
			if cell := &rows[i][2+k*each]; !h.AboveNoise && h.RMS.Known() {
				cell.Text = "~" + strings.TrimPrefix(cell.Text, "<")
			}
		}
	}
}

// spectrumTable is every order of every channel with all its statistics.
func spectrumTable(s *Survey) Table {
	t := Table{Key: "spectrum", Title: "Every order of every channel, with its statistics in per cent of the channel's fundamental", Columns: []Column{
		text("channel", "Channel"), number("order", "Order", ""), number("frequency_hz", "Frequency", "Hz"), number("rms", "Rms", "V or A"), number("pct", "Share", "% of fund."),
		number("angle_deg", "Angle", "°"), text("above_noise", "Above noise"), number("noise_floor", "Noise floor", "V or A")}}
	t.Columns = append(t.Columns, statColumns("3s", "3 s")...)
	t.Columns = append(t.Columns, statColumns("10min", "10 min")...)
	for i := range s.Channels {
		c := &s.Channels[i]
		for _, h := range c.Harmonics {
			row := []Cell{word(c.Name), whole(h.Order), value(h.Frequency), value(h.RMS), value(h.Pct), degrees(h.Angle), word(yesNo(h.AboveNoise)), value(h.Floor)}
			row = append(row, statCells(h.Stats.Seconds)...)
			t.Rows = append(t.Rows, append(row, statCells(h.Stats.Minutes)...))
		}
	}
	return t
}

func yesNo(b bool) string {
	if b {
		return "yes"
	}
	return "no"
}

func statColumns(key, interval string) []Column {
	return []Column{number(key+"_n", interval+" values", ""), number(key+"_p50", interval+" P50", "%"), number(key+"_p95", interval+" P95", "%"),
		number(key+"_p95_low", interval+" P95 at least", "%"), number(key+"_p95_high", interval+" P95 at most", "%"), number(key+"_p99", interval+" P99", "%"), number(key+"_max", interval+" highest", "%")}
}

func statCells(s *IntervalStats) []Cell {
	if s == nil {
		return []Cell{blank, blank, blank, blank, blank, blank, blank}
	}
	return []Cell{whole(s.N), value(s.P50), value(s.P95), value(s.P95Low), value(s.P95High), value(s.P99), value(s.Max)}
}

func interharmonicTable(s *Survey) Table {
	t := Table{Key: "interharmonics", Title: "Interharmonic centred subgroups, rms over the whole recording", Columns: []Column{
		text("channel", "Channel"), number("order_below", "Above order", ""), number("rms", "Rms", "V or A"), number("pct", "Share", "% of fund.")}}
	for i := range s.Channels {
		c := &s.Channels[i]
		for _, h := range c.Interharmonics {
			if h.RMS.Known() {
				t.Rows = append(t.Rows, []Cell{word(c.Name), whole(h.OrderBelow), value(h.RMS), value(h.Pct)})
			}
		}
	}
	return t
}
