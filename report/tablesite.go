package report

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics"
)

const undeclared = "not declared"

// siteTable is what was declared of the installation.
func siteTable(s *Survey) Table {
	t := named("site", "Site and supply, as declared")
	id, sup := s.Site.Site, s.Site.Supply
	for _, r := range [][2]string{{"Site", id.Name}, {"Location", id.Location}, {"Surveyed by", id.SurveyedBy}, {"Purpose", id.Purpose}, {"Connection", sup.Connection}, {"Point", sup.Point}} {
		t.add(r[0], or(r[1], undeclared), "")
	}
	t.declared("Nominal voltage", sup.NominalVoltage, "V", nominalRemark(s))
	t.declared("Nominal frequency", sup.NominalFrequency, "Hz", "")
	t.declared("Short-circuit current, highest", sup.ShortCircuitCurrent, "A", sup.ShortCircuitSource)
	t.declared("Short-circuit current, lowest in normal operation", sup.ShortCircuitCurrentMin, "A", sup.ShortCircuitSource)
	t.declared("Demand current IL", sup.DemandCurrent, "A", sup.DemandSource)
	if sup.ShortCircuitCurrent > 0 && sup.DemandCurrent > 0 {
		t.addNumber("Isc / IL", sup.ShortCircuitCurrent/sup.DemandCurrent, "", "decides the row of the current limits")
	}
	t.declared("Transformer", 1e3*sup.TransformerKVA, "VA", "")
	t.declared("Transformer impedance", sup.TransformerImpedance, "%", "")
	if len(sup.CapacitorKvar) > 0 {
		var steps []string
		for _, q := range sup.CapacitorKvar {
			steps = append(steps, Sig(q))
		}
		t.add("Capacitor steps", strings.Join(steps, " + ")+" kvar", detuning(sup.CapacitorDetuning))
	}
	if sup.Generation {
		t.add("Generation on site", "yes", "reversed power flow is taken as meant")
	}
	t.add("Rule sets asked for", or(list(titles(s.Site.Limits.Apply)), "none"), "")
	for _, g := range s.Site.Guessed {
		t.add("Taken from the recording", g, "not declared")
	}
	return t
}

func nominalRemark(s *Survey) string {
	switch {
	case s.Site.Supply.ThreePhase():
		return "line to line"
	case s.Site.Supply.Connection != "":
		return "line to neutral"
	}
	return ""
}

func detuning(p float64) string {
	if p > 0 {
		return "detuned, reactor share " + Sig(p) + " %"
	}
	return "no detuning declared"
}

func titles(names []string) []string {
	var out []string
	for _, n := range names {
		out = append(out, RuleTitle(n))
	}
	return out
}

func or(text, otherwise string) string {
	if text == "" {
		return otherwise
	}
	return text
}

// declared adds a number of the site sheet, of which 0 says that it was not declared.
func (t *Table) declared(name string, v float64, unit, remark string) {
	if v == 0 {
		t.add(name, undeclared, "")
		return
	}
	t.addNumber(name, v, unit, remark)
}

// hookUpTable says what each channel of the recording was taken to measure.
func hookUpTable(s *Survey) Table {
	t := Table{Key: "hook-up", Title: "Channels, as declared", Columns: []Column{text("source", "Recorded as"), text("measures", "Measures"), number("scale", "Scale", ""), text("reversed", "Reversed"), text("uncertainty", "Uncertainty, % of reading")}}
	for _, c := range s.Site.Channels {
		scale := c.Scale
		if scale == 0 {
			scale = 1
		}
		uncertainty := word(undeclared)
		if c.Uncertainty > 0 {
			uncertainty = value(Number(c.Uncertainty))
		}
		t.Rows = append(t.Rows, []Cell{word(c.Source), word(or(c.Measures, "nothing")), value(Number(scale)), word(yesNo(c.Reversed)), uncertainty})
	}
	return t
}

func recordingTable(s *Survey) Table {
	t := named("recording", "Recording")
	r := s.Recording
	start := "not in the file"
	if r.Start != nil {
		start = r.Clock(0)
		t.add("End", r.Clock(float64(r.Duration)), "")
	}
	t.Rows = append([][]Cell{{word("Start"), word(start), word("")}}, t.Rows...)
	t.add("Span", Duration(float64(r.Duration)), "")
	if r.Kind == "intervals" {
		t.add("Kind", "interval log of a recorder", "no waveforms")
	} else {
		t.add("Windows", fmt.Sprintf("%d of %d cycles: %d used, %d flagged", r.Windows.Total, r.Windows.Cycles, r.Windows.Used, r.Windows.Flagged), "flagged windows are kept and not counted")
	}
	if s.Summary != nil {
		for _, set := range []struct {
			name string
			ivs  []harmonics.Interval
		}{{"Intervals of 10 min", s.Summary.Tens}, {"Intervals of 3 s, first hour", s.Summary.Threes}} {
			if len(set.ivs) > 0 {
				n := validCount(set.ivs)
				t.add(set.name, fmt.Sprintf("%d, of them %d valid", len(set.ivs), n), Sig(100*float64(n)/float64(len(set.ivs)))+" %")
			}
		}
	}
	for _, g := range r.Gaps {
		t.add("Gap", r.Clock(float64(g.At)), Duration(float64(g.Length)))
	}
	return t
}

// fileTable is the log: what went in, and what made the survey.
func fileTable(s *Survey) Table {
	t := Table{Key: "files", Title: "Files, and the program", Columns: []Column{text("name", "File"), text("format", "Format"), number("channels", "Channels", ""), number("samples", "Samples a channel", ""),
		number("sampling_hz", "Sampling rate", "Hz"), wide("sha256", "SHA-256")}}
	for _, f := range s.Recording.Files {
		samples := word(Dash)
		if f.Samples != nil {
			samples = Cell{Text: fmt.Sprint(*f.Samples), Number: Number(*f.Samples), IsNum: true}
		}
		t.Rows = append(t.Rows, []Cell{word(f.Name), word(f.Format), whole(f.Channels), samples, {Text: sig(float64(f.SamplingHz), 6), Number: f.SamplingHz, IsNum: true}, word(f.SHA256)})
	}
	t.Notes = []string{fmt.Sprintf("Made by %s %s at %s.", s.Program.Name, s.Program.Version, s.MadeAt.Format("2006-01-02 15:04:05 UTC"))}
	return t
}

func doubtTable(s *Survey) Table {
	t := Table{Key: "doubts", Title: "Doubts: what weakens the numbers", Columns: []Column{text("weight", "Weight"), text("code", "Code"), text("channel", "Channel"), wide("text", "What, how we know, what to do"), wide("evidence", "Evidence")}}
	for _, d := range s.Doubts {
		words := d.Text
		if len(d.Proposal) > 0 {
			words += " Proposed for the site sheet: " + strings.Join(d.Proposal, "; ")
		}
		t.Rows = append(t.Rows, []Cell{word(d.Weight), word(d.Code), word(or(d.Channel, "all")), word(words), word(evidence(d.Evidence))})
	}
	return t
}

// evidenceUnits are the units that names of evidence end in, as fitness.Doubt says.
var evidenceUnits = map[string]string{"pct": "%", "deg": "°", "v": "V", "a": "A", "s": "s", "hz": "Hz", "w": "W"}

// evidence writes the numbers behind a doubt: "share_of_demand_pct" 71 is "share of demand 71 %".
func evidence(numbers map[string]Number) string {
	var names []string
	for n := range numbers {
		names = append(names, n)
	}
	slices.Sort(names)
	var parts []string
	for _, n := range names {
		words := strings.Split(n, "_")
		unit, known := evidenceUnits[words[len(words)-1]]
		if known {
			words = words[:len(words)-1]
		}
		parts = append(parts, strings.TrimSpace(strings.Join(words, " ")+" "+Sig(float64(numbers[n]))+" "+unit))
	}
	return strings.Join(parts, ", ")
}

func eventTable(s *Survey) Table {
	t := Table{Key: "events", Title: "Voltage events: their intervals are flagged", Columns: []Column{text("kind", "Kind"), text("at", "Start"), number("length", "Length", "s"), number("extreme", "Extreme", "V"), number("pct", "Of nominal", "%"), text("channels", "On")}}
	for _, e := range s.Recording.Events {
		t.Rows = append(t.Rows, []Cell{word(e.Kind), s.Recording.moment(float64(e.At)), value(e.Length), value(e.ExtremeV), value(e.Pct), word(list(e.Channels))})
	}
	return t
}

// excludedTable lists the stretches that statistics leave out.
func excludedTable(s *Survey) Table {
	t := Table{Key: "excluded", Columns: []Column{text("from", "From"), text("to", "To"), number("length", "Length", "s"), text("why", "Why")}}
	if s.Summary == nil {
		return t
	}
	ivs, name := seriesOf(s.Summary)
	for _, x := range shadesOf(ivs) {
		t.Rows = append(t.Rows, []Cell{s.Recording.moment(x.From), s.Recording.moment(x.To), value(Number(x.To - x.From)), word(x.Why)})
	}
	t.Title = "Left out of statistics, in intervals of " + name
	return t
}

func methodTable(s *Survey) Table {
	t := Table{Key: "method", Title: "Method", Columns: []Column{text("topic", "What"), wide("text", "How"), wide("source", "After")}, Notes: []string{MethodNote}}
	for _, m := range s.Method {
		t.Rows = append(t.Rows, []Cell{word(m.Topic), word(m.Text), word(m.Source)})
	}
	return t
}
