package report

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics/limits"
)

// answersOf says for voltage and for current how they stand to each rule set that was applied.
func answersOf(s *Survey) []string {
	out := []string{}
	if text := pointAnswer(s); text != "" {
		out = append(out, text)
	}
	for _, g := range groups[:2] {
		sets := s.setsFor(g)
		for _, set := range sets {
			out = append(out, answer(s, g, set))
		}
		if len(sets) == 0 && len(g.channels(s)) > 0 {
			out = append(out, unjudged(s, g))
		}
	}
	return out
}

// pointAnswer says when limits that are meant for the point of common coupling were applied without knowing whether
// this is it. For a point declared as another, the findings themselves say so.
func pointAnswer(s *Survey) string {
	if s.Site.Supply.Point != "" || !slices.ContainsFunc(s.RuleSets, func(r *limits.RuleSet) bool { return slices.Contains(r.AppliesAt, "PCC") }) {
		return ""
	}
	return "Whether this is the point of common coupling (PCC) was not declared: the limits meant for it were applied as if it were."
}

// setsFor lists the rule sets that have findings on the group, in the order of the findings.
func (s *Survey) setsFor(g group) []string {
	var out []string
	for _, f := range s.Findings {
		if g.holds(f.Channel) && !slices.Contains(out, f.RuleSet) {
			out = append(out, f.RuleSet)
		}
	}
	return out
}

// picked are the findings of one rule set on one group, the highest share of the limit first.
func (s *Survey) picked(g group, set string) []Finding {
	var out []Finding
	for _, f := range s.Findings {
		if f.RuleSet == set && g.holds(f.Channel) {
			out = append(out, f)
		}
	}
	slices.SortStableFunc(out, byShare)
	return out
}

// byShare puts the highest share first, and findings without one last.
func byShare(a, b Finding) int {
	switch {
	case !a.Share.Known() && !b.Share.Known():
		return 0
	case !b.Share.Known() || a.Share > b.Share:
		return -1
	case !a.Share.Known() || a.Share < b.Share:
		return 1
	}
	return 0
}

func withResult(findings []Finding, result string) []Finding {
	var out []Finding
	for _, f := range findings {
		if f.Result == result {
			out = append(out, f)
		}
	}
	return out
}

func answer(s *Survey, g group, set string) string {
	all := s.picked(g, set)
	over, open, in := withResult(all, limits.Exceeds), withResult(all, limits.Undecided), withResult(all, limits.Within)
	missed := withResult(all, limits.NotAssessed)
	var text string
	switch {
	case len(over) > 0:
		text = fmt.Sprintf("%s exceeds %s: %s%s.%s", g.name, RuleTitle(set), told(over[0]), overText(over[0]), alsoOver(over[1:]))
	case len(open) > 0 && open[0].Indicative:
		text = fmt.Sprintf("%s, indicative only: %s. Nothing can be said to be within %s, because %s.", g.name, told(open[0]), RuleTitle(set), firstClause(open[0].Why))
	case len(open) > 0:
		text = fmt.Sprintf("%s is undecided under %s: %s; %s.", g.name, RuleTitle(set), told(open[0]), firstClause(open[0].Why))
	case len(in) > 0:
		text = fmt.Sprintf("%s is within %s%s: the highest share of a limit is %s.", g.name, RuleTitle(set), asFar(missed), told(in[0]))
	default:
		return fmt.Sprintf("%s was not assessed under %s: %s. %s", g.name, RuleTitle(set), firstClause(missed[0].Why), forInformation(s, g, missed[0]))
	}
	return text + tally(all, over, open, missed)
}

// forInformation shows what there is where nothing was assessed: the highest share of a limit, else the distortion.
func forInformation(s *Survey, g group, f Finding) string {
	if !f.Value.Known() || !f.Limit.Known() {
		return "For information: " + distortion(s, g) + "." + s.demandThatKeeps(g, f.RuleSet)
	}
	value, limit := Apart(float64(f.Value), float64(f.Limit))
	return fmt.Sprintf("For information: %s on %s is %s %s of the %s, %s %% of a limit of %s %s.", QuantityName(f.Quantity, f.Order), f.Channel, value, f.Unit, f.Basis,
		Sig(float64(f.Share)), limit, f.Unit)
}

// demandThatKeeps is the demand current from which on every current value of this record would keep to the limits shown,
// where none was declared. Those limits are then of the strictest row, so that the figure holds whatever the row.
func (s *Survey) demandThatKeeps(g group, set string) string {
	if g.key != "I" || s.Site.Supply.DemandCurrent > 0 {
		return ""
	}
	most := 0.0
	for _, f := range s.Judged {
		if f.RuleSet == set && g.member(f.Channel) && f.Limit > 0 && f.Level > 0 {
			most = max(most, 100*f.Level/f.Limit)
		}
	}
	if most == 0 {
		return ""
	}
	return fmt.Sprintf(" By the values of this record every limit would be kept, even those of the strictest row, for a demand current from %s on.", Quantity(most, "A"))
}

func asFar(missed []Finding) string {
	if len(missed) > 0 {
		return " as far as assessed"
	}
	return ""
}

// told is one finding in words: "order 5 on V2, 95th percentile 3.82 % of the nominal voltage 230.9 V, between 3.76 % and 3.9 %
// with 95 % confidence, limit 5 %, 76.4 % of it (10 min values over a week)".
func told(f Finding) string {
	text := QuantityName(f.Quantity, f.Order) + " on " + f.Channel + ", "
	if f.Indicative {
		value, limit := Apart(float64(f.Value), float64(f.Limit))
		return text + fmt.Sprintf("%s %s of the %s, %s %% of the limit of %s %s", value, f.Unit, f.Basis, Sig(float64(f.Share)), limit, f.Unit)
	}
	text += firmness(f, " of the "+f.Basis) + ", " + Sig(float64(f.Share)) + " % of it"
	if _, of, ok := strings.Cut(f.Statistic, " of "); ok {
		text += " (" + of + ")"
	}
	return text
}

// Bounds are the confidence bounds of a finding's percentile in words: "between 3.76 % and 3.9 %"; "" when they are not
// known. They tell how firm the percentile is; what the result rests on is the declared uncertainty.
func Bounds(f Finding) string {
	if !f.SampleLow.Known() || !f.SampleHigh.Known() {
		return ""
	}
	low, high := Apart(float64(f.SampleLow), float64(f.SampleHigh))
	return fmt.Sprintf("between %s %s and %s %s", low, f.Unit, high, f.Unit)
}

// Firmness says how firm a finding is: "95th percentile 4.8 %, between 4.5 % and 5.1 % with 95 % confidence, limit 5 %".
func Firmness(f Finding) string { return firmness(f, "") }

func firmness(f Finding, basis string) string {
	value, limit := Apart(float64(f.Value), float64(f.Limit))
	name, _, _ := strings.Cut(f.Statistic, " of ")
	text := fmt.Sprintf("%s %s %s%s", name, value, f.Unit, basis)
	if b := Bounds(f); b != "" {
		text += ", " + b + " with 95 % confidence"
	}
	return text + fmt.Sprintf(", limit %s %s", limit, f.Unit)
}

// alsoShown is how many further findings over the limit one answer names.
const alsoShown = 3

// alsoOver names further orders over the limit, each once, on the channel where it is worst.
func alsoOver(rest []Finding) string {
	var parts []string
	seen := map[string]bool{}
	for _, f := range rest {
		name := QuantityName(f.Quantity, f.Order) + " on " + f.Channel
		if seen[name] || len(parts) == alsoShown {
			continue
		}
		seen[name] = true
		parts = append(parts, fmt.Sprintf("%s (%s %% of the limit)", name, Sig(float64(f.Share))))
	}
	if len(parts) == 0 {
		return ""
	}
	return " Also over: " + strings.Join(parts, ", ") + "."
}

// tally ends an answer with how many findings are what, where they are not all of one kind.
func tally(all, over, open, missed []Finding) string {
	var parts []string
	if len(over) > 0 {
		parts = append(parts, verb(len(over), "exceeds", "exceed"))
	}
	if len(open) > 0 && len(open) < len(all) {
		parts = append(parts, verb(len(open), "is undecided", "are undecided"))
	}
	if len(missed) > 0 {
		parts = append(parts, verb(len(missed), "was not assessed", "were not assessed"))
	}
	if len(parts) == 0 {
		return ""
	}
	return fmt.Sprintf(" Of %s %s.", plural(len(all), "finding"), list(parts))
}

func verb(n int, one, many string) string {
	if n == 1 {
		many = one
	}
	return fmt.Sprintf("%d %s", n, many)
}

// list joins words as a sentence does: "a", "a and b", "a, b and c".
func list(parts []string) string {
	if len(parts) < 2 {
		return strings.Join(parts, "")
	}
	last := len(parts) - 1
	return strings.Join(parts[:last], ", ") + " and " + parts[last]
}

// firstClause is a reason without its remedy, which stands elsewhere, and without a full stop.
func firstClause(why string) string {
	head, _, _ := strings.Cut(why, ";")
	return strings.TrimRight(strings.TrimSpace(head), ".")
}

// overText says how often the value was over the limit, where that is known.
func overText(f Finding) string {
	if !f.Over.Known() {
		return ""
	}
	return fmt.Sprintf(", over it in %s %% of %d valid intervals", Sig(float64(f.Over)), f.N)
}

// unjudged describes a group to which no limit was applied.
func unjudged(s *Survey, g group) string {
	return fmt.Sprintf("%s, no limit applied: %s.", g.name, distortion(s, g))
}

// distortion is the THD of a group's most distorted channel, and its largest order.
func distortion(s *Survey, g group) string {
	var worst *Channel
	for _, c := range g.channels(s) {
		if c.THD.Mean.Known() && (worst == nil || c.THD.Mean > worst.THD.Mean) {
			worst = c
		}
	}
	if worst == nil {
		return "no distortion could be measured"
	}
	top := Harmonic{Pct: NaN}
	for _, h := range worst.Harmonics {
		if h.Order > 1 && h.AboveNoise && h.Pct.Known() && !(h.Pct <= top.Pct) {
			top = h
		}
	}
	if !top.Pct.Known() {
		return fmt.Sprintf("THD is %s %% of the fundamental on %s, of which no order stands above the noise", Sig(float64(worst.THD.Mean)), worst.Name)
	}
	return fmt.Sprintf("THD is %s %% of the fundamental on %s, the largest order is %d with %s %% (%s)",
		Sig(float64(worst.THD.Mean)), worst.Name, top.Order, Sig(float64(top.Pct)), Quantity(float64(top.RMS), worst.Unit))
}

// A Lead is the finding that decides how voltage or current stands to one rule set.
type Lead struct {
	Group   string // "Voltage" or "Current"
	RuleSet string // for people
	Finding Finding
	Answer  string // the whole sentence
}

// Leads lists, for voltage and then current, each rule set's gravest finding, the one with the highest share of its
// limit among equals.
func Leads(s *Survey) []Lead {
	var out []Lead
	for _, g := range groups[:2] {
		for _, set := range s.setsFor(g) {
			all := s.picked(g, set)
			lead := all[0]
			for _, f := range all {
				if graver(f, lead) {
					lead = f
				}
			}
			out = append(out, Lead{g.name, RuleTitle(set), lead, answer(s, g, set)})
		}
	}
	return out
}

// Tally is how many findings have which result: "4 exceed, 1 is undecided and 670 are within, of 675".
func Tally(s *Survey) string {
	if len(s.Findings) == 0 {
		return "no limit was applied"
	}
	return resultCounts(s.Findings)
}

// Exceeding are the governing findings over a limit, the highest share first.
func Exceeding(s *Survey) []Finding { return withResult(governing(s.Findings), limits.Exceeds) }
