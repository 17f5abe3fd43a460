package trend

import (
	"fmt"
	"math"
	"strings"

	"wavetally/report"
)

// answers gives the first page's four lines.
func answers(r *Report) []Answer {
	return []Answer{
		{"Are we within limits?", within(r)},
		{"Is it worse than before?", worse(r)},
		{"Did the change work?", worked(r)},
		{"How long until a limit?", untilLimit(r)},
	}
}

// Name says what a series is, for people: "order 5 on I1".
func (s *Series) Name() string { return report.QuantityName(s.Quantity, s.Order) + " on " + s.Channel }

func (s *Series) latest() (Month, bool) {
	for i := len(s.Months) - 1; i >= 0; i-- {
		if p95(s.Months[i]).Known() {
			return s.Months[i], true
		}
	}
	return Month{}, false
}

// Share is a month's 95th percentile over the limit, per cent.
func (s *Series) Share(m Month) float64 { return 100 * float64(p95(m)) / float64(s.Limit) }

func within(r *Report) string {
	var top *Series
	over, judged, hollow := 0, 0, false
	best := -1.0
	for i := range r.Series {
		s := &r.Series[i]
		m, ok := s.latest()
		if !ok || !s.Limit.Known() || m.Month != r.To {
			continue
		}
		judged++
		share := s.Share(m)
		if share > 100 {
			over++
		}
		if share > best {
			best, top, hollow = share, s, m.Hollow
		}
	}
	if top == nil {
		return "No limit was applied in " + r.To + "; name rule sets, fault level and demand current in the site sheet."
	}
	m, _ := top.latest()
	state := fmt.Sprintf("In %s no 95th percentile of the %d followed is over its limit", r.To, judged)
	if over > 0 {
		state = fmt.Sprintf("In %s %d of the %d 95th percentiles followed %s over the limit", r.To, over, judged, isAre(over))
	}
	text := fmt.Sprintf("%s; the highest is %s at %s %% of it (%s of %s).", state, top.Name(), report.Sig(best), report.Quantity(float64(p95(m)), top.Unit), report.Quantity(float64(top.Limit), top.Unit))
	if hollow {
		text += " The month is hollow: too little was recorded for a verdict."
	}
	return text
}

func isAre(n int) string {
	if n == 1 {
		return "is"
	}
	return "are"
}

func worse(r *Report) string {
	var up, down []string
	unchanged := 0
	for i := range r.Series {
		s := &r.Series[i]
		switch s.Answer {
		case "rising":
			up = append(up, fmt.Sprintf("%s by %s a year", s.Name(), rate(s)))
		case "falling":
			down = append(down, s.Name())
		case "no change shown":
			unchanged++
		}
	}
	var parts []string
	if len(up) > 0 {
		parts = append(parts, fmt.Sprintf("Rising: %s", head(up, 3)))
	}
	if len(down) > 0 {
		parts = append(parts, fmt.Sprintf("%s: %s", capital("falling", len(up) == 0), head(down, 3)))
	}
	switch {
	case unchanged > 0 && len(up)+len(down) == 0:
		parts = append(parts, fmt.Sprintf("No change is shown in any of the %d quantities tested", unchanged))
	case unchanged > 0:
		parts = append(parts, fmt.Sprintf("no change shown in %d others", unchanged))
	}
	if len(parts) == 0 {
		return fmt.Sprintf("Too few solid months to tell a trend from chance: at least %d are needed.", leastMonths)
	}
	text := strings.Join(parts, "; ") + "."
	return text + yearAgo(r)
}

// capital begins a sentence where first is set.
func capital(word string, first bool) string {
	if first {
		return strings.ToUpper(word[:1]) + word[1:]
	}
	return word
}

// rate writes a slope with its interval.
func rate(s *Series) string {
	text := report.Quantity(float64(s.Sen.Slope), s.Unit)
	if s.Sen.Low.Known() {
		text += fmt.Sprintf(" (95 %% between %s and %s)", report.Quantity(float64(s.Sen.Low), s.Unit), report.Quantity(float64(s.Sen.High), s.Unit))
	}
	return text
}

func head(list []string, most int) string {
	if len(list) <= most {
		return strings.Join(list, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(list[:most], ", "), len(list)-most)
}

// yearAgo compares the latest month's gravest quantity with the month before and the same month a year ago.
func yearAgo(r *Report) string {
	var top *Series
	best := -1.0
	for i := range r.Series {
		s := &r.Series[i]
		if m, ok := s.latest(); ok && s.Limit.Known() && s.Share(m) > best && m.Month == r.To {
			best, top = s.Share(m), s
		}
	}
	if top == nil {
		return ""
	}
	last := top.Months[len(top.Months)-1]
	find := func(name string) (Month, bool) {
		for _, m := range top.Months {
			if m.Month == name {
				return m, p95(m).Known()
			}
		}
		return Month{}, false
	}
	text := fmt.Sprintf(" %s was %s in %s", top.Name(), report.Quantity(float64(p95(last)), top.Unit), last.Month)
	n := len(top.Months)
	if n >= 2 {
		text += fmt.Sprintf(", %s in %s", report.Quantity(float64(p95(top.Months[n-2])), top.Unit), top.Months[n-2].Month)
	}
	var y, mo int
	fmt.Sscanf(last.Month, "%d-%d", &y, &mo)
	if m, ok := find(fmt.Sprintf("%04d-%02d", y-1, mo)); ok {
		text += fmt.Sprintf(", %s in %s", report.Quantity(float64(p95(m)), top.Unit), m.Month)
	}
	return text + "."
}

func worked(r *Report) string {
	if len(r.Events) == 0 {
		return "No dated event is in the logbook; add what was changed and when with `wavetally logbook event`."
	}
	var parts []string
	for _, e := range r.Events {
		var best *Series
		var step Step
		for i := range r.Series {
			for _, st := range r.Series[i].Steps {
				relative := math.Abs(float64(st.Change) / float64(st.Before))
				if st.Event == e.Text && float64(st.P) <= alpha && (best == nil || relative > math.Abs(float64(step.Change)/float64(step.Before))) {
					best, step = &r.Series[i], st
				}
			}
		}
		if best == nil {
			parts = append(parts, fmt.Sprintf("%s (%s): no step shown at it, or too few solid months on either side", e.Text, e.Date))
			continue
		}
		parts = append(parts, fmt.Sprintf("%s (%s): %s went from %s to %s in the median (rank-sum P = %s)", e.Text, e.Date, best.Name(),
			report.Quantity(float64(step.Before), best.Unit), report.Quantity(float64(step.After), best.Unit), report.Sig(float64(step.P))))
	}
	return strings.Join(parts, "; ") + ". A step at a date does not prove the cause."
}

func untilLimit(r *Report) string {
	var found []string
	for i := range r.Series {
		s := &r.Series[i]
		if s.Reaches == nil {
			continue
		}
		span := "between " + s.Reaches.Earliest + " and " + s.Reaches.Latest
		if s.Reaches.Latest == "" {
			span = "in " + s.Reaches.Earliest + " at the earliest"
		}
		found = append(found, fmt.Sprintf("%s reaches %s %s", s.Name(), report.Quantity(float64(s.Limit), s.Unit), span))
	}
	if len(found) == 0 {
		return "No date can be given: " + commonReason(r) + "."
	}
	return "If the present rate continues, " + head(found, 3) + "."
}

// commonReason is why most series with a limit get no date.
func commonReason(r *Report) string {
	count := map[string]int{}
	best := ""
	for i := range r.Series {
		s := &r.Series[i]
		if s.NoDate == "" || s.NoDate == "no limit applies" {
			continue
		}
		count[s.NoDate]++
		if best == "" || count[s.NoDate] > count[best] || count[s.NoDate] == count[best] && s.NoDate < best {
			best = s.NoDate
		}
	}
	if best == "" {
		return "no limit applies"
	}
	return best
}
