package sitesheet

import (
	"bytes"
	"fmt"
	"io"
	"strconv"
	"strings"

	"wavetally/harmonics/site"
)

// Comments are what a written sheet says beside its values, as TOML comments.
type Comments struct {
	Files    []string // the recording it was made for
	Channels []ChannelComment
	Advice   []Advice
}

// A ChannelComment describes a channel of the recording, such as "V, rms 231".
type ChannelComment struct{ Source, Text string }

// Advice is something found wrong with the recording's hook-up, and the lines of a sheet that would correct it.
type Advice struct {
	Text  string
	Lines []string
}

// Write writes the sheet with a comment on each key. What is not declared is written as a comment with an example
// value, ready to be filled in. Reading it back gives the same sheet, but for Guessed, which becomes a comment.
func Write(w io.Writer, s site.Sheet, c Comments) error {
	var b writer
	b.heading(s, c)
	b.identity(s.Site)
	b.supply(s.Supply)
	b.limits(s.Limits)
	b.channels(s.Channels, c.Channels)
	b.file(s.File)
	b.intervals(s.Intervals, s.Columns)
	b.advice(c.Advice)
	_, err := w.Write(b.Bytes())
	return err
}

type writer struct{ bytes.Buffer }

func (b *writer) line(format string, args ...any) { fmt.Fprintf(b, format+"\n", args...) }

// entry writes key = value and its comment, as a comment itself when the value is not declared.
func (b *writer) entry(declared bool, key, value, comment string) {
	mark := ""
	if !declared {
		mark = "# "
	}
	text := mark + key + " = " + value
	if comment != "" {
		text = fmt.Sprintf("%-42s # %s", text, comment)
	}
	b.line("%s", text)
}

// text writes a text; an empty one is written too, as a field to fill in.
func (b *writer) text(key, value, comment string) { b.entry(true, key, quote(value), comment) }

// number writes a number, or an example of one when it is not declared.
func (b *writer) number(key string, value, example float64, comment string) {
	if value == 0 {
		b.entry(false, key, number(example), comment)
		return
	}
	b.entry(true, key, number(value), comment)
}

func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// quote writes a TOML basic string.
func quote(s string) string {
	var b strings.Builder
	b.WriteByte('"')
	for _, r := range s {
		switch {
		case r == '"' || r == '\\':
			b.WriteByte('\\')
			b.WriteRune(r)
		case r < ' ' || r == 0x7f:
			fmt.Fprintf(&b, `\u%04X`, r)
		default:
			b.WriteRune(r)
		}
	}
	b.WriteByte('"')
	return b.String()
}

// wrapped writes a comment over lines of about a hundred letters.
func (b *writer) wrapped(first, rest, text string) {
	line := first
	for _, word := range strings.Fields(text) {
		if len(line)+1+len(word) > 100 && strings.TrimSpace(line) != strings.TrimSpace(rest) {
			b.line("%s", strings.TrimRight(line, " "))
			line = rest
		}
		line += " " + word
	}
	b.line("%s", line)
}

func (b *writer) heading(s site.Sheet, c Comments) {
	b.line("# Site sheet: what is known about the installation and the hook-up. Check each line, fill in what is missing.")
	if len(c.Files) > 0 {
		b.wrapped("# Made from", "#  ", strings.Join(c.Files, ", "))
	}
	if len(s.Guessed) > 0 {
		b.line("#\n# Taken from the recording, to be checked:")
		for _, g := range s.Guessed {
			b.wrapped("#  -", "#   ", g)
		}
	}
}

func (b *writer) identity(s site.Identity) {
	b.line("\n[site]")
	b.text("name", s.Name, "as the report's title shows it")
	b.text("location", s.Location, "address or position of the measuring point")
	b.text("surveyed_by", s.SurveyedBy, "who recorded")
	b.text("purpose", s.Purpose, "why this survey was made")
	zone := s.Timezone
	if zone == "" {
		zone = "UTC"
	}
	b.text("timezone", zone, "IANA name; recordings without an offset are taken to be in it")
}

func (b *writer) supply(s site.Supply) {
	b.line("\n[supply]")
	connection := s.Connection
	if connection == "" {
		connection = site.Wye4
	}
	b.entry(s.Connection != "", "connection", quote(connection), strings.Join(site.Connections, ", "))
	b.number("nominal_voltage", s.NominalVoltage, 400, "V, line to line (single-phase, split-phase: line to neutral)")
	b.number("nominal_frequency", s.NominalFrequency, 50, "Hz, 50 or 60")
	point := s.Point
	if point == "" {
		point = "PCC"
	}
	b.entry(s.Point != "", "point", quote(point), "PCC, or internal: limits are then for information")
	b.number("short_circuit_current", s.ShortCircuitCurrent, 12500, "A, maximum at the point, from the network operator")
	b.number("short_circuit_current_min", s.ShortCircuitCurrentMin, 9000, "A, minimum in normal operation")
	b.entry(s.ShortCircuitSource != "", "short_circuit_source", quote(or(s.ShortCircuitSource, "network operator's letter, date")), "where the figure is from")
	b.number("demand_current", s.DemandCurrent, 410, "A, IL: mean of the twelve monthly maximum demands, not of this recording")
	b.entry(s.DemandSource != "", "demand_source", quote(or(s.DemandSource, "mean of 12 monthly peaks")), "where the figure is from")
	b.entry(s.Generation, "generation", "true", "generation on site may push power out; then reversed flow is no wiring fault")
	b.number("transformer_kva", s.TransformerKVA, 630, "kVA")
	b.number("transformer_impedance", s.TransformerImpedance, 6, "%")
	b.number("transformer_eddy_loss", s.TransformerEddyLoss, 0.1, "winding eddy loss, per unit of the I²R loss at rated load")
	b.number("transformer_stray_loss", s.TransformerStrayLoss, 0.05, "other stray loss, per unit; liquid-filled transformers only")
	b.number("transformer_k_rating", s.TransformerKRating, 13, "the K-rating on the nameplate")
	steps := make([]string, 0, 3)
	for _, q := range s.CapacitorKvar {
		steps = append(steps, number(q))
	}
	b.entry(len(steps) > 0, "capacitor_kvar", "["+or(strings.Join(steps, ", "), "50, 50")+"]", "kvar, one number a step")
	b.number("capacitor_detuning", s.CapacitorDetuning, 7, "reactor share, %")
}

func or(value, otherwise string) string {
	if value == "" {
		return otherwise
	}
	return value
}

func (b *writer) limits(l site.Limits) {
	b.line("\n[limits]")
	names := make([]string, 0, 2)
	for _, n := range l.Apply {
		names = append(names, quote(n))
	}
	b.entry(len(names) > 0, "apply", "["+or(strings.Join(names, ", "), `"ieee-519-2022", "en-50160"`)+"]", "names from `wavetally rules`, or paths of rule files")
}

func (b *writer) channels(channels []site.Channel, comments []ChannelComment) {
	for i, ch := range channels {
		b.line("\n[[channel]]")
		comment := "the recording's channel name, or its number from 1 in quotes"
		for _, c := range comments {
			if c.Source == ch.Source {
				comment = "the recording has: " + c.Text
			}
		}
		b.text("source", ch.Source, comment)
		measures := "V1 V2 V3 to neutral, V12 V23 V31, VN, I1 I2 I3, IN; empty: not measured"
		scale, reversed, uncertainty := "multiplies what the file holds", "true: the sensor points the wrong way", "% of reading, sensor and input together"
		if i > 0 { // said once is enough
			measures, scale, reversed, uncertainty = "", "", "", "% of reading"
		}
		b.entry(true, "measures", quote(ch.Measures), measures)
		if ch.Scale == 0 {
			b.entry(false, "scale", "1", scale)
		} else {
			b.entry(true, "scale", number(ch.Scale), scale)
		}
		b.entry(true, "reversed", strconv.FormatBool(ch.Reversed), reversed)
		b.number("uncertainty", ch.Uncertainty, 0.5, uncertainty)
	}
}

func (b *writer) file(f site.File) {
	if f == (site.File{}) {
		return
	}
	b.line("\n[file]")
	for _, e := range []struct{ key, value, comment string }{
		{"delimiter", f.Delimiter, `one character, or "tab"`}, {"decimal", f.Decimal, `"." or ","`}, {"encoding", f.Encoding, "utf-8, utf-16, windows-1252"},
		{"time_column", f.TimeColumn, `name, number from 1, or "none"`}, {"time_format", f.TimeFormat, "s, ms, us, index, d/m/y, m/d/y, iso"},
	} {
		if e.value != "" {
			b.text(e.key, e.value, e.comment)
		}
	}
	if f.HeaderLines != nil {
		b.entry(true, "header_lines", strconv.Itoa(*f.HeaderLines), "lines before the first data row")
	}
	if f.SamplingRate != 0 {
		b.number("sampling_rate", f.SamplingRate, 0, "Hz")
	}
}

func (b *writer) intervals(iv site.Intervals, columns []site.Column) {
	if iv != (site.Intervals{}) {
		b.line("\n[intervals]")
		b.number("length_s", iv.Length, 600, "s")
		b.entry(iv.Stamp != "", "stamp", quote(or(iv.Stamp, "end")), "start or end")
	}
	for _, c := range columns {
		b.line("\n[[column]]")
		b.text("source", c.Source, "column name, {phase} and {order} stand for numbers")
		b.text("measures", c.Measures, "the role")
		b.text("quantity", c.Quantity, "h0 to h50, thd, rms, frequency, u2, p, q1, flag")
		b.text("unit", c.Unit, "% of the fundamental, V, A, Hz, W, var")
	}
}

func (b *writer) advice(list []Advice) {
	if len(list) == 0 {
		return
	}
	b.line("\n# Found while looking at the recording. Nothing of this has been applied.")
	for _, a := range list {
		b.line("#")
		b.wrapped("# -", "#  ", a.Text)
		for _, l := range a.Lines {
			b.line("#       %s", l)
		}
	}
}
