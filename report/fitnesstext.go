package report

import (
	"fmt"
	"slices"
	"strings"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
)

// fitnessOf says in one sentence how good the record is: how long, how much of it counts, and what weakens it.
func fitnessOf(s *Survey) string {
	parts := []string{coverage(s)}
	if text := stopped(s.Doubts); text != "" {
		parts = append(parts, text)
	} else if len(s.Findings) == 0 {
		parts = append(parts, "no limit was applied")
	} else if some, only := s.Indicative(); only {
		parts = append(parts, "indicative only, since the limits are for longer records")
	} else if some {
		parts = append(parts, "long enough for some of the limits, indicative for the others")
	} else {
		parts = append(parts, "nothing found that stops a verdict")
	}
	if text := weaker(s.Doubts); text != "" {
		parts = append(parts, text)
	}
	return strings.Join(parts, "; ") + "."
}

func coverage(s *Survey) string {
	text := Duration(float64(s.Recording.Duration)) + " recorded"
	if s.Recording.Kind == "intervals" {
		text += " as interval values"
	}
	if s.Summary == nil {
		return text
	}
	ivs, name := longest(s.Summary)
	if len(ivs) == 0 {
		w := s.Recording.Windows
		return text + fmt.Sprintf(", %d of %s of %s used", w.Used, plural(w.Total, "window"), plural(w.Cycles, "cycle"))
	}
	n := validCount(ivs)
	return text + fmt.Sprintf(", %d of %d intervals of %s valid (%s %%)", n, len(ivs), name, Sig(100*float64(n)/float64(len(ivs))))
}

// longest are the 10 min intervals where a complete one was recorded, else those of 3 s.
func longest(sum *harmonics.Summary) ([]harmonics.Interval, string) {
	if validCount(sum.Tens) > 0 {
		return sum.Tens, "10 min"
	}
	return sum.Threes, "3 s"
}

// Indicative reports whether some findings rest on less than their rule asks for, and whether there is nothing but such.
func (s *Survey) Indicative() (some, only bool) {
	some = slices.ContainsFunc(s.Findings, func(f Finding) bool { return f.Indicative })
	decided := slices.ContainsFunc(s.Findings, func(f Finding) bool { return f.Result == limits.Within || f.Result == limits.Exceeds })
	return some, some && !decided
}

// stopped names what keeps channels, or the whole record, from being judged.
func stopped(doubts []Doubt) string {
	var channels, codes []string
	for _, d := range doubts {
		if d.Weight != fitness.StopsVerdict {
			continue
		}
		if d.Channel == "" {
			return "not fit to judge by (" + codeWords(d.Code) + ")"
		}
		channels, codes = once(channels, d.Channel), once(codes, codeWords(d.Code))
	}
	if len(channels) == 0 {
		return ""
	}
	return fmt.Sprintf("not fit to judge %s by (%s)", list(channels), strings.Join(codes, ", "))
}

// weaker counts cautions and notes and names the cautions.
func weaker(doubts []Doubt) string {
	var cautions []string
	n := map[string]int{}
	for _, d := range doubts {
		n[d.Weight]++
		if d.Weight == fitness.Caution {
			cautions = once(cautions, codeWords(d.Code))
		}
	}
	var parts []string
	if k := n[fitness.Caution]; k > 0 {
		parts = append(parts, plural(k, "caution")+" ("+strings.Join(cautions, ", ")+")")
	}
	if k := n[fitness.Note]; k > 0 {
		parts = append(parts, plural(k, "note"))
	}
	return list(parts)
}

// codeWords writes a doubt's code as words: "short-record" is "short record".
func codeWords(code string) string { return strings.ReplaceAll(code, "-", " ") }

func plural(n int, word string) string {
	if n == 1 {
		return "1 " + word
	}
	return fmt.Sprintf("%d %ss", n, word)
}

func once(words []string, word string) []string {
	if slices.Contains(words, word) {
		return words
	}
	return append(words, word)
}
