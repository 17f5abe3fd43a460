package xlsx

import (
	"fmt"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

var results = []string{limits.Exceeds, limits.Undecided, limits.NotAssessed, limits.Within}

const summaryWidth = 140

// summarySheet answers first: the survey's sentences, then counts and highest shares, which follow the inputs.
func (b *book) summarySheet(s *sheet, verdicts []verdictRange) {
	for i, w := range []float64{24, 12, 16, 24, 13, 13, 13, 15, 11} {
		s.width(i+1, w)
	}
	s.title("Harmonics survey: " + b.title())
	s.note(b.origin(), summaryWidth)
	head := b.survey.Headline
	s.sentences("What was found", head.Answers)
	s.sentences("How good the record is", []string{head.Fitness})
	s.sentences("What next", head.Next)
	s.sentences("Not examined", head.Not)
	s.counts(verdicts)
	s.highest(verdicts)
	s.contents()
	s.gap()
	s.part("Safety")
	s.lines(report.SafetyShort)
	s.frozen = 1
}

// origin says what the survey is of and when it was made.
func (b *book) origin() string {
	r := b.survey.Recording
	out := report.Duration(float64(r.Duration))
	if r.Start != nil {
		out = r.Clock(0) + " to " + r.Clock(float64(r.Duration)) + " (" + out + ")"
	}
	return fmt.Sprintf("Recording: %s. Made by %s at %s.", out, b.program(), b.survey.MadeAt.UTC().Format("2006-01-02 15:04:05 UTC"))
}

func (s *sheet) lines(words string) {
	for _, line := range fold(clean(words), summaryWidth) {
		s.add(text(line))
	}
}

func (s *sheet) sentences(title string, list []string) {
	if len(list) == 0 || len(list) == 1 && list[0] == "" {
		return
	}
	s.gap()
	s.part(title)
	for i, words := range list {
		if len(list) > 1 {
			words = fmt.Sprintf("%d. %s", i+1, words)
		}
		s.lines(words)
	}
}

// counts tells for each rule set how many findings have which result, at the inputs as they are now.
func (s *sheet) counts(verdicts []verdictRange) {
	s.gap()
	s.part("Verdicts at the inputs of sheet Site")
	if len(s.book.survey.Findings) == 0 {
		s.lines("No limit was applied.")
		return
	}
	changed := "0"
	for _, v := range verdicts {
		if !v.empty() {
			changed += fmt.Sprintf("+SUMPRODUCT(--(%s<>%s))", v.column(verdictResult), v.column(verdictSurveyed))
		}
	}
	r := s.next()
	s.add(text("Results that differ from the survey's"), none, none, count(0).live(changed),
		result("the sentences above hold").live(fmt.Sprintf(`IF(%s=0,"the sentences above hold","inputs were changed: the sentences above are the survey's, the numbers below are not")`, at(4, r))))
	s.book.name("Results_changed", s.ref(4, r))
	s.add(heads("Rule set", "On", "exceeds", "undecided", "not assessed", "within", "all")...)
	for _, v := range verdicts {
		for _, set := range setsOf(v.lines) {
			n := s.next()
			row := []cell{text(report.RuleTitle(set)), text(kindOf(v))}
			for _, word := range results {
				// Not COUNTIFS, which reads a name such as ">5" or "a*" as a condition.
				row = append(row, count(countOf(v.lines, set, word)).live(fmt.Sprintf("SUMPRODUCT((%s=%s)*(%s=%s))", v.column(verdictSet), fixed(1, n), v.column(verdictResult), quote(word))))
			}
			row = append(row, count(countOf(v.lines, set, "")).live(fmt.Sprintf("SUM(%s:%s)", at(3, n), at(6, n))))
			s.add(row...)
		}
	}
}

func heads(words ...string) []cell {
	var out []cell
	for _, w := range words {
		out = append(out, text(w).as(headLook))
	}
	return out
}

func kindOf(v verdictRange) string {
	if v.lines[0].Channel.Voltage() {
		return "voltage"
	}
	return "current"
}

func setsOf(lines []line) []string {
	var out []string
	seen := map[string]bool{}
	for _, l := range lines {
		if !seen[l.RuleSet] {
			seen[l.RuleSet] = true
			out = append(out, l.RuleSet)
		}
	}
	return out
}

func countOf(lines []line, set, word string) int {
	n := 0
	for _, l := range lines {
		if l.RuleSet == set && (word == "" || l.Result == word) {
			n++
		}
	}
	return n
}

// shown is how many of the highest shares the summary lists.
const shown = 8

// highest lists the findings with the highest shares of their limits, at the inputs as they are now.
func (s *sheet) highest(verdicts []verdictRange) {
	for _, v := range verdicts {
		top := byShare(v.lines)
		if len(top) == 0 {
			continue
		}
		s.gap()
		s.part("Highest shares of the limit, " + kindOf(v))
		s.add(heads("Rule set", "Channel", "What", "Statistic", "Value, %", "Limit, %", "Share, %", "Result", "Row there")...)
		first := s.next()
		for i := range top {
			s.ranked(v, top[i], i+1)
		}
		s.book.emphasise(s, fmt.Sprintf("%s:%s", at(8, first), at(8, s.next()-1)), at(8, first))
	}
}

// ranked is the finding with the k-th highest share. The last column tells its row on the verdict sheet.
func (s *sheet) ranked(v verdictRange, l line, k int) {
	n := s.next()
	row := at(9, n)
	find := func(column int) string {
		return fmt.Sprintf(`IF(ISNUMBER(%s),INDEX(%s,%s-%d),"")`, row, v.column(column), row, v.first-1)
	}
	key := v.column(verdictKeyed)
	s.add(result(clean(report.RuleTitle(l.RuleSet))).live(find(verdictSet)), result(string(l.Channel)).live(find(verdictChannel)),
		result(report.QuantityName(l.Quantity, l.Order)).live(find(verdictWhat)), result(report.ShortStatistic(l.Statistic)).live(find(verdictStatistic)),
		number(l.Value, computedFormat).live(find(verdictValue)), number(l.Limit, limitFormat).live(find(verdictLimit)),
		number(l.Share, computedFormat).live(find(verdictShare)), result(l.Result).live(find(verdictResult)),
		count(v.row[keyOf(l.Finding)]).live(fmt.Sprintf(`IFERROR(MATCH(LARGE(%s,%d),%s,0)+%d,"")`, key, k, key, v.first-1)))
}

// contents lists the sheets.
func (s *sheet) contents() {
	s.gap()
	s.part("Sheets")
	for _, other := range s.book.sheets[1:] {
		n := s.add(text(other.name).as(linkLook), text(other.about))
		s.links = append(s.links, link{at(1, n), other.quoted() + "!A1"})
	}
}
