package limits

import (
	"fmt"
	"math"
	"slices"

	"wavetally/harmonics"
)

// A reading is a statistic of a quantity as the recording gives it.
type reading struct {
	value, level float64 // in per cent of the basis, and in the channel's unit; NaN where there is none
	n            int     // intervals behind value
	sampleLow    float64 // confidence bounds of the percentile, in per cent
	sampleHigh   float64
	sorted       ranked // the values behind it, where they are held
	from, to     float64

	indicative string   // why value is not what the rule asks for, "" where it is
	warnings   []string // that stand beside the verdict
}

// A reader reads quantities off one summary.
type reader struct {
	sum    *harmonics.Summary
	cut    map[float64][]period
	bounds map[boundsKey][2]int
}

type boundsKey struct {
	n int
	p float64
}

func newReader(sum *harmonics.Summary) *reader {
	return &reader{sum: sum, cut: map[float64][]period{}, bounds: map[boundsKey][2]int{}}
}

var periodLengths = map[string]float64{day: 86400, week: 7 * 86400}

// read returns the statistic, or the nearest that the recording gives.
func (r *reader) read(s Statistic, q quantity) reading {
	if s.Interval == threeSeconds {
		return r.threes(s, q)
	}
	return r.tens(s, q)
}

// tens reads a percentile of 10 min values: that of the worst whole period, else of what there is.
func (r *reader) tens(s Statistic, q quantity) reading {
	best := reading{value: math.NaN()}
	weak, most, want := 0, 0, 0
	for _, p := range r.periods(periodLengths[s.Period]) {
		got := r.percentile(s, q, p.first, p.last)
		most, want = max(most, got.n), p.want
		switch {
		case p.share(got.n) < weakShare:
			weak++
		case !(got.value <= best.value):
			best, best.from, best.to = got, p.from, p.to
			best.warnings = coverage(s.Period, got.n, p)
		}
	}
	if math.IsNaN(best.value) {
		return r.partial(s, q, r.lacking(s, most, want))
	}
	if weak > 0 {
		best.warnings = append(best.warnings, fmt.Sprintf("%d other %s%s with less than %g %% valid intervals did not count", weak, s.Period, plural(weak), 100*weakShare))
	}
	return best
}

func plural(n int) string {
	if n == 1 {
		return ""
	}
	return "s"
}

// coverage warns of a period that lacks intervals.
func coverage(name string, n int, p period) []string {
	if p.share(n) >= firmShare {
		return nil
	}
	return []string{fmt.Sprintf("only %d of the %s's %d intervals of 10 min are valid (%s %%)", n, name, p.want, sig(100*p.share(n), 3))}
}

func (r *reader) periods(length float64) []period {
	p, done := r.cut[length]
	if !done {
		p = periods(r.sum.Tens, length)
		r.cut[length] = p
	}
	return p
}

// percentile is that of the valid 10 min intervals first to last-1.
func (r *reader) percentile(s Statistic, q quantity, first, last int) reading {
	values := make([]float64, last-first)
	for i := range values {
		values[i] = math.NaN()
		if v := &r.sum.Tens[first+i]; v.Valid() {
			values[i] = q.pct(&v.Channels[q.channel])
		}
	}
	sorted := rank(values)
	n := len(sorted)
	out := reading{value: sorted.at(harmonics.NearestRank(n, s.Percentile)), level: math.NaN(), n: n, sorted: sorted}
	if i := slices.Index(values, out.value); i >= 0 {
		out.level = q.level(&r.sum.Tens[first+i].Channels[q.channel])
	}
	low, high := r.confidence(n, s.Percentile)
	out.sampleLow, out.sampleHigh = sorted.at(low), sorted.at(high)
	return out
}

func (r *reader) confidence(n int, p float64) (low, high int) {
	k := boundsKey{n, p}
	b, done := r.bounds[k]
	if !done {
		b[0], b[1] = harmonics.PercentileRanks(n, p)
		r.bounds[k] = b
	}
	return b[0], b[1]
}

// partial is the nearest to a percentile of 10 min values over a whole period that the recording gives.
func (r *reader) partial(s Statistic, q quantity, why string) reading {
	if got := r.percentile(s, q, 0, len(r.sum.Tens)); got.n > 0 {
		got.indicative = fmt.Sprintf("%s; the value is the %s of its %d valid 10 min value%s", why, percentileName(s.Percentile), got.n, plural(got.n))
		got.from, got.to = 0, r.sum.Duration
		return got
	}
	return r.fromThrees(s, q, why)
}

// lacking says why there is no whole period; most is how many of the want intervals of a period are valid at best.
func (r *reader) lacking(s Statistic, most, want int) string {
	switch {
	case want > 0:
		return fmt.Sprintf("only %d of a %s's %d intervals of 10 min are valid (%s %%, at least %g %% are needed)",
			most, s.Period, want, sig(100*float64(most)/float64(want), 3), 100*weakShare)
	case len(r.sum.Tens) == 0 && r.sum.Duration >= periodLengths[s.Period]:
		return "the record holds no 10 min values"
	}
	return r.tooShort(s)
}

func (r *reader) tooShort(s Statistic) string {
	return fmt.Sprintf("the record spans %s and the rule asks for a %s", length(r.sum.Duration), s.Period)
}

// fromThrees takes the percentile of the 3 s values of the whole recording, else the rms over it.
func (r *reader) fromThrees(s Statistic, q quantity, why string) reading {
	ch := &r.sum.Channels[q.channel]
	out := reading{value: math.NaN(), level: math.NaN(), sampleLow: math.NaN(), sampleHigh: math.NaN(), from: 0, to: r.sum.Duration}
	st, ok := q.stats(ch)
	if !ok {
		out.value, out.level = q.whole(ch)
		out.indicative = why + "; the value is the rms over the whole record"
		if r.sum.LinesOnly {
			out.indicative = why + "; the value is the spectral line over the whole cycles of a record shorter than one window"
		}
		return out
	}
	name := "maximum"
	out.value, out.n = st.Max, st.N
	switch {
	case s.Percentile <= 95:
		name, out.value = percentileName(95), st.P95
		out.sampleLow, out.sampleHigh = st.P95Low, st.P95High
	case s.Percentile <= 99:
		name, out.value = percentileName(99), st.P99
	}
	if q.basis != basisFundamental {
		out.level = out.value * q.size / 100
	}
	out.indicative = fmt.Sprintf("%s; the value is the %s of its %d 3 s value%s", why, name, st.N, plural(st.N))
	if q.order == 0 && q.top != topOrder {
		out.indicative += fmt.Sprintf(", over orders 2 to %d", topOrder)
	}
	return out
}

// threes reads the 99th percentile of a day's 3 s values: that of the worst day that is whole enough.
func (r *reader) threes(s Statistic, q quantity) reading {
	best := reading{value: math.NaN()}
	incomplete := math.NaN()
	for i := range r.sum.Days {
		d := &r.sum.Days[i]
		pct, level := q.daily(&d.Channels[q.channel])
		share := float64(d.N) / float64(d.Want)
		switch {
		case math.IsNaN(pct):
		case share < weakShare:
			if !(pct <= incomplete) {
				incomplete = pct
			}
		case !(pct <= best.value):
			best = reading{value: pct, level: level, n: d.N, sampleLow: math.NaN(), sampleHigh: math.NaN(), from: d.At, to: d.At + 86400}
			if share < firmShare {
				best.warnings = []string{fmt.Sprintf("only %d of the day's %d values of 3 s are valid (%s %%)", d.N, d.Want, sig(100*share, 3))}
			}
		}
	}
	if math.IsNaN(best.value) {
		return r.noDay(s, q)
	}
	if incomplete > best.value {
		best.warnings = append(best.warnings, fmt.Sprintf("a day with less than %g %% valid values, which does not count, reads higher: %s %%", 100*weakShare, sig(incomplete, 3)))
	}
	return best
}

func (r *reader) noDay(s Statistic, q quantity) reading {
	if _, any3s := q.stats(&r.sum.Channels[q.channel]); !any3s && r.sum.Intervals {
		return reading{value: math.NaN(), level: math.NaN(), sampleLow: math.NaN(), sampleHigh: math.NaN(),
			indicative: "the interval log holds no 3 s values, and they cannot be derived from longer ones; a recorder set to 3 s, or the waveform, would settle it"}
	}
	why := r.tooShort(s)
	if len(r.sum.Days) > 0 && r.sum.Duration >= periodLengths[day] {
		why = fmt.Sprintf("no day has %g %% of its %d values of 3 s valid", 100*weakShare, r.sum.Days[0].Want)
	}
	return r.fromThrees(s, q, why)
}
