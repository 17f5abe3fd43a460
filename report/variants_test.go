package report_test

import (
	"math"
	"regexp"
	"strconv"
	"strings"
	"sync"
	"testing"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// The summaries are costly to invent; only variants that change them get their own.
var shortInputs, logInputs = sync.OnceValue(fixture.ShortInputs), sync.OnceValue(fixture.LogInputs)

// variants are surveys as they come when a site sheet says little, or much that is odd.
func variants(t *testing.T) map[string]*report.Survey {
	t.Helper()
	out := map[string]*report.Survey{}
	changes := map[string]func(*report.Inputs){
		"every rule set": func(in *report.Inputs) { in.Sheet.Limits.Apply = limits.Names() },
		"internal point": func(in *report.Inputs) { in.Sheet.Supply.Point = "internal" },
		"point unknown":  func(in *report.Inputs) { in.Sheet.Supply.Point = "" },
		"no demand current": func(in *report.Inputs) {
			in.Sheet.Supply.DemandCurrent, in.Sheet.Supply.DemandSource = 0, ""
		},
		"no nominal voltage": func(in *report.Inputs) { in.Sheet.Supply.NominalVoltage = 0 },
		"nothing declared":   func(in *report.Inputs) { in.Sheet.Supply = site.Supply{} },
		"medium voltage":     func(in *report.Inputs) { in.Sheet.Supply.NominalVoltage = 11000 },
		"stopped as a whole": func(in *report.Inputs) {
			in.Doubts = []fitness.Doubt{{Code: "no-lock", Weight: fitness.StopsVerdict, Text: "The fundamental could not be followed in 40 of 300 windows."}}
		},
		"much noise": func(in *report.Inputs) {
			for i := range in.Summary.Channels {
				for k := range in.Summary.Channels[i].Harmonics {
					in.Summary.Channels[i].Harmonics[k].Floor = 0.01 * in.Summary.Channels[i].Fundamental
				}
			}
		},
		"few orders": func(in *report.Inputs) {
			for i := range in.Summary.Channels {
				c := &in.Summary.Channels[i]
				c.TopOrder = 10
				for k := 10; k < len(c.Harmonics); k++ {
					h := &c.Harmonics[k]
					h.RMS, h.Pct, h.Angle, h.Floor, h.Above = math.NaN(), math.NaN(), math.NaN(), math.NaN(), false
				}
			}
		},
	}
	for name, change := range changes {
		sources := []func() report.Inputs{shortInputs, logInputs}
		if name == "much noise" || name == "few orders" {
			sources = []func() report.Inputs{fixture.ShortInputs}
		}
		for _, of := range sources {
			in := of()
			change(&in)
			in.Findings, in.RuleSets = nil, nil
			for _, set := range in.Sheet.Limits.Apply {
				r, err := limits.Load(set)
				if err != nil {
					t.Fatal(err)
				}
				in.RuleSets = append(in.RuleSets, r)
				in.Findings = append(in.Findings, r.Judge(in.Sheet, in.Summary)...)
			}
			in.Findings = fitness.Apply(in.Findings, in.Doubts)
			kind := "short, "
			if in.Summary.Intervals {
				kind = "log, "
			}
			out[kind+name] = report.Build(in)
		}
	}
	return out
}

// However little is declared, the words stay in order, the tables hold together, and silence is not taken for approval.
func TestVariants(t *testing.T) {
	for name, s := range variants(t) {
		checkWords(t, name, s)
		checkTables(t, name, s)
		checkCharts(t, name, s)
		if n := len(s.Headline.Answers); n < 2 {
			t.Errorf("%s: %d answers; there are voltages and currents", name, n)
		}
		within := false
		for _, f := range s.Findings {
			within = within || f.Result == limits.Within
		}
		if says := strings.Contains(strings.Join(s.Headline.Answers, " "), " is within "); says && !within {
			t.Errorf("%s: says within, and no finding is: %q", name, s.Headline.Answers)
		}
		if strings.HasPrefix(name, "short") && within {
			t.Errorf("%s: a minute is within", name)
		}
		writeJSON(t, s)
	}
}

// The demand current that an answer names is where the verdict turns: just above it everything is within the
// strictest row, a little below something exceeds.
func TestDemandThatKeeps(t *testing.T) {
	in := logInputs()
	set := in.RuleSets[0] // IEEE 519-2022
	in.Sheet.Supply.DemandCurrent = 0
	in.Findings = set.Judge(in.Sheet, in.Summary)
	text := strings.Join(report.Build(in).Headline.Answers, " ")
	m := regexp.MustCompile(`for a demand current from ([0-9.]+) A on`).FindStringSubmatch(text)
	if m == nil {
		t.Fatal(text)
	}
	turn, err := strconv.ParseFloat(m[1], 64)
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		demand  float64
		exceeds bool
	}{{1.01 * turn, false}, {0.99 * turn, true}} {
		in.Sheet.Supply.DemandCurrent = c.demand
		in.Sheet.Supply.ShortCircuitCurrent = 10 * c.demand // the strictest row
		exceeds := false
		for _, f := range set.Judge(in.Sheet, in.Summary) {
			exceeds = exceeds || f.Channel.Current() && f.Value > f.Limit
		}
		if exceeds != c.exceeds {
			t.Errorf("demand current %g A: exceeds is %v", c.demand, exceeds)
		}
	}
}
