package pdf

import (
	"fmt"
	"strconv"
	"strings"

	"wavetally/harmonics/limits"
	"wavetally/report"
	"wavetally/report/chart"
)

// opening is what the first page answers: the verdict, the answers in sentences, how good the record is, what next,
// what was not examined, and the limits at a glance.
func (d *document) opening() []block {
	out := []block{d.title(), d.band()}
	h := d.s.Headline
	out = append(out, d.sentences("Against the limits", h.Answers)...)
	out = append(out, d.ladder()...)
	if h.Fitness != "" {
		out = append(out, d.item("The record", h.Fitness, "", 10))
	}
	for i, n := range h.Next {
		label, gap := "", 4.0
		if i == 0 {
			label, gap = "What next", 10
		}
		out = append(out, d.item(label, strconv.Itoa(i+1)+".  "+n, "", gap))
	}
	if len(h.Not) > 0 {
		out = append(out, d.small("Not examined", strings.Join(h.Not, " "), 10))
	}
	return append(out, d.small("Safety", report.SafetyShort, 8))
}

func (d *document) sentences(label string, texts []string) []block {
	var out []block
	for i, t := range texts {
		gap := 4.0
		if i == 0 {
			gap = 12
		} else {
			label = ""
		}
		out = append(out, d.item(label, t, "", gap))
	}
	return out
}

// title names the site and says when and by whom it was recorded.
func (d *document) title() block {
	m := d.pen.measure
	f := titleFace
	lines := wrap(m, f, siteName(d.s), d.full())
	if len(lines) > 2 {
		f.size = 14
		lines = wrap(m, f, siteName(d.s), d.full())
	}
	facts := wrap(m, tableFace, strings.Join(d.facts(), " · "), d.full())
	name := textHeight(f, len(lines))
	const above = 16.0
	return fixedBlock(0, above+name+5+textHeight(tableFace, len(facts)), func(y, h float64) {
		d.pen.text(headFace, chart.Faint, d.left, y+6, "Harmonic survey")
		d.pen.lines(f, chart.Ink, d.left, y+above, lines)
		d.pen.lines(tableFace, chart.Faint, d.left, y+above+name+5, facts)
	})
}

func (d *document) facts() []string {
	id, r := d.s.Site.Site, d.s.Recording
	var out []string
	for _, f := range []string{id.Location, id.Purpose} {
		if f != "" {
			out = append(out, f)
		}
	}
	span := "recorded over " + report.Duration(float64(r.Duration))
	if r.Start != nil {
		span += " from " + r.Clock(0)
	}
	out = append(out, span)
	if id.SurveyedBy != "" {
		out = append(out, "surveyed by "+id.SurveyedBy)
	}
	return out
}

// verdictWords say the verdict in a few words.
var verdictWords = map[string]string{
	limits.Exceeds: "Exceeds limits", limits.Within: "Within limits", limits.Undecided: "Undecided", limits.NotAssessed: "Not assessed",
}

// band is the verdict, large, with how many findings there are of each result.
func (d *document) band() block {
	verdict := d.s.Headline.Verdict
	words := verdictWords[verdict]
	if words == "" || len(d.s.Findings) == 0 {
		words = "No limit applied"
	}
	const height = 40.0
	return fixedBlock(14, height, func(y, h float64) {
		p := d.pen
		p.fill(chart.Tint, d.left, y, d.full(), h)
		p.symbol(verdict, d.left+12, y+11, 18)
		p.text(verdictFace, verdictInk(verdict), d.left+40, y+25.5, words)
		x := d.rightX() - 12
		for _, result := range []string{limits.NotAssessed, limits.Within, limits.Undecided, limits.Exceeds} {
			x = d.tally(result, x, y)
		}
	})
}

// tally sets the count of one result, ending at x, and returns where the next may end.
func (d *document) tally(result string, x, y float64) float64 {
	n := 0
	for _, f := range d.s.Findings {
		if f.Result == result {
			n++
		}
	}
	if n == 0 {
		return x
	}
	p := d.pen
	width := max(p.measure(tinyFace, result), p.measure(strongFace, strconv.Itoa(n))+markRoom)
	p.symbol(result, x-width, y+10.5, markSize)
	p.text(strongFace, chart.Ink, x-width+markRoom, y+17, strconv.Itoa(n))
	p.text(tinyFace, chart.Faint, x-width, y+28.5, result)
	return x - width - 16
}

// ladder shows, for each rule set, how near the worst order and the total of voltage and current are to their limit.
func (d *document) ladder() []block {
	rungs := d.rungs()
	if len(rungs) == 0 {
		return nil
	}
	height := float64(chart.LadderHeight(len(rungs)))
	caption := "Highest share of a limit, for each rule set."
	lines := wrap(d.pen.measure, sideFace, caption, d.side)
	b := fixedBlock(12, height, func(y, h float64) {
		d.pen.lines(sideFace, chart.Faint, d.left, y+1, lines)
		v, done := d.pen.vectors(d.mainX(), y, d.main(), h)
		chart.Ladder(v, rungs)
		done()
	})
	return []block{b}
}

// mostRungs keeps the ladder to what a first page has room for.
const mostRungs = 8

func (d *document) rungs() []chart.Rung {
	var out []chart.Rung
	at := map[string]int{}
	for _, f := range d.s.Findings {
		if !f.Share.Known() {
			continue
		}
		kind := map[bool]string{true: "V", false: "I"}[strings.HasPrefix(f.Channel, "V")]
		key := fmt.Sprint(f.RuleSet, kind, f.Order > 0)
		rung := chart.Rung{Name: report.QuantityName(f.Quantity, f.Order) + " on " + f.Channel + ", " + report.RuleTitle(f.RuleSet), Share: float64(f.Share), Result: f.Result}
		i, seen := at[key]
		if !seen {
			at[key] = len(out)
			out = append(out, rung)
		} else if rung.Share > out[i].Share {
			out[i] = rung
		}
	}
	return out[:min(len(out), mostRungs)]
}

// small is a paragraph in small print.
func (d *document) small(label, text string, gap float64) block {
	m := d.pen.measure
	side := wrap(m, sideHead, label, d.side)
	lines := wrap(m, tableFace, text, d.main())
	height := max(textHeight(tableFace, len(lines)), textHeight(sideHead, len(side)))
	return fixedBlock(gap, height, func(y, h float64) {
		d.pen.lines(sideHead, chart.Ink, d.left, y, side)
		d.pen.lines(tableFace, chart.Ink, d.mainX(), y+0.8, lines)
	})
}

func itoa(n int) string { return strconv.Itoa(n) }
