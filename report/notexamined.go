package report

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
)

// notExaminedOf lists what this survey does not answer, so that silence is not taken for approval.
func notExaminedOf(s *Survey) []string {
	out := missedFindings(s)
	for _, g := range groups[:2] {
		if len(g.channels(s)) == 0 {
			out = append(out, strings.ToLower(g.name)+" (not recorded)")
		}
	}
	if s.Site.Supply.Connection == site.Wye4 && s.Neutral == nil && !s.has("IN") {
		out = append(out, "neutral current (neither recorded nor to be had from three phase currents)")
	}
	if lineToLineOnly(s) {
		out = append(out, "line-to-neutral voltages (only line-to-line ones were recorded, in which balanced orders 3, 9, 15 … do not show)")
	}
	if text := ordersMissed(s); text != "" {
		out = append(out, text)
	}
	if s.Recording.Kind == "intervals" {
		out = append(out, "waveforms, angles and values shorter than the recorder's intervals")
	}
	return append(out, "flicker, rapid voltage changes, transients, interharmonic limits and emission above order 50",
		"causes: a record at one point does not show where harmonics come from")
}

// missedFindings sums up the findings that were not assessed, by rule set and reason.
func missedFindings(s *Survey) []string {
	var g grouping
	for _, f := range s.Findings {
		if f.Result == limits.NotAssessed {
			g.add(f, firstClause(f.Why))
		}
	}
	out := []string{}
	for _, r := range g.rows {
		out = append(out, fmt.Sprintf("%s of %s on %s: %s", plural(r.n, "finding"), RuleTitle(r.set), list(r.channels), r.why))
	}
	return out
}

func (s *Survey) has(channel string) bool {
	return slices.ContainsFunc(s.Channels, func(c Channel) bool { return c.Name == channel })
}

func lineToLineOnly(s *Survey) bool {
	v := groups[0].channels(s)
	return len(v) > 0 && !slices.ContainsFunc(v, func(c *Channel) bool { return !site.Role(c.Name).LineToLine() })
}

// ordersMissed names the orders that the sampling rate does not reach.
func ordersMissed(s *Survey) string {
	if s.Summary == nil {
		return ""
	}
	top := harmonics.MaxOrder
	for i := range s.Summary.Channels {
		top = min(top, s.Summary.Channels[i].TopOrder)
	}
	if top >= harmonics.MaxOrder {
		return ""
	}
	return fmt.Sprintf("orders above %d (a sampling rate of %s does not reach them)", top, Quantity(s.Summary.Rate, "Hz"))
}

func sorted(findings []Finding) []Finding {
	out := slices.Clone(findings)
	slices.SortStableFunc(out, byShare)
	return out
}
