// Package terminal writes a survey's summary for a terminal: plain text that fits a screen of 80 by 24 and needs
// neither colour nor UTF-8.
//
//	Kestrel Lane bakery, board MB-1
//	2026-03-02 00:00:00 UTC, 7 d, 50.002 Hz; V1 V2 V3 I1 I2 I3 IN
//
//	EXCEEDS: 4 exceed, 1 is undecided, 150 are not assessed and 670 are within, of 825
//
//	[ok] Voltage  IEEE 519-2022  order 5 on V2   3.82 %   limit 5 %    76.4 % of it
//	[!!] Current  IEEE 519-2022  TDD on I2       10.6 %   limit 8 %     132 % of it
package terminal

import (
	"fmt"
	"io"
	"slices"
	"strings"
	"unicode"
	"unicode/utf8"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

// Bounds of the page: a line as wide as the screen wraps on some terminals, and the prompt needs a line of its own.
const (
	narrowest = 40
	widest    = 100
	height    = 23
)

// Write writes the summary in lines shorter than width, at most 23 of them at a width of 80.
func Write(w io.Writer, s *report.Survey, width int) error {
	p := page{width: max(narrowest, min(widest, width)) - 1}
	p.head(s)
	tail := page{width: p.width}
	tail.hang("Record: ", s.Headline.Fitness)
	safety := page{width: p.width}
	safety.hang("Safety: ", report.SafetyShort)

	room := height - len(p.lines) - len(tail.lines) - len(safety.lines) - 2 // blank lines around the rows
	rows := verdictRows(s)
	const actionRoom = 4 // lines kept for what to do next
	rows = rows[:min(len(rows), max(1, room-actionRoom))]
	p.add(table(rows, p.width)...)
	p.add("")
	p.add(tail.lines...)
	p.next(s.Headline.Next, height-len(p.lines)-len(safety.lines))
	p.add(safety.lines...)
	_, err := io.WriteString(w, strings.Join(p.lines, "\n")+"\n")
	return err
}

// A page gathers lines.
type page struct {
	width int
	lines []string
}

func (p *page) add(lines ...string) {
	for _, l := range lines {
		p.lines = append(p.lines, strings.TrimRight(l, " "))
	}
}

// hang adds a paragraph whose later lines stand under the text after its label.
func (p *page) hang(label, text string) {
	for i, l := range wrap(plain(text), p.width-len(label)) {
		if i > 0 {
			label = strings.Repeat(" ", len(label))
		}
		p.add(label + l)
	}
}

func (p *page) head(s *report.Survey) {
	name := s.Site.Site.Name
	if name == "" {
		name = "Site not declared"
	}
	p.add(wrap(plain(name), p.width)[0])
	r := s.Recording
	about := report.Duration(float64(r.Duration))
	if r.Start != nil {
		about = r.Clock(0) + ", " + about
	}
	if r.Frequency.Mean.Known() {
		about += fmt.Sprintf(", %.3f Hz", float64(r.Frequency.Mean))
	}
	var channels []string
	for _, c := range s.Channels {
		channels = append(channels, c.Name)
	}
	p.add(wrap(plain(about+"; "+strings.Join(channels, " ")), p.width)...)
	p.add("")
	verdict := strings.ToUpper(s.Headline.Verdict)
	if _, only := s.Indicative(); only {
		verdict += ", indicative only"
	}
	p.hang(verdict+": ", report.Tally(s))
	p.add("")
}

// next adds as many actions as the room allows, and says how many there are besides.
func (p *page) next(actions []string, room int) {
	shown := 0
	for i, a := range actions {
		one := page{width: p.width}
		one.hang(fmt.Sprintf("Next %d: ", i+1), a)
		left := room - len(one.lines)
		if left < 0 || (left == 0 && i < len(actions)-1) {
			break
		}
		p.add(one.lines...)
		room -= len(one.lines)
		shown++
	}
	if more := len(actions) - shown; more > 0 && room > 0 {
		p.add(fmt.Sprintf("        (%d more to do in the report)", more))
	}
}

// verdictRows are one row for each rule set on voltage and on current, then what else is over a limit.
func verdictRows(s *report.Survey) [][]string {
	var rows [][]string
	var led []report.Finding
	for _, l := range report.Leads(s) {
		led = append(led, l.Finding)
		if !l.Finding.Value.Known() || !l.Finding.Limit.Known() {
			rows = append(rows, []string{signs[l.Finding.Result] + " " + l.Answer})
			continue
		}
		rows = append(rows, row(l.Group, l.RuleSet, l.Finding))
	}
	for _, f := range report.Exceeding(s) {
		if !slices.ContainsFunc(led, func(g report.Finding) bool { return same(f, g) }) {
			rows = append(rows, row("", report.RuleTitle(f.RuleSet), f))
		}
	}
	if len(rows) == 0 {
		for _, a := range s.Headline.Answers {
			rows = append(rows, []string{a})
		}
	}
	return rows
}

func same(a, b report.Finding) bool {
	return a.RuleSet == b.RuleSet && a.Channel == b.Channel && a.Quantity == b.Quantity && a.Order == b.Order
}

// signs are the results in the form that a reader without colour takes in at a glance.
var signs = map[string]string{limits.Within: "[ok]", limits.Exceeds: "[!!]", limits.Undecided: "[??]", limits.NotAssessed: "[--]"}

func row(group, set string, f report.Finding) []string {
	value, limit := report.Apart(float64(f.Value), float64(f.Limit))
	what := report.QuantityName(f.Quantity, f.Order) + " on " + f.Channel
	return []string{signs[f.Result], group, set, what, value + " " + f.Unit, "limit " + limit + " " + f.Unit, report.Sig(float64(f.Share)) + " % of it"}
}

// table aligns rows in columns; a row of a single cell is text and wraps.
func table(rows [][]string, width int) []string {
	var widths []int
	for _, r := range rows {
		for i, c := range r {
			if len(r) == 1 {
				continue
			}
			if i == len(widths) {
				widths = append(widths, 0)
			}
			widths[i] = max(widths[i], utf8.RuneCountInString(plain(c)))
		}
	}
	var out []string
	for _, r := range rows {
		if len(r) == 1 {
			out = append(out, wrap(plain(r[0]), width)...)
			continue
		}
		line := ""
		for i, c := range r {
			c = plain(c)
			line += c + strings.Repeat(" ", widths[i]-utf8.RuneCountInString(c)+1)
		}
		out = append(out, wrap(strings.TrimRight(line, " "), width)...)
	}
	return out
}

// wrap breaks text into lines of at most width characters, at spaces where it can. Text that fits keeps its spacing.
func wrap(text string, width int) []string {
	if utf8.RuneCountInString(text) <= width {
		return []string{text}
	}
	var lines []string
	line := ""
	for word := range strings.FieldsSeq(text) {
		for utf8.RuneCountInString(word) > width {
			head := string([]rune(word)[:width])
			if line != "" {
				lines = append(lines, line)
				line = ""
			}
			lines = append(lines, head)
			word = word[len(head):]
		}
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) <= width:
			line += " " + word
		default:
			lines = append(lines, line)
			line = word
		}
	}
	return append(lines, line)
}

// ascii are the program's own signs for terminals that do not know them. What users wrote, such as names, stays.
var ascii = strings.NewReplacer("–", "-", "—", "-", "…", "...", "°", " deg", "µ", "u", "μ", "u", "Ω", "ohm", "√", "sqrt", "×", "x", "·", "*",
	"²", "2", "≥", ">=", "≤", "<=", "’", "'", "¹", "(1)")

// plain makes text safe to print: no line breaks, and nothing that a terminal takes for a command.
func plain(text string) string {
	return ascii.Replace(strings.Map(func(r rune) rune {
		switch {
		case unicode.IsSpace(r):
			return ' '
		case unicode.In(r, unicode.Cc, unicode.Cf):
			return -1
		}
		return r
	}, strings.ToValidUTF8(text, "?")))
}
