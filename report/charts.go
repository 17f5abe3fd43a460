package report

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// Charts lists the survey's charts in the order of the documents. A survey read back from JSON has only the
// spectrum charts: the series behind the others are not in the file.
func Charts(s *Survey) []Chart {
	var out []Chart
	out = append(out, spectrumCharts(s)...)
	if s.Summary == nil {
		return out
	}
	out = append(out, waveformCharts(s)...)
	out = append(out, trendCharts(s)...)
	out = append(out, heatCharts(s)...)
	out = append(out, spectrogramCharts(s)...)
	return append(out, phasorCharts(s)...)
}

// group is the channels of one kind, which share a chart.
type group struct {
	key, name string
	member    func(site.Role) bool
}

var groups = []group{
	{"V", "Voltage", func(r site.Role) bool { return r.Voltage() && !r.Neutral() }},
	{"I", "Current", func(r site.Role) bool { return r.Current() && !r.Neutral() }},
	{"N", "Neutral", site.Role.Neutral},
}

func (g group) holds(channel string) bool { return g.member(site.Role(channel)) }

func (g group) channels(s *Survey) []*Channel {
	var out []*Channel
	for i := range s.Channels {
		if g.member(site.Role(s.Channels[i].Name)) {
			out = append(out, &s.Channels[i])
		}
	}
	return out
}

// seriesOf returns the intervals that trends and heat maps are drawn from: of 10 min where there are two hours of
// them, else of 3 s.
func seriesOf(sum *harmonics.Summary) (ivs []harmonics.Interval, name string) {
	const enough = 12
	if len(sum.Tens) >= enough || len(sum.Threes) == 0 {
		return sum.Tens, "10 min"
	}
	return sum.Threes, "3 s"
}

// shadesOf marks the intervals that do not count, neighbours of the same reason as one.
func shadesOf(ivs []harmonics.Interval) []Shade {
	var out []Shade
	for _, iv := range ivs {
		if iv.Valid() {
			continue
		}
		why := reason(iv)
		if n := len(out); n > 0 && out[n-1].Why == why && out[n-1].To >= iv.At-0.01*iv.Span {
			out[n-1].To = iv.At + iv.Span
			continue
		}
		out = append(out, Shade{iv.At, iv.At + iv.Span, why})
	}
	return out
}

func reason(iv harmonics.Interval) string {
	names := iv.Flags.Strings()
	if len(names) == 0 {
		return "incomplete"
	}
	text := names[0]
	for _, n := range names[1:] {
		text += ", " + n
	}
	return text
}

// reach returns ends of an axis from 0 that hold the values with a little room; NaN are passed over.
func reach(values ...float64) float64 {
	top := 0.0
	for _, v := range values {
		if !math.IsNaN(v) && !math.IsInf(v, 0) {
			top = math.Max(top, v)
		}
	}
	if top == 0 {
		return 1
	}
	return 1.08 * top
}

// span says over what a chart is drawn, for its caption.
func (s *Survey) span(n int, interval string) string {
	over := Duration(float64(s.Recording.Duration))
	if s.Recording.Start != nil {
		over += " from " + s.Recording.Clock(0)
	}
	if n == 0 {
		return over
	}
	return fmt.Sprintf("%d valid intervals of %s within %s", n, interval, over)
}

func validCount(ivs []harmonics.Interval) int {
	n := 0
	for _, iv := range ivs {
		if iv.Valid() {
			n++
		}
	}
	return n
}
