package report

import "wavetally/harmonics/limits"

// headlineOf finds the words for page 1. Sentences carry numbers; none names a cause or a party, for a recording at
// one point shows neither.
func headlineOf(s *Survey) Headline {
	return Headline{
		Verdict: verdictOf(s.Findings),
		Answers: answersOf(s),
		Fitness: fitnessOf(s),
		Next:    nextOf(s),
		Not:     notExaminedOf(s),
	}
}

// verdictOf sums all findings up in one word: exceeds when anything does, within only when everything is, not assessed
// when nothing could be judged, and undecided for all between.
func verdictOf(findings []Finding) string {
	n := count(findings)
	switch {
	case n[limits.Exceeds] > 0:
		return limits.Exceeds
	case n[limits.NotAssessed] == len(findings):
		return limits.NotAssessed
	case n[limits.Within] == len(findings):
		return limits.Within
	}
	return limits.Undecided
}

// count counts findings by result.
func count(findings []Finding) map[string]int {
	n := map[string]int{}
	for _, f := range findings {
		n[f.Result]++
	}
	return n
}
