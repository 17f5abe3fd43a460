package fitness_test

import (
	"slices"
	"strings"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

func codes(doubts []fitness.Doubt) (out []string) {
	for _, d := range doubts {
		if d.Weight != fitness.Note {
			out = append(out, d.Code+" "+string(d.Channel))
		}
	}
	return out
}

func doubtsOf(t *testing.T, tr trial) []fitness.Doubt {
	t.Helper()
	d, err := tr.assess()
	if err != nil {
		t.Fatal(err)
	}
	return d
}

var usual = setting{site.Wye4, 50, 20, 1, 0.1}

// Declared generation may push power out: nothing is called reversed then, on one phase or on all.
func TestGenerationSuppressesReversal(t *testing.T) {
	for _, names := range [][]string{{"I1"}, {"I1", "I2", "I3"}} {
		tr := clean(usual)
		for _, n := range names {
			tr.turn(n)
		}
		if got := codes(doubtsOf(t, tr)); len(got) != len(names) || !strings.HasPrefix(got[0], "current-reversed") {
			t.Errorf("%v turned: %v", names, got)
		}
		tr.sheet.Supply.Generation = true
		for _, c := range codes(doubtsOf(t, tr)) {
			if strings.HasPrefix(c, "current-reversed") {
				t.Errorf("%v turned, with generation: %s", names, c)
			}
		}
	}
}

// All phases flowing out is said to be what generation does too; the proposal turns all three.
func TestAllReversedSaysSo(t *testing.T) {
	tr := clean(usual)
	for _, n := range []string{"I1", "I2", "I3"} {
		tr.turn(n)
	}
	for _, d := range doubtsOf(t, tr) {
		if d.Code == "current-reversed" {
			if !strings.Contains(d.Text, "generation on site") || strings.Count(strings.Join(d.Proposal, "\n"), "reversed = true") != 3 {
				t.Errorf("%q, proposal %q", d.Text, d.Proposal)
			}
		}
	}
}

// The proposal, put into the sheet, settles the matter.
func TestProposalsSettleIt(t *testing.T) {
	for name, spoil := range map[string]func(*trial){
		"one turned": func(tr *trial) { tr.turn("I2") },
		"two swapped": func(tr *trial) {
			x, y := tr.channel("I1"), tr.channel("I3")
			x.Harmonics, y.Harmonics = y.Harmonics, x.Harmonics
		},
		"swapped and turned": func(tr *trial) {
			x, y := tr.channel("I1"), tr.channel("I3")
			x.Harmonics, y.Harmonics = y.Harmonics, x.Harmonics
			tr.turn("I3")
		},
		"voltages swapped": func(tr *trial) {
			x, y := tr.channel("V2"), tr.channel("V3")
			x.Harmonics, y.Harmonics = y.Harmonics, x.Harmonics
		},
	} {
		tr := clean(usual)
		spoil(&tr)
		found := doubtsOf(t, tr)
		i := slices.IndexFunc(found, func(d fitness.Doubt) bool { return len(d.Proposal) > 0 })
		if i < 0 {
			t.Errorf("%s: nothing is proposed: %v", name, codes(found))
			continue
		}
		apply(&tr.sheet, found[i].Proposal)
		if got := codes(doubtsOf(t, tr)); len(got) > 0 {
			t.Errorf("%s: after %q there is still %v", name, found[i].Proposal, got)
		}
	}
}

// apply puts proposed channel tables in the place of those of the same source.
func apply(sheet *site.Sheet, lines []string) {
	var at *site.Channel
	value := func(line string) string { return strings.Trim(line[strings.Index(line, "=")+1:], ` "`) }
	for _, line := range lines {
		switch {
		case strings.HasPrefix(line, "source"):
			for i := range sheet.Channels {
				if sheet.Channels[i].Source == value(line) {
					at = &sheet.Channels[i]
					at.Reversed = false
				}
			}
		case strings.HasPrefix(line, "measures"):
			at.Measures = value(line)
		case strings.HasPrefix(line, "reversed"):
			at.Reversed = value(line) == "true"
		}
	}
}

// A doubt on a channel stops that channel's findings; light load stops the currents'; what is undecided for want of a week
// stays so.
func TestApplyStopsWhatIsAffected(t *testing.T) {
	findings := []limits.Finding{{Channel: "V1", Result: limits.Within}, {Channel: "I1", Result: limits.Exceeds, Value: 7}, {Channel: "I2", Result: limits.Undecided}}
	results := func(doubts ...fitness.Doubt) (out []string) {
		for _, f := range fitness.Apply(findings, doubts) {
			out = append(out, f.Result)
		}
		return out
	}
	for _, c := range []struct {
		doubt fitness.Doubt
		want  []string
	}{
		{fitness.Doubt{Code: "clipped", Weight: fitness.StopsVerdict, Channel: "I1"}, []string{limits.Within, limits.NotAssessed, limits.Undecided}},
		{fitness.Doubt{Code: "clipped", Weight: fitness.Caution, Channel: "I1"}, []string{limits.Within, limits.Exceeds, limits.Undecided}},
		{fitness.Doubt{Code: "light-load", Weight: fitness.StopsVerdict}, []string{limits.Within, limits.NotAssessed, limits.NotAssessed}},
		{fitness.Doubt{Code: "no-lock", Weight: fitness.StopsVerdict}, []string{limits.NotAssessed, limits.NotAssessed, limits.NotAssessed}},
	} {
		if got := results(c.doubt); !slices.Equal(got, c.want) {
			t.Errorf("%s, %s: %v, want %v", c.doubt.Code, c.doubt.Weight, got, c.want)
		}
	}
	if f := fitness.Apply(findings, []fitness.Doubt{{Code: "clipped", Weight: fitness.StopsVerdict, Channel: "I1", Text: "flat"}}); f[1].Value != 7 || f[1].Why != "flat" || findings[1].Result != limits.Exceeds {
		t.Error("the number is lost, or the reason, or the findings handed in are changed")
	}
}

// A jump of an hour is the clock's, and is told apart from other gaps.
func TestClockJump(t *testing.T) {
	sum := &harmonics.Summary{Nominal: 50, Rate: 12800, Duration: 8 * 86400, Gaps: []harmonics.Gap{{At: 100, Length: 3600}}, Windows: harmonics.WindowCount{Cycles: 10, Total: 10, Used: 10}}
	has := func(code string) bool {
		return slices.ContainsFunc(fitness.Assess(site.Sheet{}, wave.Header{}, nil, sum), func(d fitness.Doubt) bool { return d.Code == code })
	}
	if !has("clock-jump") || !has("gap") {
		t.Error("a gap of one hour raises no clock-jump")
	}
	sum.Gaps[0].Length = 1800
	if has("clock-jump") {
		t.Error("a gap of half an hour is called a clock-jump")
	}
	noted := fitness.Assess(site.Sheet{}, wave.Header{}, []wave.Note{{Code: "clock-jump", Text: "back by an hour"}}, &harmonics.Summary{Nominal: 50, Rate: 12800, Duration: 8 * 86400})
	if !slices.ContainsFunc(noted, func(d fitness.Doubt) bool { return d.Code == "clock-jump" && d.Text == "back by an hour" }) {
		t.Error("the loader's note of a clock jump is lost")
	}
}

func TestSpanHasItsWeights(t *testing.T) {
	for days, want := range map[float64]string{0.01: fitness.Caution, 2: fitness.Caution, 5: fitness.Note, 7: ""} {
		sum := &harmonics.Summary{Nominal: 50, Rate: 12800, Duration: days * 86400}
		for range int(days * 144) {
			sum.Tens = append(sum.Tens, harmonics.Interval{Complete: true})
		}
		got := ""
		for _, d := range fitness.Assess(site.Sheet{}, wave.Header{}, nil, sum) {
			if d.Code == "short-record" {
				got = d.Weight
			}
		}
		if got != want {
			t.Errorf("%g days: weight %q, want %q", days, got, want)
		}
	}
}
