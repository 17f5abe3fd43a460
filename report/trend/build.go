package trend

import (
	"fmt"
	"math"
	"slices"
	"sort"
	"time"

	"wavetally/report"
	"wavetally/report/trend/stat"
)

// Rules of comparison (practice.md 3, our own choices where it leaves room).
const (
	alpha        = 0.05
	leastMonths  = 5    // the exact test cannot reach 5 % with four
	stepMonths   = 8    // from which an undated step is looked for
	eventMonths  = 3    // on either side of a dated event
	seasonMonths = 24   // from which months of the same name are compared
	dateMonths   = 8    // from which a date may be given
	solidShare   = 80.0 // % of valid intervals
	solidCount   = 958  // valid 10 min intervals: a week, less the 5 % that may be flagged
	materialPct  = 10.0 // % of the limit a year
	watchedShare = 0.5  // an order whose 95th percentile passes this share of its limit is followed too
	yearDays     = 365.2425
)

// followed are the orders that every report follows.
var followed = []int{1, 3, 5, 7, 9, 11, 13, 17, 19, 23, 25}

// Options of a trend.
type Options struct {
	Program report.Program
	MadeAt  time.Time
}

// Build compares the surveys of one site. It fails when there is none.
func Build(facts []*Facts, events []Event, opt Options) (*Report, error) {
	if len(facts) == 0 {
		return nil, fmt.Errorf("there is no survey to compare; add some with `wavetally logbook add`")
	}
	facts = slices.Clone(facts)
	sort.SliceStable(facts, func(i, j int) bool { return facts[i].Start.Before(facts[j].Start) })
	last := facts[len(facts)-1]
	r := &Report{Schema: Schema, Program: opt.Program, MadeAt: opt.MadeAt.UTC(), Site: last.Site, Zone: last.Zone, Events: events,
		Series: []Series{}, Breaks: []Break{}, Notes: notes()}
	if r.Events == nil {
		r.Events = []Event{}
	}
	months := group(facts)
	for i, m := range months {
		r.Months = append(r.Months, m.info())
		if i > 0 && m.config != months[i-1].config {
			r.Breaks = append(r.Breaks, Break{Month: m.name, What: m.facts[0].Config.Differs(months[i-1].facts[0].Config)})
		}
	}
	r.From, r.To = months[0].name, months[len(months)-1].name
	r.Series = seriesOf(months)
	for i := range r.Series {
		r.Series[i].test(events)
	}
	adjust(r.Series)
	for i := range r.Series {
		r.Series[i].conclude()
	}
	r.Answers = answers(r)
	return r, nil
}

// A month is the surveys of one month and one configuration.
type month struct {
	name   string
	config string
	facts  []*Facts
}

// group puts surveys into months by the middle of each, in the site's time zone. Where a configuration changes inside a
// month, the month stands twice.
func group(facts []*Facts) []month {
	var out []month
	for _, f := range facts {
		name := monthOf(f)
		id := f.Config.ID()
		if n := len(out); n > 0 && out[n-1].name == name && out[n-1].config == id {
			out[n-1].facts = append(out[n-1].facts, f)
			continue
		}
		out = append(out, month{name: name, config: id, facts: []*Facts{f}})
	}
	return out
}

func monthOf(f *Facts) string {
	zone, err := time.LoadLocation(f.Zone)
	if err != nil {
		zone = time.UTC
	}
	return f.Start.Add(time.Duration(f.Duration / 2 * 1e9)).In(zone).Format("2006-01")
}

func (m month) info() MonthInfo {
	out := MonthInfo{Month: m.name, Surveys: len(m.facts), Config: m.config}
	want, weekday := 0, 0
	for _, f := range m.facts {
		out.Valid += f.Coverage.Valid
		want += f.Coverage.Intervals
		weekday += f.Coverage.Weekday
	}
	out.Coverage = ratio(out.Valid, want)
	out.Weekday = ratio(weekday, out.Valid)
	out.Hollow = !(out.Coverage >= solidShare) || out.Valid < solidCount
	return out
}

func ratio(a, b int) report.Number {
	if b == 0 {
		return report.Number(math.NaN())
	}
	return report.Number(100 * float64(a) / float64(b))
}

// A key names a series.
type key struct {
	config, channel, quantity string
	order                     int
}

// seriesOf lines the months' values up.
func seriesOf(months []month) []Series {
	watch := watched(months)
	var order []key
	byKey := map[key]*Series{}
	for _, m := range months {
		info := m.info()
		for _, v := range m.values() {
			if v.Quantity == "harmonic" && !watch[v.Order] {
				continue
			}
			k := key{m.config, v.channel, v.Quantity, v.Order}
			s := byKey[k]
			if s == nil {
				s = &Series{Channel: v.channel, Quantity: v.Quantity, Order: v.Order, Unit: v.Unit, Config: m.config, Limit: report.Number(math.NaN()), Adjusted: report.Number(math.NaN())}
				byKey[k] = s
				order = append(order, k)
			}
			if v.Limit.Known() {
				s.Limit, s.RuleSet = v.Limit, v.RuleSet
			}
			s.Months = append(s.Months, Month{Month: m.name, N: v.n, Coverage: info.Coverage, P50: v.p50, P95: v.p95, P99: v.p99, Max: v.max,
				Load: v.load, SameLoad: report.Number(math.NaN()), Merged: v.merged, Hollow: info.Hollow})
		}
	}
	out := make([]Series, 0, len(order))
	for _, k := range order {
		s := byKey[k]
		s.equalLoad(months)
		out = append(out, *s)
	}
	return out
}

// watched are the orders to follow: the usual ones, and any that came near its limit.
func watched(months []month) map[int]bool {
	out := map[int]bool{}
	for _, h := range followed {
		out[h] = true
	}
	for _, m := range months {
		for _, f := range m.facts {
			for _, c := range f.Channels {
				for _, row := range c.Rows {
					if row.Quantity == "harmonic" && row.Limit.Known() && row.Stats.P95 > watchedShare*row.Limit {
						out[row.Order] = true
					}
				}
			}
		}
	}
	return out
}

// A value is one quantity of one channel over a month.
type value struct {
	Row
	channel            string
	n, merged          int
	p50, p95, p99, max report.Number
	load               report.Number
}

// values merges a month's surveys. Percentiles of parts do not add up to that of the whole: merged ones are means weighted
// by the number of intervals, the maximum is exact, and the number of surveys says that it was done.
func (m month) values() []value {
	var out []value
	at := map[string]int{}
	for _, f := range m.facts {
		for _, c := range f.Channels {
			for _, row := range c.rows() {
				id := fmt.Sprint(c.Name, row.Quantity, row.Order)
				load := f.loadOf(c.Name)
				i, seen := at[id]
				if !seen {
					at[id] = len(out)
					out = append(out, value{Row: row, channel: c.Name, n: row.Stats.N, merged: 1, p50: row.Stats.P50, p95: row.Stats.P95,
						p99: row.Stats.P99, max: row.Stats.Max, load: load})
					continue
				}
				v := &out[i]
				w := report.Number(float64(row.Stats.N) / float64(max(1, v.n+row.Stats.N)))
				v.p50 += w * (row.Stats.P50 - v.p50)
				v.p95 += w * (row.Stats.P95 - v.p95)
				v.p99 += w * (row.Stats.P99 - v.p99)
				v.load += w * (load - v.load)
				v.max = max(v.max, row.Stats.Max)
				v.n += row.Stats.N
				v.merged++
				if row.Limit.Known() {
					v.Limit, v.RuleSet = row.Limit, row.RuleSet
				}
			}
		}
	}
	return out
}

// rows are the channel's rows, and those of single values.
func (c ChannelFacts) rows() []Row {
	single := func(quantity, unit string, v report.Number) Row {
		nan := report.Number(math.NaN())
		return Row{Quantity: quantity, Unit: unit, Limit: nan, Stats: &report.LevelStats{N: 1, P50: v, P95: nan, P99: nan, Max: nan}}
	}
	rows := slices.Clone(c.Rows)
	if c.RMS.Known() {
		rows = append(rows, single("rms", c.Unit, c.RMS))
	}
	if c.K.Known() {
		rows = append(rows, single("k", "", c.K))
	}
	return rows
}

// loadOf is the 95th percentile of the current in the channel's own phase.
func (f *Facts) loadOf(channel string) report.Number {
	own := "I" + channel[1:]
	for _, c := range f.Channels {
		if c.Name != own && c.Name != channel {
			continue
		}
		for _, row := range c.Rows {
			if c.Quantity == "current" && row.Quantity == "harmonic" && row.Order == 1 {
				return row.Stats.P95
			}
		}
	}
	return report.Number(math.NaN())
}

// equalLoad fills in each month's level at equal load: the mean of its medians over the load bins that every solid month
// of the series has, weighted alike in all of them.
func (s *Series) equalLoad(months []month) {
	if s.Quantity != "harmonic" || s.Order < 2 {
		return
	}
	type bins map[report.Number]report.LoadBin // by lower edge
	per := map[string]bins{}
	weight := map[report.Number]float64{}
	shared := map[report.Number]int{}
	solid := 0
	for _, m := range months {
		if m.config != s.Config || m.info().Hollow {
			continue
		}
		b := bins{}
		for _, f := range m.facts {
			for _, c := range f.Channels {
				if c.Name != s.Channel {
					continue
				}
				for _, bin := range c.LoadBins {
					if old, twice := b[bin.Low]; !twice || bin.N > old.N {
						b[bin.Low] = bin
					}
				}
			}
		}
		if len(b) == 0 {
			return
		}
		solid++
		per[m.name] = b
		for low, bin := range b {
			if bin.N >= leastInBin {
				shared[low]++
				weight[low] += float64(bin.N)
			}
		}
	}
	var lows []report.Number
	for low, n := range shared {
		if n == solid {
			lows = append(lows, low)
		}
	}
	slices.Sort(lows) // sums in one order: the same bytes every time
	for i := range s.Months {
		b, ok := per[s.Months[i].Month]
		if !ok || len(lows) == 0 {
			continue
		}
		var sum, all float64
		for _, low := range lows {
			v := b[low].Medians[s.Order-1]
			sum += weight[low] * float64(v)
			all += weight[low]
		}
		s.Months[i].SameLoad = report.Number(sum / all)
	}
}

// leastInBin is how many 10 min intervals make a median in a load bin worth comparing.
const leastInBin = 12

func notes() []string {
	return []string{
		"Months are those of the middle of each survey, in the site's time zone. A month is solid when its surveys have 80 % valid intervals and at least a week of them (958 of 10 min); others are shown hollow and not tested.",
		"Tested are the solid months' 95th percentiles: Mann-Kendall (exact up to 14 months, ties included), Theil-Sen slope with a 95 % interval; from two years on only months of the same name are compared (seasonal Kendall). P-values are adjusted for the number of series (Benjamini and Hochberg) before anything is called rising or falling.",
		"A step is looked for before a trend, since a step fakes one: at each dated event with three solid months on either side (rank-sum test), and from eight months on wherever the values divide best (Pettitt). An undated step is apparent only.",
		"Currents are compared in ampere and as TDD, not as THD, which rises when the load falls. At equal load means: the mean of the medians in the load bins that all solid months have.",
		"Several surveys of one month are merged by the number of their intervals; percentiles do not merge exactly.",
		"A date for the limit is given as a range only, if the present rate continues, and only for a shown rise over eight solid months or more, without an unexplained step, and not further ahead than the months go back.",
		"A change of ratio, nominal value, method, rule set or demand current starts a new series.",
	}
}

// points are the solid months' values, with the time in years from the first month.
func (s *Series) points(of func(Month) report.Number) (at []float64, season []int, y []float64, index []int) {
	for i, m := range s.Months {
		v := of(m)
		if m.Hollow || !v.Known() {
			continue
		}
		t, err := time.Parse("2006-01", m.Month)
		if err != nil {
			continue
		}
		at = append(at, years(t))
		season = append(season, int(t.Month()))
		y = append(y, float64(v))
		index = append(index, i)
	}
	return
}

func years(t time.Time) float64 { return float64(t.Unix()) / 86400 / yearDays }

func p95(m Month) report.Number {
	if m.P95.Known() {
		return m.P95
	}
	return m.P50 // single values have no more
}

// test fills in what is worked out series by series.
func (s *Series) test(events []Event) {
	at, season, y, index := s.points(p95)
	if s.Quantity == "rms" || s.Quantity == "harmonic" && s.Order == 1 {
		s.Answer = "" // a load or a supply voltage, shown for comparison
		return
	}
	if len(y) < leastMonths {
		s.Answer = "too few months"
		return
	}
	s.steps(events, y, index)
	if s.Step != nil {
		y = slices.Clone(y)
		s.levelled(y, index)
	}
	k := stat.MannKendall(y)
	slope := stat.TheilSen(at, y, alpha)
	if s.Seasonal = len(y) >= seasonMonths; s.Seasonal {
		k = stat.SeasonalKendall(season, y)
		slope = stat.SeasonalSlope(at, season, y, alpha)
	}
	s.Kendall, s.Sen = kendallOf(k), senOf(slope, at[len(at)-1])
	if same, _, z, _ := s.points(func(m Month) report.Number { return m.SameLoad }); len(z) >= leastMonths && len(z) == len(y) && s.Step == nil {
		k := stat.MannKendall(z)
		s.SameLoad = &SameLoad{Kendall: *kendallOf(k), Sen: *senOf(stat.TheilSen(same, z, alpha), same[len(same)-1])}
	}
}

// levelled takes the step out of y.
func (s *Series) levelled(y []float64, index []int) {
	for j, i := range index {
		if s.Months[i].Month >= s.Step.Month {
			y[j] -= float64(s.Step.Change)
		}
	}
}

func kendallOf(k stat.Kendall) *Kendall {
	return &Kendall{S: k.S, Var: report.Number(k.Var), Z: report.Number(k.Z), P: report.Number(k.P), Exact: k.Exact}
}

func senOf(s stat.Slope, latest float64) *Sen {
	return &Sen{Slope: report.Number(s.PerT), Low: report.Number(s.Low), High: report.Number(s.High), Level: report.Number(s.Intercept + s.PerT*latest)}
}

// steps looks for steps: before and after each dated event, and one wherever it may be.
func (s *Series) steps(events []Event, y []float64, index []int) {
	for _, e := range events {
		first := len(index)
		for j, i := range index {
			if s.Months[i].Month > e.Date[:7] || s.Months[i].Month == e.Date[:7] && e.Date[8:] == "01" {
				first = j
				break
			}
		}
		// The month of the event itself is on neither side, unless it fell on its first day.
		before := first
		if before > 0 && s.Months[index[before-1]].Month == e.Date[:7] {
			before--
		}
		if before < eventMonths || len(y)-first < eventMonths {
			continue
		}
		st := stepOf(y[:before], y[first:], stat.RankSum(y[:before], y[first:]).P)
		st.Month, st.Dated, st.Event = s.Months[index[first]].Month, true, e.Text
		s.Steps = append(s.Steps, st)
		if float64(st.P) <= alpha && explains(y, first) && (s.Step == nil || st.P < s.Step.P) {
			s.Step = &st
		}
	}
	if s.Step != nil || len(y) < stepMonths {
		return
	}
	if p := stat.Pettitt(y); p.P <= alpha && explains(y, p.At) {
		st := stepOf(y[:p.At], y[p.At:], p.P)
		st.Month = s.Months[index[p.At]].Month
		s.Step = &st
	}
}

func stepOf(before, after []float64, p float64) Step {
	b, a := stat.Median(before), stat.Median(after)
	return Step{Before: report.Number(b), After: report.Number(a), Change: report.Number(a - b), P: report.Number(p)}
}

// explains reports whether a step at index at fits y better than a straight line does, by the mean of absolute
// distances: a steady rise divides well in the middle too.
func explains(y []float64, at int) bool {
	t := make([]float64, len(y))
	for i := range t {
		t[i] = float64(i)
	}
	line := stat.TheilSen(t, y, alpha)
	before, after := stat.Median(y[:at]), stat.Median(y[at:])
	var offLine, offStep float64
	for i, v := range y {
		offLine += math.Abs(v - line.Intercept - line.PerT*t[i])
		if i < at {
			offStep += math.Abs(v - before)
		} else {
			offStep += math.Abs(v - after)
		}
	}
	return offStep < 0.9*offLine
}

// adjust corrects the p-values of trends and steps for the number of series tested.
func adjust(series []Series) {
	p := make([]float64, len(series))
	steps := make([]float64, len(series))
	same := make([]float64, len(series))
	for i, s := range series {
		p[i], steps[i], same[i] = math.NaN(), math.NaN(), math.NaN()
		if s.Kendall != nil {
			p[i] = float64(s.Kendall.P)
		}
		if s.Step != nil {
			steps[i] = float64(s.Step.P)
		}
		if s.SameLoad != nil {
			same[i] = float64(s.SameLoad.Kendall.P)
		}
	}
	// A step's p is compared with those of all series that were looked at, found or not.
	for i := range steps {
		if math.IsNaN(steps[i]) && !math.IsNaN(p[i]) {
			steps[i] = 1
		}
	}
	p, steps, same = stat.FalseDiscovery(p), stat.FalseDiscovery(steps), stat.FalseDiscovery(same)
	for i := range series {
		s := &series[i]
		s.Adjusted = report.Number(p[i])
		if s.Step != nil {
			s.Step.Shown = steps[i] <= alpha
			if !s.Step.Shown && !s.Step.Dated {
				s.Step = nil
			}
		}
		if s.SameLoad != nil {
			s.SameLoad.Answer = direction(same[i], float64(s.SameLoad.Sen.Slope), float64(s.SameLoad.Sen.Low), float64(s.SameLoad.Sen.High))
		}
	}
}

func direction(p, slope, low, high float64) string {
	switch {
	case !(p <= alpha) || !(low > 0) && !(high < 0):
		return "no change shown"
	case slope > 0:
		return "rising"
	}
	return "falling"
}

// conclude gives the answer of a series, and the date of its limit.
func (s *Series) conclude() {
	if s.Kendall == nil {
		if s.Answer != "" {
			s.NoDate = "too few solid months"
		}
		return
	}
	s.Answer = direction(float64(s.Adjusted), float64(s.Sen.Slope), float64(s.Sen.Low), float64(s.Sen.High))
	if s.Limit.Known() {
		s.Material = math.Abs(float64(s.Sen.Slope)) > materialPct/100*float64(s.Limit)
	}
	s.NoDate = s.date()
}

// date works out when the limit is reached, or says why no date can be given.
func (s *Series) date() string {
	_, _, y, index := s.points(p95)
	switch {
	case !s.Limit.Known():
		return "no limit applies"
	case y[len(y)-1] >= float64(s.Limit):
		return "the latest month is over the limit already"
	case s.Answer != "rising":
		return "no rise is shown"
	case len(y) < dateMonths:
		return fmt.Sprintf("%d solid months are too few; %d are needed", len(y), dateMonths)
	case s.Step != nil && !s.Step.Dated:
		return "an unexplained step in " + s.Step.Month + " makes a line through all months misleading"
	}
	first, _ := time.Parse("2006-01", s.Months[index[0]].Month)
	last, _ := time.Parse("2006-01", s.Months[index[len(index)-1]].Month)
	horizon := years(last) - years(first)
	left := float64(s.Limit) - float64(s.Sen.Level)
	if left <= 0 {
		return "the line through the months is at the limit already"
	}
	soon, late := left/float64(s.Sen.High), left/float64(s.Sen.Low)
	if soon > horizon {
		return fmt.Sprintf("the limit is further ahead than the %d months of record can carry", len(y))
	}
	month := func(ahead float64) string {
		return last.Add(time.Duration(ahead * yearDays * 86400 * 1e9)).Format("2006-01")
	}
	s.Reaches = &Reaches{Earliest: month(soon)}
	if late <= horizon {
		s.Reaches.Latest = month(late)
	}
	return ""
}
