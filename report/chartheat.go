package report

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// heatColumns is the highest number of columns of a heat map: a page resolves no more, and a spreadsheet stays light.
const heatColumns = 200

// heatCharts show each order over time, the worst channel of a group, as share of the limit; where nothing limits a
// group, in per cent of the fundamental.
func heatCharts(s *Survey) []Chart {
	ivs, name := seriesOf(s.Summary)
	if len(ivs) < 2 {
		return nil
	}
	var out []Chart
	for _, g := range groups[:2] {
		if len(g.channels(s)) == 0 {
			continue
		}
		judged := s.judgedBy(g)
		if len(judged) == 0 {
			out = append(out, heatChart(s, g, "", ivs, name))
		}
		for _, set := range judged {
			out = append(out, heatChart(s, g, set, ivs, name))
		}
	}
	return out
}

func heatChart(s *Survey, g group, set string, ivs []harmonics.Interval, name string) Chart {
	c := Chart{Key: "heat-" + g.key, Kind: HeatMapChart, X: timeAxis(ivs), Y: Axis{Label: "harmonic order", Low: 1.5, High: harmonics.MaxOrder + 0.5}}
	grid := &Grid{Ys: orders(), Label: "share of the fundamental", Unit: "%", Log: true, Mark: math.NaN()}
	if set != "" {
		c.Key += "-" + set
		grid.Label, grid.Log, grid.Mark = "share of the limit of "+RuleTitle(set), false, 100
	}
	fold := (len(ivs) + heatColumns - 1) / heatColumns
	limit := s.orderLimits(g, set)
	top, order, at := 0.0, 0, 0.0
	for i := 0; i < len(ivs); i += fold {
		column := nans(harmonics.MaxOrder - 1)
		for _, iv := range ivs[i:min(i+fold, len(ivs))] {
			if !iv.Valid() {
				continue
			}
			for h := 2; h <= harmonics.MaxOrder; h++ {
				v := s.worstShare(g, iv, h, limit)
				column[h-2] = fmax(column[h-2], v)
				if v > top {
					top, order, at = v, h, iv.At
				}
			}
		}
		grid.Xs = append(grid.Xs, ivs[i].At)
		grid.Value = append(grid.Value, column)
	}
	grid.DX = float64(fold) * ivs[0].Span
	grid.High = math.Max(top, 1e-3)
	if grid.Log {
		grid.Low = math.Min(0.01, grid.High/10)
	} else {
		grid.High = math.Max(grid.High, 100)
	}
	c.Grid = grid
	c.Shades = shadesOf(ivs)
	c.Title = fmt.Sprintf("%s orders over time: highest %s %% of %s, order %d, %s", g.name, Sig(top), heatBasis(set), order, s.Recording.Clock(at))
	cell := "the highest channel in an interval of " + name
	if fold > 1 {
		cell = fmt.Sprintf("the highest channel and interval of %s within %s", name, Duration(grid.DX))
	}
	c.Caption = fmt.Sprintf("Each cell: %s. Blank: not valid, or no limit. %s.", cell, s.span(validCount(ivs), name))
	return c
}

func heatBasis(set string) string {
	if set == "" {
		return "the fundamental"
	}
	return "the limit of " + RuleTitle(set)
}

// An orderLimit is what brings a level to a share of its limit.
type orderLimit struct {
	pct   float64 // of basis
	basis float64 // in the channel's unit; NaN: the fundamental
}

// orderLimits are the limits of the statistic that a heat map is drawn against, by channel and order; nil where there
// is none, and values are then shares of the fundamental.
func (s *Survey) orderLimits(g group, set string) map[string]map[int]orderLimit {
	if set == "" {
		return nil
	}
	out := map[string]map[int]orderLimit{}
	statistic := s.tightest(g, set)
	for _, f := range s.Judged {
		if f.RuleSet != set || f.Statistic != statistic || f.Order == 0 || !g.member(f.Channel) || math.IsNaN(f.Limit) {
			continue
		}
		name := string(f.Channel)
		if out[name] == nil {
			out[name] = map[int]orderLimit{}
		}
		out[name][f.Order] = orderLimit{f.Limit, f.BasisSize}
	}
	return out
}

// worstShare is an order's value in one interval, as share of its limit or of its fundamental, on the group's worst
// channel; NaN when there is none.
func (s *Survey) worstShare(g group, iv harmonics.Interval, order int, limit map[string]map[int]orderLimit) float64 {
	worst := math.NaN()
	for i := range s.Summary.Channels {
		role := s.Summary.Channels[i].Role
		if !g.member(role) {
			continue
		}
		v := 100 * iv.Channels[i].H[order] / iv.Channels[i].H[1]
		if limit != nil {
			l, ok := limit[string(role)][order]
			if !ok {
				continue
			}
			if !math.IsNaN(l.basis) {
				v = 100 * iv.Channels[i].H[order] / l.basis
			}
			v *= 100 / l.pct
		}
		worst = fmax(worst, v)
	}
	return worst
}

// fmax is the larger of two numbers, and the one there is when the other is NaN.
func fmax(a, b float64) float64 {
	if math.IsNaN(a) || b > a {
		return b
	}
	return a
}

// Bounds of a spectrogram: enough to see what moves, no more than a page or a sheet bears.
const (
	spectrogramColumns = 120
	spectrogramOrder   = 25
)

// spectrogramCharts show the lines of about 5 Hz over time, for a short record: of the reference voltage and of the
// line current with the most distortion.
func spectrogramCharts(s *Survey) []Chart {
	g := s.Summary.Spectrogram
	if g == nil || len(g.Times) < 2 {
		return nil
	}
	var out []Chart
	for i := range s.Summary.Channels {
		role := s.Summary.Channels[i].Role
		if role == s.Summary.Reference || role == s.mostDistorted() {
			out = append(out, spectrogramChart(s, i))
		}
	}
	return out
}

func (s *Survey) mostDistorted() (role site.Role) {
	highest := 0.0
	for i := range s.Summary.Channels {
		c := &s.Summary.Channels[i]
		if groups[1].member(c.Role) && c.THDPct > highest {
			highest, role = c.THDPct, c.Role
		}
	}
	return role
}

func spectrogramChart(s *Survey, i int) Chart {
	sg, ch := s.Summary.Spectrogram, &s.Summary.Channels[i]
	fold := (len(sg.Times) + spectrogramColumns - 1) / spectrogramColumns
	step := sg.Times[1] - sg.Times[0]
	grid := &Grid{DX: step * float64(fold), Label: "share of the fundamental", Unit: "%", Low: 0.01, High: 10, Log: true, Mark: math.NaN()}
	lines := min(len(sg.Levels[i][0]), int(math.Round((spectrogramOrder+0.5)*s.Summary.Frequency.Mean/sg.LineHz)))
	for k := 1; k < lines; k++ {
		grid.Ys = append(grid.Ys, float64(k)*sg.LineHz)
	}
	for t := 0; t < len(sg.Times); t += fold {
		column := nans(lines - 1)
		for _, levels := range sg.Levels[i][t:min(t+fold, len(sg.Times))] {
			for k := 1; k < lines; k++ {
				column[k-1] = fmax(column[k-1], 100*levels[k]/ch.Fundamental)
			}
		}
		grid.Xs = append(grid.Xs, sg.Times[t])
		grid.Value = append(grid.Value, column)
	}
	end := sg.Times[len(sg.Times)-1] + step
	return Chart{
		Key: "spectrogram-" + string(ch.Role), Kind: SpectrogramChart, Grid: grid,
		Title: fmt.Sprintf("%s: lines of %s Hz over time, to order %d", ch.Role, Sig(sg.LineHz), spectrogramOrder),
		X:     Axis{Label: "time", Unit: "s", Low: sg.Times[0], High: end},
		Y:     Axis{Label: "frequency", Unit: "Hz", High: (spectrogramOrder + 0.5) * s.Summary.Frequency.Mean},
		Caption: fmt.Sprintf("Each cell: the highest of %d windows, in per cent of the fundamental of %s. Level lines at whole orders are harmonics; what lies "+
			"between them or moves is not. %s.", fold, Quantity(ch.Fundamental, ch.Unit), s.span(0, "")),
	}
}
