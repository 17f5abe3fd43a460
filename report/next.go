package report

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
)

// actions is how many actions a headline proposes at most: a longer list is not acted on.
const actions = 3

// nextOf proposes what to do next, each with how to verify that it worked. Measurement comes before judgement: a
// wrong hook-up is put right first. Nothing here changes the installation; that is for its engineer to decide.
func nextOf(s *Survey) []string {
	out := []string{}
	for _, propose := range []func(*Survey) string{repairRecord, takeUpExceeded, declareMissing, recordLonger, decideOpen, settleMissed, heedCaution, keepWatching} {
		if text := propose(s); text != "" && len(out) < actions {
			out = append(out, text)
		}
		if len(out) > 0 && isWatching(out[len(out)-1]) && len(out) > 1 {
			out = out[:len(out)-1]
		}
	}
	return out
}

func action(what, verify string) string { return what + " To verify: " + verify }

// repairRecord is about doubts that stop a verdict.
func repairRecord(s *Survey) string {
	for _, d := range s.Doubts {
		if d.Weight != fitness.StopsVerdict {
			continue
		}
		verify := "the doubt '" + d.Code + "' is gone when the new recording is surveyed."
		if len(d.Proposal) > 0 {
			return action("Check the hook-up (lines ready for the site sheet stand with the doubt '"+d.Code+"'): "+sentence(d.Text), verify)
		}
		return action("Record again with this put right: "+sentence(d.Text), verify)
	}
	return ""
}

// takeUpExceeded names what is over a limit.
func takeUpExceeded(s *Survey) string {
	var names []string
	for _, f := range sorted(withResult(s.Findings, limits.Exceeds)) {
		names = once(names, QuantityName(f.Quantity, f.Order)+" on "+f.Channel)
	}
	if len(names) == 0 {
		return ""
	}
	if more := len(names) - alsoShown; more > 0 {
		names = append(names[:alsoShown], fmt.Sprintf("%d more", more))
	}
	return action(fmt.Sprintf("Record the outgoing circuits at the same time, to see which carry what is over (%s), and have the installation's engineer decide.", list(names)),
		"the circuits' currents add up to the current here, order by order, and after any change a record of the same length at the same load is within.")
}

// declareMissing asks for what the limits need and the site sheet does not have.
func declareMissing(s *Survey) string {
	if len(s.Findings) == 0 {
		return ""
	}
	var missing []string
	if s.Site.Supply.NominalVoltage <= 0 {
		missing = append(missing, "the nominal voltage (nominal_voltage)")
	}
	judged := len(s.setsFor(groups[1])) > 0 // currents
	if judged && s.Site.Supply.ShortCircuitCurrent <= 0 {
		missing = append(missing, "the maximum short-circuit current at the point (short_circuit_current)")
	}
	if judged && s.Site.Supply.DemandCurrent <= 0 {
		missing = append(missing, "the maximum demand load current (demand_current)")
	}
	if len(missing) == 0 {
		return ""
	}
	return action("Find out, from the network operator or the records, "+list(missing)+", and complete the site sheet with it.", "the findings are no longer 'not assessed' for want of it.")
}

// recordLonger asks for the length that the rules' statistics need.
func recordLonger(s *Survey) string {
	if some, _ := s.Indicative(); !some && len(s.Findings) > 0 && !slices.ContainsFunc(s.Doubts, func(d Doubt) bool { return d.Code == "short-record" }) {
		return ""
	}
	const week = 7 * 86400
	if float64(s.Recording.Duration) >= week {
		return ""
	}
	what := "Record a full week that holds working days, a weekend and the usual load"
	if len(s.Findings) == 0 {
		what = "To judge by limits, complete the site sheet (`wavetally sheet` writes one) and record a full week that holds working days, a weekend and the usual load"
	}
	return action(what+".", fmt.Sprintf("at least 95 %% of its 1008 intervals of 10 min are valid; this record spans %s.", Duration(float64(s.Recording.Duration))))
}

// decideOpen says what would settle the finding that is undecided at the highest share.
func decideOpen(s *Survey) string {
	for _, f := range sorted(withResult(s.Findings, limits.Undecided)) {
		if f.Indicative || !f.Value.Known() || !f.Limit.Known() {
			continue
		}
		apart := 100 * (float64(f.Value) - float64(f.Limit)) / float64(f.Limit)
		what := fmt.Sprintf("Settle %s on %s under %s, %s %% from its limit", QuantityName(f.Quantity, f.Order), f.Channel, RuleTitle(f.RuleSet), Sig(abs(apart)))
		return action(sentence(what+": "+reasonAndRemedy(f.Why)), "a new survey gives it a result other than undecided.")
	}
	return ""
}

// settleMissed says what would settle the findings that were not assessed for a reason other than doubts and
// declarations, which have actions of their own.
func settleMissed(s *Survey) string {
	for _, r := range reasons(s.Findings) {
		if r.result != limits.NotAssessed || !strings.Contains(r.why, "settle") || strings.Contains(r.why, "not declared") {
			continue
		}
		return action(sentence(fmt.Sprintf("%s of %s on %s: %s", plural(r.n, "finding"), RuleTitle(r.set), list(r.channels), reasonAndRemedy(r.why))),
			"a new survey gives them a result other than 'not assessed'.")
	}
	return ""
}

// reasonAndRemedy is the first reason of a finding with what would settle it, without what else was remarked.
func reasonAndRemedy(why string) string {
	parts := strings.SplitN(why, "; ", 3)
	return strings.Join(parts[:min(2, len(parts))], "; ")
}

// heedCaution repeats the first caution.
func heedCaution(s *Survey) string {
	for _, d := range s.Doubts {
		if d.Weight == fitness.Caution && d.Code != "short-record" {
			return action("Heed the caution: "+sentence(d.Text), "the doubt '"+d.Code+"' is gone when a new recording is surveyed.")
		}
	}
	return ""
}

const watching = "Survey again after a change of load, of capacitors or of the supply"

// keepWatching is for a record that leaves nothing to do.
func keepWatching(s *Survey) string {
	if len(s.Findings) == 0 {
		return ""
	}
	return action(watching+".", "each share of a limit stays below 80 %, or the change is understood.")
}

func isWatching(text string) bool { return strings.HasPrefix(text, watching) }

// sentence ends a text with a full stop.
func sentence(text string) string {
	text = strings.TrimSpace(text)
	if text != "" && !strings.HasSuffix(text, ".") {
		text += "."
	}
	return text
}

func abs(v float64) float64 { return max(v, -v) }
