package pdf

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
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
		out = append(out, d.item("The record", h.Fitness, "", 10)...)
	}
	for i, n := range h.Next {
		label, gap := "", 4.0
		if i == 0 {
			label, gap = "What next", 10
		}
		out = append(out, d.item(label, strconv.Itoa(i+1)+".  "+n, "", gap)...)
	}
	out = append(out, d.small("Not examined", h.Not, 10)...)
	out = append(out, d.small("Safety", []string{report.SafetyShort}, 8)...)
	return append(out, d.keyFigure(out)...)
}

// keyFigure is the chart that shows the answer best, if the first page has room for it. It is then not shown again.
func (d *document) keyFigure(above []block) []block {
	i := slices.IndexFunc(d.charts, func(c report.Chart) bool { return c.Key == d.keyChart() })
	if i < 0 {
		return nil
	}
	figure := d.figure(d.charts[i])
	if least, _ := heights(append(above, figure), true); least > d.pen.height-topMargin-bottomMargin {
		return nil
	}
	d.charts = slices.Delete(d.charts, i, i+1)
	figure.most *= 1.7 // it may take what is left of the page
	return []block{figure}
}

// keyChart is the spectrum of what is nearest to its limit, or farthest beyond; without limits that of the currents.
func (d *document) keyChart() string {
	worst, key := -1.0, ""
	for _, f := range d.s.Findings {
		if kind := kindOf(f); kind != "" && f.Order > 0 && float64(f.Share) > worst {
			worst, key = float64(f.Share), "spectrum-"+kind+"-"+f.RuleSet
		}
	}
	if key != "" {
		return key
	}
	for _, c := range d.charts {
		if c.Key == "spectrum-I" || key == "" && c.Kind == report.SpectrumChart {
			key = c.Key
		}
	}
	return key
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
		out = append(out, d.item(label, t, "", gap)...)
	}
	return out
}

// title names the site and says when and by whom it was recorded. What is too long to be a title is cut here, and
// stands in full among the site's data.
func (d *document) title() block {
	m := d.pen.measure
	f := titleFace
	name := wrap(m, f, siteName(d.s), d.full())
	for _, size := range []float64{14, 10} {
		if len(name) > 2 {
			f.size = size
			name = wrap(m, f, siteName(d.s), d.full())
		}
	}
	name = cut(name, 4)
	var facts []string
	for _, t := range d.facts() {
		facts = append(facts, cut(wrap(m, tableFace, strings.Join(t, " · "), d.full()), 3)...)
	}
	high := textHeight(f, len(name))
	const above = 16.0
	return fixedBlock(0, above+high+5+textHeight(tableFace, len(facts)), func(y, h float64) {
		d.pen.text(headFace, chart.Faint, d.left, y+6, "Harmonic survey")
		d.pen.lines(f, chart.Ink, d.left, y+above, name)
		d.pen.lines(tableFace, chart.Faint, d.left, y+above+high+5, facts)
	})
}

// cut keeps the first lines, ending in an ellipsis where some were left out.
func cut(lines []string, most int) []string {
	if len(lines) <= most {
		return lines
	}
	lines = slices.Clone(lines[:most])
	last := []rune(lines[most-1])
	lines[most-1] = string(last[:max(0, len(last)-2)]) + "…"
	return lines
}

// facts are what stands under the site's name: where and why, then when and by whom.
func (d *document) facts() [][]string {
	id, r := d.s.Site.Site, d.s.Recording
	var where []string
	for _, f := range []string{id.Location, id.Purpose} {
		if f != "" {
			where = append(where, f)
		}
	}
	when := "recorded over " + report.Duration(float64(r.Duration))
	if r.Start != nil {
		when += " from " + r.Clock(0)
	}
	who := []string{when}
	if id.SurveyedBy != "" {
		who = append(who, "surveyed by "+id.SurveyedBy)
	}
	if len(where) == 0 {
		return [][]string{who}
	}
	return [][]string{where, who}
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
	size := chart.LadderSize(len(rungs))
	lines := wrap(d.pen.measure, sideFace, "Highest share of a limit, for each rule set.", d.side)
	return []block{{
		gap: 12, least: float64(size.Least), natural: float64(size.Natural), most: float64(size.Most),
		draw: func(y, h float64) {
			d.pen.lines(sideFace, chart.Faint, d.left, y+1, lines)
			v, done := d.pen.vectors(d.mainX(), y, d.main(), h)
			chart.Ladder(v, rungs)
			done()
		},
	}}
}

// kindOf is "V" or "I" for a finding on a phase, as charts are keyed; "" for the neutral.
func kindOf(f report.Finding) string {
	switch role := site.Role(f.Channel); {
	case role.Neutral():
		return ""
	case role.Voltage():
		return "V"
	case role.Current():
		return "I"
	}
	return ""
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
		key := fmt.Sprint(f.RuleSet, kindOf(f), f.Order > 0)
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

// small are paragraphs in small print.
func (d *document) small(label string, texts []string, gap float64) []block {
	var out []block
	for _, text := range texts {
		out = append(out, d.paragraph(label, wrap(d.pen.measure, tableFace, text, d.main()), tableFace, nil, gap)...)
		label, gap = "", 1
	}
	return out
}
