package main

import (
	"cmp"
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"strings"
	"time"
	"unicode/utf8"

	"github.com/spf13/cobra"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

func newPeek(a *app) *cobra.Command {
	var f openFlags
	cmd := &cobra.Command{
		Use:   "peek FILE…",
		Short: "Show what is in a recording, and whether it can be used",
		Long: `Shows what is in a recording: format, channels, units, sampling rate, span, gaps, a first look at frequency and
levels, what the program would guess about it, and what speaks against judging by it. Nothing is written.`,
		Example: `  wavetally peek board.cfg
  wavetally peek --site site.toml recordings/*.csv`,
		Args: arguments(1, -1, "the recording's files, or their folder"),
		RunE: func(cmd *cobra.Command, args []string) error { return a.peek(cmd.Context(), args, f) },
	}
	f.addTo(cmd)
	return cmd
}

func (a *app) peek(ctx context.Context, files []string, f openFlags) error {
	sheet, err := f.sheet()
	if err != nil {
		return err
	}
	rec, err := f.open(files, sheet)
	if err != nil {
		return err
	}
	var sum *harmonics.Summary
	if err = rec.timeBase(); err == nil {
		tell, end := a.progress("looking")
		sum, err = harmonics.Measure(ctx, rec, rec.sheet, harmonics.Options{Progress: tell})
		end()
	}
	if ctx.Err() != nil {
		return ctx.Err()
	}
	var parse *wave.ParseError
	if errors.As(err, &parse) {
		return err
	}
	p := printer{w: a.out, width: a.width()}
	p.recording(rec, sum)
	p.channels(rec, sum)
	p.list("The files", noteTexts(rec.notes()))
	p.list("Taken from the recording", rec.sheet.Guessed)
	verdict := ""
	if d, wrong := fitness.TimeBase(rec.Header(), rec.look); wrong {
		p.list("Doubts", doubtTexts([]fitness.Doubt{d}))
		verdict = "no: the times must be corrected first"
	} else if err != nil {
		verdict = "no: " + err.Error()
	} else {
		doubts := fitness.Assess(rec.sheet, rec.Header(), rec.notes(), sum)
		p.list("Doubts", doubtTexts(doubts))
		verdict = usable(doubts)
	}
	p.printf("\n")
	p.row("Usable", verdict)
	return p.err
}

// usable says in one sentence what the doubts mean for a survey.
func usable(doubts []fitness.Doubt) string {
	n := map[string]int{}
	for _, d := range doubts {
		n[d.Weight]++
	}
	switch {
	case n[fitness.StopsVerdict] > 0:
		return fmt.Sprintf("to measure, not to judge all of it: %s a verdict; the numbers are shown all the same", plural(n[fitness.StopsVerdict], "doubt stops", "doubts stop"))
	case n[fitness.Caution] > 0:
		return fmt.Sprintf("yes, with care: %s", plural(n[fitness.Caution], "caution", "cautions"))
	}
	return "yes"
}

func plural(n int, one, many string) string {
	if n == 1 {
		return "1 " + one
	}
	return fmt.Sprintf("%d %s", n, many)
}

func noteTexts(notes []wave.Note) (out []string) {
	for _, n := range notes {
		out = append(out, n.Text)
	}
	return out
}

func doubtTexts(doubts []fitness.Doubt) (out []string) {
	for _, d := range doubts {
		text := fmt.Sprintf("%s (%s): %s", d.Code, d.Weight, d.Text)
		if d.Channel != "" {
			text = string(d.Channel) + " " + text
		}
		if len(d.Proposal) > 0 {
			text += " For the site sheet: " + strings.Join(d.Proposal, "; ")
		}
		out = append(out, text)
	}
	return out
}

// A printer lays out what peek tells. It keeps the first error.
type printer struct {
	w     io.Writer
	width int
	err   error
}

func (p *printer) printf(format string, args ...any) {
	if p.err == nil {
		_, p.err = fmt.Fprintf(p.w, format, args...)
	}
}

const margin = 12 // width of the column of headings

// row prints a heading and a text beside it, broken into lines.
func (p *printer) row(heading, text string) {
	for _, line := range broken(text, p.width-margin) {
		p.printf("%s%s\n", pad(heading, margin), line)
		heading = ""
	}
}

// list prints a heading and sentences under it; nothing when there are none.
func (p *printer) list(heading string, texts []string) {
	if len(texts) == 0 {
		return
	}
	p.printf("\n%s\n", heading)
	for _, t := range texts {
		for i, line := range broken(t, p.width-4) {
			p.printf("  %s %s\n", []string{"-", " "}[min(i, 1)], line)
		}
	}
}

// broken breaks a text at spaces into lines of at most the given width, longer words aside.
func broken(text string, width int) (lines []string) {
	line := ""
	for _, word := range strings.Fields(text) {
		switch {
		case line == "":
			line = word
		case utf8.RuneCountInString(line)+1+utf8.RuneCountInString(word) > width:
			lines = append(lines, line)
			line = word
		default:
			line += " " + word
		}
	}
	return append(lines, line)
}

func pad(s string, width int) string {
	return s + strings.Repeat(" ", max(0, width-utf8.RuneCountInString(s)))
}

func (p *printer) recording(r *recording, sum *harmonics.Summary) {
	h := r.Header()
	var names []string
	format := ""
	for _, f := range h.Files {
		names = append(names, f.Name)
		format = f.Format
	}
	p.row("Files", fmt.Sprintf("%s (%s)", shorten(names, 4), format))
	p.row("Start", startText(h))
	if sum != nil {
		p.row("Length", fmt.Sprintf("%s, %d samples a channel", seconds(sum.Duration), sum.Samples))
	} else if h.Samples > 0 && h.Rate > 0 {
		p.row("Length", fmt.Sprintf("%s, %d samples a channel", seconds(float64(h.Samples)/h.Rate), h.Samples))
	}
	p.row("Sampling", samplingText(h, r.look, sum))
	p.row("Mains", mainsText(h, r.look, sum))
	if sum != nil {
		p.row("Gaps", gapsText(sum.Gaps))
	}
}

func shorten(names []string, most int) string {
	if len(names) > most {
		return fmt.Sprintf("%s and %d more", strings.Join(names[:most], ", "), len(names)-most)
	}
	return strings.Join(names, ", ")
}

func startText(h wave.Header) string {
	switch {
	case h.Start.IsZero():
		return "unknown: the file has no time of day"
	case h.HasZone:
		return h.Start.UTC().Format("2006-01-02 15:04:05.000") + " UTC"
	}
	return h.Start.Format("2006-01-02 15:04:05.000 MST") + ", taken so: the file names no time zone"
}

func seconds(s float64) string {
	switch {
	case s < 120:
		return fmt.Sprintf("%.4g s", s)
	case s < 7200:
		return fmt.Sprintf("%.1f min", s/60)
	case s < 48*3600:
		return fmt.Sprintf("%.1f h", s/3600)
	}
	return fmt.Sprintf("%.2f days", (time.Duration(s)*time.Second).Hours()/24)
}

func samplingText(h wave.Header, look site.Look, sum *harmonics.Summary) string {
	text := fmt.Sprintf("%.6g Hz", h.Rate)
	if look.Frequency > 0 {
		text += fmt.Sprintf(", %.1f samples a cycle", h.Rate/look.Frequency)
	}
	if sum != nil {
		top := 0
		for _, c := range sum.Channels {
			top = max(top, c.TopOrder)
		}
		text += fmt.Sprintf("; orders up to %d can be measured", top)
	}
	return text
}

func mainsText(h wave.Header, look site.Look, sum *harmonics.Summary) string {
	text := "no fundamental between 42 and 69.5 Hz found"
	switch {
	case sum != nil:
		text = fmt.Sprintf("%.3f Hz, from %.3f to %.3f Hz", sum.Frequency.Mean, sum.Frequency.Min, sum.Frequency.Max)
	case look.Frequency > 0:
		text = fmt.Sprintf("%.3f Hz", look.Frequency)
	}
	if h.Nominal > 0 {
		text += fmt.Sprintf(" (the file says %g Hz)", h.Nominal)
	}
	return text
}

func gapsText(gaps []harmonics.Gap) string {
	if len(gaps) == 0 {
		return "none"
	}
	var parts []string
	total := 0.0
	for _, g := range gaps {
		total += g.Length
		parts = append(parts, fmt.Sprintf("%s at %s", seconds(g.Length), seconds(g.At)))
	}
	return fmt.Sprintf("%d, %s in all: %s", len(gaps), seconds(total), shorten(parts, 3))
}

// channels prints a table of all channels of the recording: what was measured on those that have a role, and the first
// look at the others.
func (p *printer) channels(r *recording, sum *harmonics.Summary) {
	rows := [][]string{{"channel", "unit", "rms", "dc", "peak", "fundamental", "angle", "THD", "taken as"}}
	for i, ch := range r.Header().Channels {
		role, as := roleOf(r, i)
		row := []string{ch.Name, cmp.Or(ch.Unit, ch.FileUnit), "", "", "", "", "", "", as}
		if i < len(r.look.Channels) {
			l := r.look.Channels[i]
			row[2], row[3], row[4], row[5] = figure(l.RMS), figure(l.DC), figure(l.Peak), figure(l.Fundamental)
		}
		if sum != nil && sum.Channel(role) != nil {
			c := sum.Channel(role)
			row = []string{ch.Name, c.Unit, figure(c.RMS), figure(c.DC), figure(c.Peak), figure(c.Fundamental),
				strings.Replace(fmt.Sprintf("%.0f°", c.Angle1), "-0°", "0°", 1), figure(c.THDPct) + " %", as}
		}
		rows = append(rows, row)
	}
	p.printf("\n")
	p.table(rows, 2, 1)
}

// figure writes a number to four digits; nothing for one that was not measured.
func figure(v float64) string {
	if math.IsNaN(v) {
		return ""
	}
	if math.Abs(v) < 1e-4 {
		v = 0 // below any input's resolution
	}
	return fmt.Sprintf("%.4g", v)
}

// roleOf tells what channel i is taken for, and how to say so, with the gain where there is one.
func roleOf(r *recording, i int) (role site.Role, text string) {
	for _, c := range r.sheet.Channels {
		if site.Find(r.Header(), c.Source) != i || c.Measures == "" {
			continue
		}
		if g := c.Gain(); g != 1 {
			return site.Role(c.Measures), fmt.Sprintf("%s × %.6g", c.Measures, g)
		}
		return site.Role(c.Measures), c.Measures
	}
	return "", "-"
}

// table prints rows with columns as wide as they need; the first left columns and the last right ones are of words and
// set left, those between are of numbers and set right.
func (p *printer) table(rows [][]string, left, right int) {
	widths := make([]int, len(rows[0]))
	for _, row := range rows {
		for c, cell := range row {
			widths[c] = max(widths[c], utf8.RuneCountInString(cell))
		}
	}
	for _, row := range rows {
		line := ""
		for c, cell := range row {
			space := strings.Repeat(" ", widths[c]-utf8.RuneCountInString(cell))
			if c < left || c >= len(row)-right {
				line += cell + space + "  "
			} else {
				line += space + cell + "  "
			}
		}
		p.printf("%s\n", strings.TrimRight(line, " "))
	}
}
