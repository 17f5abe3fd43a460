package fitness

import (
	"math"
	"sort"

	"wavetally/harmonics"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// An assessment gathers doubts about one recording.
type assessment struct {
	sheet  site.Sheet
	header wave.Header
	notes  []wave.Note
	sum    *harmonics.Summary
	dead   map[site.Role]bool
	doubts []Doubt
}

// Assess says what weakens the numbers of a recording, the gravest first. An empty list means that nothing was found,
// not that nothing is wrong.
func Assess(sheet site.Sheet, header wave.Header, notes []wave.Note, sum *harmonics.Summary) []Doubt {
	a := &assessment{sheet: sheet, header: header, notes: notes, sum: sum, dead: map[site.Role]bool{}}
	if !sum.Intervals {
		a.channels() // first: a dead channel explains much else
		a.sampling()
		a.frequency()
		a.wiring()
	}
	a.nominal()
	a.ratio()
	a.neutral()
	a.load()
	a.span()
	a.noise()
	a.tones()
	a.connection()
	sort.SliceStable(a.doubts, func(i, j int) bool { return grave(a.doubts[i].Weight) > grave(a.doubts[j].Weight) })
	return a.doubts
}

func grave(weight string) int {
	switch weight {
	case StopsVerdict:
		return 2
	case Caution:
		return 1
	}
	return 0
}

func (a *assessment) add(d Doubt) { a.doubts = append(a.doubts, d) }

// channel returns the summary and the facts of a role, or nil.
func (a *assessment) channel(r site.Role) (*harmonics.ChannelSummary, *harmonics.ChannelFacts) {
	for i := range a.sum.Channels {
		if a.sum.Channels[i].Role == r {
			if i < len(a.sum.Facts) {
				return &a.sum.Channels[i], &a.sum.Facts[i]
			}
			return &a.sum.Channels[i], nil
		}
	}
	return nil, nil
}

// has reports whether a doubt of the code was raised, on the channel or on any if it is "".
func (a *assessment) has(code string, r site.Role) bool {
	for _, d := range a.doubts {
		if d.Code == code && (r == "" || d.Channel == r) {
			return true
		}
	}
	return false
}

// strongest returns the highest fundamental among the channels that keep accepts.
func (a *assessment) strongest(keep func(site.Role) bool) float64 {
	var best float64
	for _, c := range a.sum.Channels {
		if keep(c.Role) && !math.IsNaN(c.Fundamental) {
			best = max(best, c.Fundamental)
		}
	}
	return best
}

func voltage(r site.Role) bool { return r.Voltage() && !r.Neutral() }
func current(r site.Role) bool { return r.Current() && !r.Neutral() }

// Apply turns the findings that a doubt stops into "not assessed", with the doubt's text as the reason. Values and limits
// stay, as information. A doubt without a channel stops all findings; light load and a wrong current hook-up stop those on
// currents only.
func Apply(findings []limits.Finding, doubts []Doubt) []limits.Finding {
	out := append([]limits.Finding(nil), findings...)
	for i := range out {
		f := &out[i]
		for _, d := range doubts {
			if d.Weight != StopsVerdict || !stops(d, f.Channel) || f.Result == limits.NotAssessed {
				continue
			}
			// A record too short for the statistic is "undecided" already, for that very reason.
			if d.Code == "short-record" && f.Result == limits.Undecided {
				continue
			}
			f.Result, f.Why = limits.NotAssessed, d.Text
		}
	}
	return out
}

func stops(d Doubt, r site.Role) bool {
	switch {
	case d.Channel != "":
		return d.Channel == r
	case d.Code == "light-load":
		return r.Current()
	}
	return true
}
