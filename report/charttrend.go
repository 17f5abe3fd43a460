package report

import (
	"fmt"
	"math"

	"wavetally/harmonics"
)

// trendCharts show totals over the recording against their limits, with the load beneath.
func trendCharts(s *Survey) []Chart {
	ivs, name := seriesOf(s.Summary)
	if len(ivs) < 2 {
		return nil
	}
	var out []Chart
	add := func(c Chart, ok bool) {
		if ok {
			c.Shades = shadesOf(ivs)
			c.Caption += s.span(validCount(ivs), name) + "."
			out = append(out, c)
		}
	}
	add(totalTrend(s, ivs, "thd-V", "thd", groups[0]))
	if s.Site.Supply.DemandCurrent > 0 {
		add(totalTrend(s, ivs, "tdd-I", "tdd", groups[1]))
	} else {
		add(totalTrend(s, ivs, "thd-I", "thd", groups[1]))
	}
	add(loadTrend(s, ivs))
	return out
}

// totalTrend draws THD or TDD of a group's channels.
func totalTrend(s *Survey, ivs []harmonics.Interval, key, quantity string, g group) (Chart, bool) {
	c := Chart{Key: "trend-" + key, Kind: TrendChart, X: timeAxis(ivs), Y: Axis{Label: QuantityName(quantity, 0), Unit: "%"}}
	var valid []float64
	highest, where, at := math.Inf(-1), "", 0.0
	for i := range s.Summary.Channels {
		ch := &s.Summary.Channels[i]
		if !g.member(ch.Role) {
			continue
		}
		line := Series{Name: string(ch.Role), Role: ch.Role, Use: Measured, Unit: "%"}
		for _, iv := range ivs {
			v := total(iv.Channels[i], quantity, s.Site.Supply.DemandCurrent)
			if iv.Windows == 0 {
				v = math.NaN()
			}
			line.X, line.Y = append(line.X, iv.At), append(line.Y, v)
			if !iv.Valid() {
				continue
			}
			valid = append(valid, v)
			if v > highest {
				highest, where, at = v, string(ch.Role), iv.At
			}
		}
		c.Series = append(c.Series, line)
	}
	if len(valid) == 0 {
		return c, false
	}
	c.Limits = s.totalLimits(g, quantity)
	for _, l := range c.Limits {
		valid = append(valid, l.Y...)
	}
	c.Y.High = reach(valid...)
	c.Title = fmt.Sprintf("%s %s over time: highest %s %% on %s, %s", g.name, QuantityName(quantity, 0), Sig(highest), where, s.Recording.Clock(at))
	c.Caption = "Orders 2 to 50; interharmonics not counted. Shaded: left out of statistics. "
	return c, true
}

func total(l harmonics.Levels, quantity string, demand float64) float64 {
	if quantity == "tdd" {
		return 100 * l.THC / demand
	}
	return 100 * l.THC / l.H[1]
}

// totalLimits are the limits of a total, one for each rule set: of its longest statistic, which is the strictest.
func (s *Survey) totalLimits(g group, quantity string) []LimitLine {
	strictest := map[string]*Finding{}
	var names []string
	for i := range s.Findings {
		f := &s.Findings[i]
		if f.Order != 0 || f.Quantity != quantity || !g.holds(f.Channel) || !f.Limit.Known() {
			continue
		}
		old := strictest[f.RuleSet]
		if old == nil {
			names = append(names, f.RuleSet)
		}
		if old == nil || f.Limit < old.Limit {
			strictest[f.RuleSet] = f
		}
	}
	var out []LimitLine
	for _, n := range names {
		f := strictest[n]
		out = append(out, LimitLine{Name: fmt.Sprintf("%s: %s %% (%s)", RuleTitle(n), Sig(float64(f.Limit)), f.Statistic), Y: []float64{float64(f.Limit)}})
	}
	return out
}

// loadTrend is the load strip under the trends: the fundamental of each line current.
func loadTrend(s *Survey, ivs []harmonics.Interval) (Chart, bool) {
	c := Chart{Key: "trend-load", Kind: TrendChart, X: timeAxis(ivs), Y: Axis{Label: "fundamental current", Unit: "A"}}
	var valid []float64
	for i := range s.Summary.Channels {
		ch := &s.Summary.Channels[i]
		if !groups[1].member(ch.Role) {
			continue
		}
		line := Series{Name: string(ch.Role), Role: ch.Role, Use: Other, Unit: "A"}
		for _, iv := range ivs {
			v := iv.Channels[i].H[1]
			if iv.Windows == 0 {
				v = math.NaN()
			}
			line.X, line.Y = append(line.X, iv.At), append(line.Y, v)
			if iv.Valid() {
				valid = append(valid, v)
			}
		}
		c.Series = append(c.Series, line)
	}
	if len(valid) == 0 {
		return c, false
	}
	low, high := ends(valid)
	if il := s.Site.Supply.DemandCurrent; il > 0 {
		c.Limits = []LimitLine{{Name: "demand current " + Quantity(il, "A"), Y: []float64{il}}}
		valid = append(valid, il)
	}
	c.Y.High = reach(valid...)
	c.Title = fmt.Sprintf("Load: fundamental current between %s and %s", Quantity(low, "A"), Quantity(high, "A"))
	return c, true
}

func ends(v []float64) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for _, x := range v {
		low, high = math.Min(low, x), math.Max(high, x)
	}
	return low, high
}

func timeAxis(ivs []harmonics.Interval) Axis {
	last := ivs[len(ivs)-1]
	return Axis{Label: "time", Unit: "s", Low: ivs[0].At, High: last.At + last.Span, Clock: true}
}
