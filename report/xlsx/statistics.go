package xlsx

import (
	"time"

	"wavetally/harmonics"
	"wavetally/report"
)

// statisticsSheet is what was measured on each channel: over the recording, by intervals, by days.
func (b *book) statisticsSheet(s *sheet) {
	s.tight = true
	s.title("Statistics")
	s.gap()
	s.tables("channels")
	if t := b.totalsTable(); len(t.Rows) > 0 {
		s.gap()
		s.table(t)
	}
	s.gap()
	s.tables("days")
	s.freeze(1, 1, 0)
	s.repeat = 0
}

// totalsTable are the statistics of THD and TDD, with every bound a number.
func (b *book) totalsTable() report.Table {
	t := report.Table{Key: "totals", Title: "Totals: statistics over valid intervals", Columns: []report.Column{{Key: "channel", Head: "Channel"}, {Key: "quantity", Head: "Quantity"}, {Key: "interval", Head: "Interval"},
		numeric("n", "Values", ""), numeric("p50", "P50", "%"), numeric("p95", "P95", "%"), numeric("low", "P95 at least", "%"), numeric("high", "P95 at most", "%"), numeric("p99", "P99", "%"),
		numeric("max", "Highest", "%"), {Key: "at", Head: "Highest at (UTC)"}},
		Notes: []string{"P95 at least and at most: 95 % confidence of the percentile, from order statistics, taking intervals as independent; the uncertainty of sensors is not in them.",
			"THD in per cent of the fundamental, TDD in per cent of the demand current as surveyed; orders 2 to 50, interharmonics not counted."}}
	for _, c := range b.survey.Channels {
		for _, set := range []struct {
			quantity, interval string
			stats              *report.IntervalStats
		}{{"THD", "10 min", c.THD.Minutes}, {"THD", "3 s", c.THD.Seconds}, {"TDD", "10 min", tddOf(c).Minutes}, {"TDD", "3 s", tddOf(c).Seconds}} {
			if q := set.stats; q != nil {
				t.Rows = append(t.Rows, []report.Cell{{Text: c.Name}, {Text: set.quantity}, {Text: set.interval}, figure(float64(q.N)), figure(float64(q.P50)), figure(float64(q.P95)),
					figure(float64(q.P95Low)), figure(float64(q.P95High)), figure(float64(q.P99)), figure(float64(q.Max)), b.highestAt(c.Name, set.quantity, set.interval)})
			}
		}
	}
	return t
}

func tddOf(c report.Channel) report.Stats {
	if c.TDD == nil {
		return report.Stats{}
	}
	return *c.TDD
}

// highestAt is when a total was highest.
func (b *book) highestAt(channel, quantity, interval string) report.Cell {
	sum := b.survey.Summary
	if sum == nil {
		return report.Cell{}
	}
	for i := range sum.Channels {
		c := &sum.Channels[i]
		if string(c.Role) != channel {
			continue
		}
		at := map[string]harmonics.Stats{"THD10 min": c.THD10m, "THD3 s": c.THD3s, "TDD10 min": c.THC10m, "TDD3 s": c.THC3s}[quantity+interval].MaxAt
		out := report.Cell{Text: b.survey.Recording.Clock(at)}
		if start := b.survey.Recording.Start; start != nil {
			out.Time = start.Add(time.Duration(at * float64(time.Second)))
		}
		return out
	}
	return report.Cell{}
}
