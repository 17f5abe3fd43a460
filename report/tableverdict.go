package report

import (
	"fmt"
	"regexp"
	"slices"
	"strings"

	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
)

var results = []string{limits.Exceeds, limits.Undecided, limits.NotAssessed, limits.Within}

// verdictTable has one row for each order or total that a rule set limits, with the channel and statistic that govern: the
// gravest result, and of those the highest share of the limit. It is sorted by share.
func verdictTable(s *Survey) Table {
	rows := governing(s.Findings)
	t := Table{Key: "verdict", Columns: []Column{text("what", "What"), text("channel", "On"), text("rule_set", "Rule set"), text("statistic", "Statistic"),
		number("value", "Value", "%"), text("bounds", "95 % bounds, %"), number("limit", "Limit", "%"), number("share_pct", "Share of limit", "%"), text("result", "Result")}}
	for _, f := range rows {
		v, l := Apart(float64(f.Value), float64(f.Limit))
		t.Rows = append(t.Rows, []Cell{word(title(f)), word(f.Channel), word(RuleTitle(f.RuleSet) + mark(f)), word(ShortStatistic(f.Statistic)),
			{Text: v, Number: f.Value, IsNum: true}, word(boundsCell(f)), {Text: l, Number: f.Limit, IsNum: true}, value(f.Share), result(f.Result)})
	}
	t.Title = "Findings by share of the limit: " + resultCounts(s.Findings)
	t.Notes = append(t.Notes, "One row for each order and total: the channel and statistic with the gravest result, and of those the highest share. The spreadsheet lists every finding.",
		"95 % bounds: how firm the percentile is. Results rest on the value less and plus the uncertainty declared for its channel; what is close to a limit is listed below.")
	t.Notes = append(t.Notes, bases(s.Findings)...)
	t.Notes = append(t.Notes, marks(s.Findings)...)
	return t
}

// resultCounts is how many findings have which result: "4 exceed, 1 is undecided and 670 are within, of 675".
func resultCounts(findings []Finding) string {
	n := count(findings)
	var parts []string
	for _, r := range results {
		switch {
		case n[r] == 0:
		case r == limits.Exceeds:
			parts = append(parts, verb(n[r], "exceeds", "exceed"))
		default:
			parts = append(parts, verb(n[r], "is ", "are ")+r)
		}
	}
	return fmt.Sprintf("%s, of %d", list(parts), len(findings))
}

// title names what is limited: "Voltage order 5".
func title(f Finding) string {
	kind := "Voltage"
	if site.Role(f.Channel).Current() {
		kind = "Current"
	}
	return kind + " " + QuantityName(f.Quantity, f.Order)
}

// governing picks for each rule set and order or total of voltage or current the finding that decides.
func governing(findings []Finding) []Finding {
	type key struct{ set, what string }
	best := map[key]int{}
	var out []Finding
	for _, f := range findings {
		k := key{f.RuleSet, title(f)}
		i, seen := best[k]
		if !seen {
			best[k] = len(out)
			out = append(out, f)
			continue
		}
		if graver(f, out[i]) {
			out[i] = f
		}
	}
	slices.SortStableFunc(out, byShare)
	return out
}

func graver(a, b Finding) bool {
	ra, rb := slices.Index(results, a.Result), slices.Index(results, b.Result)
	if ra != rb {
		return ra < rb
	}
	return byShare(a, b) < 0
}

func boundsCell(f Finding) string {
	if !f.SampleLow.Known() || !f.SampleHigh.Known() {
		return Dash
	}
	low, high := Apart(float64(f.SampleLow), float64(f.SampleHigh))
	return low + " to " + high
}

// Marks beside a rule set's name.
const (
	indicativeMark = " ¹"
	unverifiedMark = " ²"
)

func mark(f Finding) string {
	text := ""
	if f.Indicative {
		text += indicativeMark
	}
	if f.Unverified {
		text += unverifiedMark
	}
	return text
}

func marks(findings []Finding) []string {
	var out []string
	if slices.ContainsFunc(findings, func(f Finding) bool { return f.Indicative }) {
		out = append(out, "¹ Indicative: the record is too short for the statistic; the value is the nearest it gives.")
	}
	if slices.ContainsFunc(findings, func(f Finding) bool { return f.Unverified }) {
		out = append(out, "² Unverified: the limit is from memory and was not corroborated; check it against the purchased standard.")
	}
	return out
}

// bases says what the percentages are of, by rule set.
func bases(findings []Finding) []string {
	where := map[string][]string{}
	var order []string
	for _, f := range findings {
		if f.Basis == "" {
			continue
		}
		k := RuleTitle(f.RuleSet) + ": per cent of the " + f.Basis
		if where[k] == nil {
			order = append(order, k)
		}
		where[k] = once(where[k], f.Channel)
	}
	var out []string
	for _, k := range order {
		out = append(out, k+" on "+list(where[k])+".")
	}
	return out
}

var percentile = regexp.MustCompile(`^(\d+)th percentile of (.+) values(?: over (?:a|one) (.+))?$`)

// ShortStatistic abbreviates a statistic for a table: "95th percentile of 10 min values over a week" is "P95 of 10 min, week".
func ShortStatistic(name string) string {
	m := percentile.FindStringSubmatch(name)
	if m == nil {
		return name
	}
	short := "P" + m[1] + " of " + m[2]
	if m[3] != "" {
		short += ", " + m[3]
	}
	return short
}

// openTable says why findings stay open and what would settle them, and what weakens those that were decided. Findings
// whose reasons differ in numbers only share a row.
func openTable(s *Survey) Table {
	t := Table{Key: "open", Columns: []Column{text("result", "Result"), text("rule_set", "Rule set"), text("channels", "On"), number("n", "Findings", ""), wide("why", "Why, and what would settle it")}}
	open, weak := reasons(s.Findings), remarks(governing(s.Findings))
	for _, r := range append(open, weak...) {
		why := r.why
		if r.differs {
			why += " (Numbers of the first; they differ.)"
		}
		t.Rows = append(t.Rows, []Cell{result(r.result), word(RuleTitle(r.set)), word(list(r.channels)), whole(r.n), word(why)})
	}
	t.Title = "What stays open: " + plural(len(open), "reason")
	if len(weak) > 0 {
		t.Title += "; what weakens a result: " + plural(len(weak), "remark")
	}
	return t
}

// A reasonRow is findings of one rule set and result that share a reason.
type reasonRow struct {
	result, set string
	why         string // as the first finding has it
	differs     bool   // the reasons are not all the same to the letter
	channels    []string
	n           int
}

// reasons groups the findings that stay open.
func reasons(findings []Finding) []reasonRow {
	var g grouping
	for _, f := range findings {
		if f.Result == limits.Undecided || f.Result == limits.NotAssessed {
			g.add(f, f.Why)
		}
	}
	return g.rows
}

// remarks groups what stands beside findings that were decided, remark by remark.
func remarks(findings []Finding) []reasonRow {
	var g grouping
	for _, f := range findings {
		if f.Result != limits.Within && f.Result != limits.Exceeds || f.Why == "" {
			continue
		}
		for part := range strings.SplitSeq(f.Why, "; ") {
			g.add(f, part)
		}
	}
	return g.rows
}

// A grouping gathers findings by rule set, result and reason, numbers aside.
type grouping struct {
	rows []reasonRow
	at   map[string]int
}

var numbers = regexp.MustCompile(`[0-9]+(\.[0-9]+)?`)

func (g *grouping) add(f Finding, why string) {
	key := f.Result + "|" + f.RuleSet + "|" + numbers.ReplaceAllString(why, "#")
	if g.at == nil {
		g.at = map[string]int{}
	}
	i, seen := g.at[key]
	if !seen {
		i = len(g.rows)
		g.at[key] = i
		g.rows = append(g.rows, reasonRow{result: f.Result, set: f.RuleSet, why: why})
	}
	r := &g.rows[i]
	r.n++
	r.channels = once(r.channels, f.Channel)
	r.differs = r.differs || r.why != why
}

// findingTable is every finding.
func findingTable(s *Survey) Table {
	t := Table{Key: "findings", Title: fmt.Sprintf("All %d findings", len(s.Findings)), Columns: []Column{
		text("rule_set", "Rule set"), text("clause", "Clause"), text("channel", "Channel"), text("quantity", "Quantity"), number("order", "Order", ""),
		text("statistic", "Statistic"), number("n", "Intervals", ""), number("value", "Value", "%"), number("value_low", "Less uncertainty", "%"), number("value_high", "Plus uncertainty", "%"),
		number("sample_low", "95 % bounds, from", "%"), number("sample_high", "95 % bounds, to", "%"),
		number("limit", "Limit", "%"), number("share_pct", "Share of limit", "%"), number("over_pct", "Time over", "%"), text("result", "Result"), text("basis", "Per cent of"), wide("why", "Why")}}
	for _, f := range s.Findings {
		order := blank
		if f.Order > 0 {
			order = whole(f.Order)
		}
		t.Rows = append(t.Rows, []Cell{word(RuleTitle(f.RuleSet) + mark(f)), word(f.Clause), word(f.Channel), word(f.Quantity), order, word(f.Statistic), whole(f.N),
			value(f.Value), value(f.ValueLow), value(f.ValueHigh), value(f.SampleLow), value(f.SampleHigh), value(f.Limit), value(f.Share), value(f.Over), result(f.Result), word(f.Basis), word(f.Why)})
	}
	t.Notes = marks(s.Findings)
	return t
}

// noiseTable lists the orders whose noise hides a harmonic at the limit, and how long a record would show it.
func noiseTable(s *Survey) Table {
	t := Table{Key: "noise", Columns: []Column{text("channel", "Channel"), number("order", "Order", ""), number("floor", "Noise floor", "%"), number("limit", "Limit", "%"),
		number("time", "Record needed", "s"), text("rule_set", "Rule set")}, Notes: []string{NoiseAssumption}}
	window := float64(s.Recording.Windows.Cycles) / float64(s.Recording.Frequency.Mean)
	for _, f := range governingByChannel(s.Findings) {
		floor := float64(f.Floor)
		if !(2*floor > float64(f.Limit)) {
			continue
		}
		need := TimeToSee(floor, float64(f.Limit), window)
		t.Rows = append(t.Rows, []Cell{word(f.Channel), whole(f.Order), value(Number(floor)), value(f.Limit), {Text: Duration(need), Number: Number(need), IsNum: true}, word(RuleTitle(f.RuleSet))})
	}
	t.Title = fmt.Sprintf("Noise above half a limit: %s; how long a record would show a harmonic at the limit", plural(len(t.Rows), "order"))
	return t
}

// governingByChannel picks the lowest limit of each order on each channel.
func governingByChannel(findings []Finding) []Finding {
	type key struct {
		channel string
		order   int
	}
	at := map[key]int{}
	var out []Finding
	for _, f := range findings {
		if f.Order == 0 || !f.Limit.Known() {
			continue
		}
		k := key{f.Channel, f.Order}
		if i, seen := at[k]; !seen {
			at[k] = len(out)
			out = append(out, f)
		} else if f.Limit < out[i].Limit {
			out[i] = f
		}
	}
	return out
}
