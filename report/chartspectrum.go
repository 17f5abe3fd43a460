package report

import (
	"fmt"
	"math"
	"slices"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// spectrumCharts are bars over orders 2 to 50: for each rule set the values it judges against its limits, and for
// channels that nothing judges their share of the fundamental.
func spectrumCharts(s *Survey) []Chart {
	var out []Chart
	for _, g := range groups {
		channels := g.channels(s)
		if len(channels) == 0 {
			continue
		}
		judged := s.judgedBy(g)
		for _, set := range judged {
			out = append(out, judgedSpectrum(s, g, set))
		}
		if len(judged) == 0 {
			out = append(out, plainSpectrum(s, g, channels))
		}
	}
	return out
}

// judgedBy lists the rule sets that have a number and a limit for a single order of the group.
func (s *Survey) judgedBy(g group) []string {
	var out []string
	for _, f := range s.Findings {
		if f.Order > 0 && f.Value.Known() && f.Limit.Known() && g.holds(f.Channel) && !slices.Contains(out, f.RuleSet) {
			out = append(out, f.RuleSet)
		}
	}
	return out
}

// tightest returns the statistic that leaves a rule set the least room in the group, which is the one to draw.
func (s *Survey) tightest(g group, set string) string {
	worst, statistic := math.Inf(-1), ""
	for _, f := range s.Findings {
		if f.RuleSet == set && g.holds(f.Channel) && f.Order > 0 && float64(f.Share) > worst {
			worst, statistic = float64(f.Share), f.Statistic
		}
	}
	return statistic
}

func judgedSpectrum(s *Survey, g group, set string) Chart {
	statistic := s.tightest(g, set)
	c := Chart{Key: "spectrum-" + g.key + "-" + set, Kind: SpectrumChart,
		X: Axis{Label: "harmonic order", Low: 1, High: harmonics.MaxOrder + 1}}
	limit := LimitLine{Name: "limit of " + RuleTitle(set), X: orders(), Y: nans(harmonics.MaxOrder - 1)}
	var worst *Finding
	var whiskers []Series
	indicative := false
	for _, ch := range g.channels(s) {
		bars := Series{Name: ch.Name, Role: site.Role(ch.Name), Use: Measured, Unit: "%", X: orders(), Y: nans(harmonics.MaxOrder - 1)}
		high := Series{Name: ch.Name + " highest", Role: site.Role(ch.Name), Use: Highest, Unit: "%", X: orders(), Y: nans(harmonics.MaxOrder - 1)}
		for i := range s.Findings {
			f := &s.Findings[i]
			if f.RuleSet != set || f.Statistic != statistic || f.Channel != ch.Name || f.Order < 2 || f.Order > harmonics.MaxOrder {
				continue
			}
			k := f.Order - 2
			bars.Y[k] = float64(f.Value)
			if math.IsNaN(limit.Y[k]) || float64(f.Limit) < limit.Y[k] {
				limit.Y[k] = float64(f.Limit)
			}
			high.Y[k] = s.highestOf(i)
			indicative = indicative || f.Indicative
			if worst == nil || float64(f.Share) > float64(worst.Share) || !worst.Share.Known() {
				worst = f
			}
		}
		c.Series = append(c.Series, bars)
		whiskers = append(whiskers, high)
	}
	c.Series = append(c.Series, whiskers...)
	c.Limits = []LimitLine{limit}
	c.Title = fmt.Sprintf("%s harmonics against %s: order %d on %s is %s %% of its limit", g.name, RuleTitle(set), worst.Order, worst.Channel, Sig(float64(worst.Share)))
	basis := worst.Basis
	c.Y = Axis{Label: "share of " + basisName(basis), Unit: "%", High: reach(allY(c)...)}
	bars := "the " + statistic
	if indicative {
		bars = "the nearest the record gives to the " + statistic + ", indicative only"
	}
	if worst.N > 0 {
		bars += fmt.Sprintf(", from %d values", worst.N)
	}
	c.Caption = fmt.Sprintf("Bars: %s. Thin lines: the highest value. Per cent of the %s. %s.", bars, basis, s.span(0, ""))
	return c
}

// highestOf is the highest interval value of the order behind finding i, in the finding's unit; NaN where the series
// is not at hand.
func (s *Survey) highestOf(i int) float64 {
	if s.Summary == nil || i >= len(s.Judged) {
		return math.NaN()
	}
	f := s.Judged[i]
	ch := s.Summary.Channel(f.Channel)
	if ch == nil || f.Order < 1 {
		return math.NaN()
	}
	level, share := ch.H(f.Order).Level10m, ch.H(f.Order).Share10m
	if level.N == 0 {
		level, share = ch.H(f.Order).Level3s, ch.H(f.Order).Share3s
	}
	switch {
	case level.N == 0:
		return math.NaN()
	case math.IsNaN(f.BasisSize):
		return share.Max
	}
	return 100 * level.Max / f.BasisSize
}

// plainSpectrum shows a group that nothing judges: each channel's orders in per cent of its own fundamental; in
// amperes for a neutral, whose fundamental may be next to nothing.
func plainSpectrum(s *Survey, g group, channels []*Channel) Chart {
	c := Chart{Key: "spectrum-" + g.key, Kind: SpectrumChart, X: Axis{Label: "harmonic order", Low: 1, High: harmonics.MaxOrder + 1}}
	unit, label := "%", "share of the channel's fundamental"
	if g.key == "N" {
		unit, label = channels[0].Unit, "rms"
	}
	largest, where, order := 0.0, "", 0
	for _, ch := range channels {
		bars := Series{Name: ch.Name, Role: site.Role(ch.Name), Use: Measured, Unit: unit, X: orders(), Y: nans(harmonics.MaxOrder - 1)}
		for _, h := range ch.Harmonics {
			if h.Order < 2 {
				continue
			}
			v := float64(h.Pct)
			if unit != "%" {
				v = float64(h.RMS)
			}
			bars.Y[h.Order-2] = v
			if v > largest {
				largest, where, order = v, ch.Name, h.Order
			}
		}
		c.Series = append(c.Series, bars)
	}
	c.Y = Axis{Label: label, Unit: unit, High: reach(allY(c)...)}
	c.Title = fmt.Sprintf("%s harmonics: the largest is order %d on %s, %s", g.name, order, where, Quantity(largest, unit))
	c.Caption = "Rms over the whole recording; no limit is applied. " + s.span(0, "") + "."
	return c
}

func orders() []float64 {
	out := make([]float64, harmonics.MaxOrder-1)
	for i := range out {
		out[i] = float64(i + 2)
	}
	return out
}

func nans(n int) []float64 {
	out := make([]float64, n)
	for i := range out {
		out[i] = math.NaN()
	}
	return out
}

func allY(c Chart) []float64 {
	var out []float64
	for _, s := range c.Series {
		out = append(out, s.Y...)
	}
	for _, l := range c.Limits {
		out = append(out, l.Y...)
	}
	return out
}

// basisName drops the number from a basis: "demand current 410 A" is a demand current.
func basisName(basis string) string {
	for i, r := range basis {
		if r >= '0' && r <= '9' {
			return basis[:max(0, i-1)]
		}
	}
	return basis
}
