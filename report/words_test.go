package report_test

import (
	"fmt"
	"math"
	"math/rand/v2"
	"regexp"
	"strings"
	"testing"

	"wavetally/harmonics/limits"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// The words of page 1 and of the method, as a person reads them.
func TestWordsGolden(t *testing.T) {
	for name, s := range surveys() {
		var b strings.Builder
		h := s.Headline
		fmt.Fprintf(&b, "%s\n\n%s\n\n%s\n\nNext\n%s\n\nNot examined\n%s\n\nMethod\n", h.Verdict, strings.Join(h.Answers, "\n"), h.Fitness, strings.Join(h.Next, "\n"), strings.Join(h.Not, "\n"))
		for _, m := range s.Method {
			fmt.Fprintf(&b, "%s: %s [%s]\n", m.Topic, m.Text, m.Source)
		}
		golden(t, "words-"+name+".txt", b.String())
	}
}

func allWords(s *report.Survey) []string {
	h := s.Headline
	out := append([]string{h.Fitness}, h.Answers...)
	out = append(append(out, h.Next...), h.Not...)
	for _, m := range s.Method {
		out = append(out, m.Text)
	}
	for _, c := range report.Charts(s) {
		out = append(out, c.Title, c.Caption)
	}
	for _, c := range report.Tables(s) {
		out = append(append(out, c.Title), c.Notes...)
	}
	return append(out, s.Cautions...)
}

func TestHouseRules(t *testing.T) {
	for name, s := range surveys() {
		checkWords(t, name, s)
	}
}

var (
	banned = regexp.MustCompile(`(?i)\b(severe|excellent|poor|good|bad|high|serious|terrible|fault of|blame|because of the|caused by|responsible for|guilty|NaN|Inf|nil)\b|%!`)
	digit  = regexp.MustCompile(`\d`)
)

// House rules for sentences (shared practice, common in the trade): no adjective in place of a number, no blame, no
// claim of cause, no NaN; and at most three things to do, each with how to verify it. What rule files and doubts say
// is theirs to word.
func checkWords(t *testing.T, name string, s *report.Survey) {
	t.Helper()
	for _, text := range allWords(s) {
		if m := banned.FindString(text); m != "" {
			t.Errorf("%s: %q in %q", name, m, text)
		}
		if strings.Contains(text, "  ") || strings.Contains(text, "..") || strings.Contains(text, " ,") || strings.TrimSpace(text) != text {
			t.Errorf("%s: untidy: %q", name, text)
		}
	}
	if n := len(s.Headline.Next); n < 1 || n > 3 {
		t.Errorf("%s: %d things to do", name, n)
	}
	for _, a := range s.Headline.Next {
		if !strings.Contains(a, "To verify: ") {
			t.Errorf("%s: no verification: %q", name, a)
		}
	}
	for _, a := range append(s.Headline.Answers, s.Headline.Fitness) {
		if !digit.MatchString(a) && !strings.HasPrefix(a, "Whether ") {
			t.Errorf("%s: an answer without a number: %q", name, a)
		}
	}
}

func TestShortRecordNeverSaysWithin(t *testing.T) {
	h := fixture.Short().Headline
	text := strings.Join(append(h.Answers, h.Fitness), " ")
	if !strings.Contains(text, "indicative only") || !strings.Contains(text, "Nothing can be said to be within") || strings.Contains(text, " is within ") {
		t.Error(text)
	}
}

func TestVerdict(t *testing.T) {
	for _, c := range []struct {
		want    string
		results []string
	}{
		{limits.NotAssessed, nil},
		{limits.Within, []string{limits.Within, limits.Within}},
		{limits.Exceeds, []string{limits.Within, limits.NotAssessed, limits.Undecided, limits.Exceeds}},
		{limits.Undecided, []string{limits.Within, limits.Undecided}},
		{limits.Undecided, []string{limits.Within, limits.NotAssessed}},
		{limits.Undecided, []string{limits.Undecided, limits.NotAssessed}},
		{limits.NotAssessed, []string{limits.NotAssessed}},
	} {
		in := fixture.TinyInputs()
		for _, r := range c.results {
			in.Findings = append(in.Findings, limits.Finding{RuleSet: "x", Channel: "V1", Quantity: "thd", Result: r, Value: 1, Limit: 2, Share: 50, Unit: "%"})
		}
		if got := report.Build(in).Headline.Verdict; got != c.want {
			t.Errorf("%q: %q, want %q", c.results, got, c.want)
		}
	}
}

func TestFirmness(t *testing.T) {
	f := report.Finding{Statistic: "95th percentile of 10 min values over a week", Value: 4.8, SampleLow: 4.5, SampleHigh: 5.1, Limit: 5, Unit: "%"}
	const want = "95th percentile 4.8 %, between 4.5 % and 5.1 % with 95 % confidence, limit 5 %"
	if got := report.Firmness(f); got != want {
		t.Errorf("%q, want %q", got, want)
	}
	f.SampleLow = report.NaN
	if got := report.Firmness(f); strings.Contains(got, "between") {
		t.Errorf("%q without bounds", got)
	}
}

// A limit that the value just exceeds must not read as equal to it.
func TestTitlesTellValueFromLimit(t *testing.T) {
	in := fixture.TinyInputs()
	in.Findings = []limits.Finding{{RuleSet: "en-50160", Channel: "V1", Quantity: "harmonic", Order: 5, Statistic: "95th percentile of 10 min values over a week",
		Value: 6.004, SampleLow: math.NaN(), SampleHigh: math.NaN(), OverPct: math.NaN(), Limit: 6, Share: 100.0667, Unit: "%", Basis: "fundamental", BasisSize: math.NaN(), Result: limits.Exceeds}}
	if got := report.Build(in).Headline.Answers[0]; !strings.Contains(got, "6.004 %") {
		t.Error(got)
	}
}

// Noise of many windows, averaged as phasors, falls as TimeToSee says: simulated with complex white noise.
func TestTimeToSeeBySimulation(t *testing.T) {
	const floor, limit, window = 1.0, 0.4, 0.2
	need := report.TimeToSee(floor, limit, window)
	if want := 5.0; math.Abs(need-want) > 1e-12 { // 0.2 s × (2 × 1 / 0.4)²
		t.Fatalf("%g s, want %g s", need, want)
	}
	windows := int(math.Round(need / window))
	rng := rand.New(rand.NewPCG(1, 2))
	const trials = 4000
	sum := 0.0
	for range trials {
		var re, im float64
		for range windows {
			re += rng.NormFloat64() * floor / math.Sqrt2
			im += rng.NormFloat64() * floor / math.Sqrt2
		}
		sum += (re*re + im*im) / float64(windows*windows)
	}
	got := math.Sqrt(sum / trials)
	const tolerance = 0.03 // of the rms: four sigma of 4000 trials
	if want := limit / 2; math.Abs(got/want-1) > tolerance {
		t.Errorf("noise of the mean is %.4f after %g s, want half the limit %.4f", got, need, want)
	}
	if got := report.TimeToSee(0.1, 1, window); got != window {
		t.Errorf("a floor far below the limit asks for %g s, want one window", got)
	}
}
