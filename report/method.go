package report

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics"
	"wavetally/harmonics/limits"
)

// A MethodItem says how one thing was done, and which clause of which document says so.
type MethodItem struct {
	Topic  string `json:"topic"`
	Text   string `json:"text"`
	Source string `json:"source"`
}

// MethodNote stands under the method: what it rests on.
const MethodNote = "Clause numbers are those of the named editions, given from memory: check them against the purchased text. " +
	"No type approval of a measuring instrument is claimed: sensors, input and clock of the recorder are not part of this program."

// Documents the method follows.
const (
	iec47  = "IEC 61000-4-7:2002+A1:2008"
	iec430 = "IEC 61000-4-30:2015"
	i1459  = "IEEE 1459-2010"
	own    = "this program's own method"
)

// methodOf states what was done to get from the recording to the findings.
func methodOf(s *Survey) []MethodItem {
	var out []MethodItem
	if s.Recording.Kind == "intervals" {
		out = append(out, intervalMethod(s)...)
	} else {
		out = append(out, windowMethod(s)...)
	}
	out = append(out, basisMethod(s)...)
	out = append(out, statisticsMethod(s)...)
	out = append(out, surenessMethod(s)...)
	out = append(out, plantMethod(s)...)
	return append(out, limitsMethod(s)...)
}

func windowMethod(s *Survey) []MethodItem {
	w := s.Recording.Windows.Cycles
	hz := float64(s.Recording.Frequency.Mean)
	reference := "the reference channel"
	if s.Summary != nil {
		reference = string(s.Summary.Reference)
	}
	out := []MethodItem{{"Window", fmt.Sprintf("%d cycles of the fundamental, %s here, rectangular, neither gap nor overlap, begun anew at every "+
		"10 min mark of UTC when the start time is known.", w, Duration(float64(w)/hz)), iec47 + ", 4.4.1; " + iec430 + ", 4.5"}}
	lines := MethodItem{"Grouping", "Harmonic subgroup: the line of the order and the two beside it, root of the sum of squares. Interharmonics: " +
		"the centred subgroup between two orders.", iec47 + ", 5.5.1 and annex A; " + iec430 + ", 5.8 and 5.9"}
	if s.Summary != nil && s.Summary.LinesOnly {
		out[0].Text = fmt.Sprintf("The capture is shorter than the standard's window: one window of the %s it holds, rectangular.", plural(w, "whole cycle"))
		out[0].Source = own + "; the standard's window (" + iec47 + ", 4.4.1) needs 10 cycles at 50 Hz, 12 at 60 Hz"
		lines.Text, lines.Source = "None: each order is its single line, for there are no lines beside it to group.", own+"; "+iec47+", 5.5.1 could not be applied"
	}
	return append(out,
		MethodItem{"Synchronisation", fmt.Sprintf("The fundamental is tracked on %s. Each window is brought onto a whole number of points a cycle by band-limited "+
			"interpolation; nothing is padded with zeros, and no block has a length fixed in samples.", reference), iec47 + ", 4.4.1; interpolation: " + own},
		lines,
		MethodItem{"Order range", orderRange(s), iec430 + ", 5.8"},
		MethodItem{"Direct component", "Reported apart, with its sign; in no distortion figure.", iec47 + ", 3.2"},
	)
}

func orderRange(s *Survey) string {
	text := fmt.Sprintf("Orders 1 to %d", harmonics.MaxOrder)
	if missed := ordersMissed(s); missed != "" {
		text += "; not measured: " + missed
	}
	if s.Recording.Kind == "intervals" {
		return text + "."
	}
	return text + ". Interharmonics up to the same order."
}

// intervalMethod is for a recorder's interval log, whose windows and grouping were the recorder's.
func intervalMethod(s *Survey) []MethodItem {
	return []MethodItem{
		{"Window and grouping", "The values are those of the recorder's interval log. Its window, grouping and synchronisation are the recorder's and not known here.",
			"to be stated from the recorder's papers; " + iec47 + ", 4.4.1 and 5.5.1"},
		{"Order range", orderRange(s), iec430 + ", 5.8"},
	}
}

func basisMethod(s *Survey) []MethodItem {
	out := []MethodItem{
		{"Per cent of what", "Spectra and THD: of the channel's own fundamental (not of its rms). Findings: of what the rule set asks for, named beside each value.",
			iec47 + ", 3.2; rule sets as named"},
		{"THD", fmt.Sprintf("Root of the sum of squares of orders 2 to %d over order 1, interharmonics not counted; to order 40 where the rule set says so (EN 50160).", harmonics.MaxOrder),
			"IEEE 519-2022, clause 3; EN 50160:2010, 3; " + iec47 + ", 3.3"},
	}
	tdd := MethodItem{"TDD", "Not given: the demand current was not declared.", "IEEE 519-2022, clause 3"}
	if il := s.Site.Supply.DemandCurrent; il > 0 {
		source := s.Site.Supply.DemandSource
		if source == "" {
			source = "source not declared"
		}
		tdd.Text = fmt.Sprintf("Root of the sum of squares of orders 2 to %d of the current over the demand current of %s (%s).", harmonics.MaxOrder, Quantity(il, "A"), source)
	}
	out = append(out, tdd)
	if s.Recording.Kind == "intervals" {
		return out
	}
	return append(out, MethodItem{"Angles", "Phase of order h minus h times the phase of the reference voltage's fundamental, cosine convention, in (-180°, 180°].", iec430 + ", 5.8 gives none; " + own})
}

func statisticsMethod(s *Survey) []MethodItem {
	out := []MethodItem{
		{"Aggregation", "3 s: 15 windows. 10 min: all windows between two clock marks. Root mean square of magnitudes, never a mean of phasors.",
			iec430 + ", 4.4 and 4.5; IEEE 519-2022, clause 4"},
		{"Flagging", "A window with missing samples, without lock, with a frequency step, at the end of the range, or in a dip, swell or interruption is flagged, and so is every interval that holds it. " +
			"Flagged intervals are kept and shown, and left out of statistics.", iec430 + ", 4.7; flags other than for voltage events: " + own},
		{"Voltage events", "Rms over one cycle refreshed each half cycle: dip below 90 %, swell above 110 %, interruption below 5 % of nominal, hysteresis 2 %.", iec430 + ", 5.4 and 5.5"},
	}
	if s.Recording.Kind == "intervals" {
		out = []MethodItem{
			{"Aggregation", "Intervals between the standard's lengths are aggregated to 10 min by root mean square. What cannot be derived, such as 3 s values from 10 min ones, is not assessed.",
				iec430 + ", 4.4 and 4.5"},
			{"Flagging", "Intervals that are missing, or that the recorder flagged, are kept and shown, and left out of statistics.", iec430 + ", 4.7"},
		}
	}
	return append(out,
		MethodItem{"Percentiles", "Nearest rank over valid intervals: the smallest value that at least the given share of all values does not exceed. Of 1008 values the 95th percentile is the 958th. Phases apart, never pooled. " +
			"Of more than 1200 values of 3 s they are read from classes 0.1 % wide, at most 0.1 % above the exact one; daily ones are exact.",
			"the standards fix no rule; common practice"},
		MethodItem{"Length of record", "A statistic over a day or a week needs that day or week, with at least 80 % of its intervals valid; below 95 % a remark says so. Of several weeks or days the worst governs. " +
			"A shorter record gives the nearest value it has, marked indicative, and never the result 'within'.",
			"IEEE 519-2022, clause 4; EN 50160:2010, 4"},
	)
}

func surenessMethod(s *Survey) []MethodItem {
	out := []MethodItem{
		{"What a result rests on", "The value less and plus the uncertainty declared for its channel. within: value plus uncertainty is at or below the limit. exceeds: value less uncertainty is above it. " +
			"undecided: the limit lies between, noise makes more than half the limit, a total lacks orders, or the record is shorter than the rule's period. " +
			"not assessed: something needed is missing, the point is not one the limits are made for, or a doubt stops the verdict.", "JCGM 100:2008, 4.3 (type B); " + own},
		{"Declared uncertainty", uncertaintyText(s), "site sheet"},
		{"Confidence bounds", "95 % bounds of a percentile from order statistics, without assuming a distribution: what another such period might show. They take the intervals as independent; loads change slowly, " +
			"so they are the least that sampling leaves open. A whole period was counted, not sampled: they take no part in its result.", "order-statistic intervals: textbooks of statistics"},
	}
	if s.Recording.Kind == "intervals" {
		return out // a log tells nothing of noise
	}
	return append(out, MethodItem{"Noise floor", "For each channel and order, from the lines between harmonics. An order is 'above noise' when its mean square over the recording stands four standard errors above that of noise. " + NoiseAssumption, own})
}

func uncertaintyText(s *Survey) string {
	var parts, none []string
	for _, c := range s.Site.Channels {
		switch {
		case c.Measures == "":
		case c.Uncertainty > 0:
			parts = append(parts, fmt.Sprintf("%s %s %%", c.Measures, Sig(c.Uncertainty)))
		default:
			none = append(none, c.Measures)
		}
	}
	text := ""
	if len(parts) > 0 {
		text = "Of reading: " + list(parts) + ". "
	}
	if len(none) > 0 {
		text += "Not declared, so not counted: " + list(none) + ". "
	}
	return text + "It applies to every order alike; a sensor's error may grow with the order."
}

func plantMethod(s *Survey) []MethodItem {
	out := []MethodItem{}
	if len(s.Power.Phases) > 0 {
		out = append(out, MethodItem{"Power", "P, P1, Q1, S, S1, SN and their parts for each phase; three phases together by effective apparent power. The sign of a harmonic's power is no proof of its source.",
			i1459 + ", 3.1 and 3.2"})
	}
	if s.Unbalance.U2.Known() {
		out = append(out, MethodItem{"Unbalance", "Negative and zero over positive sequence of the fundamental.", iec430 + ", 5.7"})
	}
	if s.Neutral != nil && s.Neutral.Computed {
		out = append(out, MethodItem{"Neutral current", "Not recorded: computed as the sum of the three phase currents, with their angles.", own})
	}
	if len(groups[1].channels(s)) > 0 {
		out = append(out, MethodItem{"K-factor and F_HL", fmt.Sprintf("Sum of h² Ih² over sum of Ih², orders 1 to %d, of the measured current. Both grow with the highest order counted.", harmonics.MaxOrder),
			"IEEE C57.110-2018; UL 1561"})
	}
	return out
}

// limitsMethod tells each rule set that was applied: document, edition, where it is for, and how sure its numbers are.
func limitsMethod(s *Survey) []MethodItem {
	out := []MethodItem{}
	for _, name := range appliedSets(s) {
		item := MethodItem{Topic: "Limits: " + RuleTitle(name), Source: RuleTitle(name) + ", " + clauses(s.Findings, name)}
		var parts []string
		for _, r := range s.RuleSets {
			if r.Name == name {
				parts = ruleSetWords(r)
				item.Source = strings.TrimRight(documentName(r)+", "+clauses(s.Findings, name), ", ")
			}
		}
		if unverified(s.Findings, name) {
			parts = append(parts, "Limits marked unverified are from memory and were not corroborated; check them against the purchased text.")
		}
		if len(parts) == 0 {
			parts = []string{"Applied as the rule set of that name."}
		}
		item.Text = strings.Join(parts, " ")
		out = append(out, item)
	}
	return out
}

// appliedSets are the names of the rule sets that were applied, those without a finding too.
func appliedSets(s *Survey) []string {
	var out []string
	for _, r := range s.RuleSets {
		out = once(out, r.Name)
	}
	for _, f := range s.Findings {
		out = once(out, f.RuleSet)
	}
	return out
}

// documentName is the document with its edition, which some names already hold.
func documentName(r *limits.RuleSet) string {
	if r.Edition == "" || strings.Contains(r.Document, r.Edition) {
		return r.Document
	}
	return r.Document + ":" + r.Edition
}

func ruleSetWords(r *limits.RuleSet) []string {
	var out []string
	add := func(text string) {
		if text != "" {
			out = append(out, sentence(text))
		}
	}
	add(r.Scope)
	if len(r.AppliesAt) > 0 {
		add("Made for points declared as " + list(r.AppliesAt))
	}
	if r.Grouping != "" {
		add("A harmonic is the " + r.Grouping)
	}
	if r.File != "" {
		add("A rule file of the user's own")
	}
	for _, st := range r.Statistics {
		if st.Information != "" {
			add("Shown and not judged: " + st.String() + " of " + st.Quantity + " (" + st.Information + ")")
		}
	}
	for _, n := range r.Notes {
		add(n)
	}
	return out
}

func unverified(findings []Finding, set string) bool {
	return slices.ContainsFunc(findings, func(f Finding) bool { return f.RuleSet == set && f.Unverified })
}

// clauses lists the clauses that the findings of a rule set cite.
func clauses(findings []Finding, set string) string {
	var out []string
	for _, f := range findings {
		if f.RuleSet == set && f.Clause != "" {
			out = once(out, f.Clause)
		}
	}
	return list(out)
}

// NoiseAssumption says what TimeToSee rests on.
const NoiseAssumption = "Averaged as phasors over a time T, noise of one window of length T0 falls with √(T0/T): a longer record shows a harmonic at the limit once T ≥ T0 · (2 · floor / limit)². " +
	"This takes noise as independent from window to window and the harmonic's angle to the fundamental as steady."

// TimeToSee is how long a record, in seconds, must be for the noise floor of the phasor mean to fall to half the limit, so
// that a harmonic at the limit shows. floor is the noise in one window and limit the limit, in the same unit; window
// is the length of one window in seconds. See NoiseAssumption.
func TimeToSee(floor, limit, window float64) float64 {
	ratio := 2 * floor / limit
	return window * math.Max(1, ratio*ratio)
}
