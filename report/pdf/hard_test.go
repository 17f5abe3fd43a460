package pdf_test

import (
	"bytes"
	"math"
	"reflect"
	"slices"
	"strings"
	"sync"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// weekInputs are made once, and changed only in copies.
var weekInputs = sync.OnceValue(fixture.WeekInputs)

// hard lists surveys: those of the fixture, and hard ones made from them, as real sites and sloppy sheets bring them.
var hard = map[string]func() *report.Survey{
	"week":            func() *report.Survey { return report.Build(weekInputs()) },
	"short":           fixture.Short,
	"tiny":            fixture.Tiny,
	"log":             fixture.Log,
	"eleven channels": func() *report.Survey { return report.Build(withRoles(weekInputs(), site.Roles)) },
	"voltages only": func() *report.Survey {
		return report.Build(withRoles(weekInputs(), []site.Role{"V1", "V2", "V3"}))
	},
	"one current":  func() *report.Survey { return report.Build(withRoles(fixture.ShortInputs(), []site.Role{"I2"})) },
	"no limits":    func() *report.Survey { return report.Build(withoutLimits(weekInputs())) },
	"read back":    func() *report.Survey { return readBack(report.Build(weekInputs())) },
	"not measured": func() *report.Survey { return notMeasured(readBack(report.Build(weekInputs()))) },
	"long words":   longWords,
}

// surveys are the hard ones, built once for all tests.
var surveys = sync.OnceValue(func() map[string]*report.Survey {
	out := map[string]*report.Survey{}
	for name, build := range hard {
		out[name] = build()
	}
	return out
})

// withRoles is the same recording with other channels: each takes the data of a channel of its kind and phase.
func withRoles(in report.Inputs, roles []site.Role) report.Inputs {
	old := in.Summary
	sum := *old
	var from []int
	for _, r := range roles {
		from = append(from, sourceOf(old, r))
	}
	sum.Channels, sum.Facts, in.Sheet.Channels = nil, nil, nil
	for i, r := range roles {
		c := old.Channels[from[i]]
		c.Role = r
		if r == "VN" {
			c.Unit = "V"
		}
		sum.Channels, sum.Facts = append(sum.Channels, c), append(sum.Facts, old.Facts[from[i]])
		in.Sheet.Channels = append(in.Sheet.Channels, site.Channel{Source: "analogue input " + string(r), Measures: string(r), Scale: 1})
	}
	sum.Threes, sum.Tens, sum.Days = intervalsOf(old.Threes, from), intervalsOf(old.Tens, from), slices.Clone(old.Days)
	for i, d := range sum.Days {
		sum.Days[i].Channels = picked(d.Channels, from)
	}
	capture := *old.Capture
	capture.Samples, capture.Rebuilt = picked(capture.Samples, from), picked(capture.Rebuilt, from)
	capture.Residual, capture.Lines = picked(capture.Residual, from), picked(capture.Lines, from)
	sum.Capture = &capture
	if old.Spectrogram != nil {
		s := *old.Spectrogram
		s.Levels = picked(s.Levels, from)
		sum.Spectrogram = &s
	}
	if len(roles) < 6 {
		sum.Power = nil
	}
	in.Findings = findingsFor(in.Findings, old, roles, from)
	in.Summary = &sum
	return in
}

func sourceOf(sum *harmonics.Summary, r site.Role) int {
	return slices.IndexFunc(sum.Channels, func(c harmonics.ChannelSummary) bool {
		if r.Neutral() {
			return c.Role == "IN"
		}
		return c.Role.Voltage() == r.Voltage() && c.Role.Phase() == r.Phase()
	})
}

func picked[T any](all []T, from []int) []T {
	var out []T
	for _, i := range from {
		out = append(out, all[i])
	}
	return out
}

func intervalsOf(ivs []harmonics.Interval, from []int) []harmonics.Interval {
	out := slices.Clone(ivs)
	for i, iv := range ivs {
		out[i].Channels = picked(iv.Channels, from)
	}
	return out
}

func findingsFor(all []limits.Finding, sum *harmonics.Summary, roles []site.Role, from []int) []limits.Finding {
	var out []limits.Finding
	for i, r := range roles {
		for _, f := range all {
			if f.Channel == sum.Channels[from[i]].Role && !r.Neutral() {
				f.Channel = r
				out = append(out, f)
			}
		}
	}
	return out
}

func withoutLimits(in report.Inputs) report.Inputs {
	in.Findings, in.RuleSets, in.Sheet.Limits.Apply = nil, nil, nil
	return in
}

// readBack is a survey as another program gets it: from its JSON, without the series behind charts.
func readBack(s *report.Survey) *report.Survey {
	var b bytes.Buffer
	if err := report.WriteJSON(&b, s); err != nil {
		panic(err)
	}
	out, err := report.ReadJSON(&b)
	if err != nil {
		panic(err)
	}
	return out
}

// notMeasured takes every measured number away, and half of them with infinities instead.
func notMeasured(s *report.Survey) *report.Survey {
	n := 0
	var walk func(v reflect.Value)
	walk = func(v reflect.Value) {
		switch {
		case v.Type() == reflect.TypeFor[report.Number]():
			n++
			v.SetFloat([]float64{math.NaN(), math.Inf(1)}[n%2])
		case v.Kind() == reflect.Struct && v.CanSet():
			for i := range v.NumField() {
				if v.Type().Field(i).IsExported() {
					walk(v.Field(i))
				}
			}
		case v.Kind() == reflect.Slice:
			for i := range v.Len() {
				walk(v.Index(i))
			}
		case v.Kind() == reflect.Pointer && !v.IsNil():
			walk(v.Elem())
		}
	}
	site, summary := s.Site, s.Summary
	s.Summary = nil
	walk(reflect.ValueOf(s).Elem())
	s.Site, s.Summary = site, summary
	return s
}

// longWords has names in scripts that the fonts lack, texts longer than a page, and a plant with much to say.
func longWords() *report.Survey {
	in := weekInputs()
	in.Sheet.Channels = slices.Clone(in.Sheet.Channels)
	in.Sheet.Site.Name = "Zoë's Großbäckerei № 7 漢字 \U0001F600 \u202Eright to left\u202C " + strings.Repeat("and a name that goes on ", 20)
	in.Sheet.Site.Location = strings.Repeat("Ünterstraße-", 60)
	in.Sheet.Site.SurveyedBy = strings.Repeat("A. Person ", 30)
	in.Sheet.Site.Purpose = strings.Repeat("to see whether it holds; ", 150)
	in.Sheet.Supply.ShortCircuitSource = strings.Repeat("a letter of many pages ", 40)
	in.Sheet.Channels[0].Source = strings.Repeat("CH1_with_a_name_", 8)
	in.Plant = []report.Screening{
		{Topic: "transformer", Name: "Permissible load of the declared transformer", Value: 0.87, Unit: "pu", Text: "IEEE C57.110: eddy losses grow with the square of the order."},
		{Topic: "transformer", Name: "K-factor", Value: report.Number(math.NaN()), Unit: "", Text: "Not measured, and said so."},
		{Topic: "resonance", Name: "Lowest parallel-resonance order", Value: 10.4, Unit: "", Text: strings.Repeat("Each combination of steps was tried. ", 30)},
	}
	in.Doubts = append(slices.Clone(in.Doubts),
		fitness.Doubt{Code: "current-reversed", Weight: fitness.Caution, Channel: "I2", Text: strings.Repeat("The sensor on I2 may point the wrong way. ", 120),
			Evidence: map[string]float64{"angle_deg": 181, "p_w": -41000}, Proposal: []string{"[[channel]]\nsource = \"CH5\"\nmeasures = \"I2\"\nreversed = true"}})
	return report.Build(in)
}
