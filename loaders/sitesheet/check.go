package sitesheet

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"
	"time"
	_ "time/tzdata" // zones by name on systems that have no list of their own
	"unicode/utf8"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// A checker collects what is wrong with the values, each with its line.
type checker struct {
	meta  toml.MetaData
	at    lines
	wrong []*wave.ParseError
}

// check returns the first thing that is wrong with the sheet's values, in the order of the file.
func check(s site.Sheet, meta toml.MetaData, at lines) *wave.ParseError {
	c := &checker{meta: meta, at: at}
	c.identity(s.Site)
	c.supply(s.Supply)
	c.plant(s.Supply)
	c.channels(s.Channels)
	c.file(s.File, s.Intervals)
	c.columns(s.Columns)
	for _, name := range s.Limits.Apply {
		if name == "" {
			c.complain(c.at.of("limits", 0, "apply"), "apply", "holds an empty name; `wavetally rules` lists the rule sets")
		}
	}
	if len(c.wrong) == 0 {
		return nil
	}
	return slices.MinFunc(c.wrong, func(a, b *wave.ParseError) int { return cmp.Compare(a.Line, b.Line) })
}

func (c *checker) complain(line int, key, format string, args ...any) {
	c.wrong = append(c.wrong, &wave.ParseError{Line: line, Msg: key + " " + fmt.Sprintf(format, args...)})
}

// oneOf wants an empty value or one of the given words.
func (c *checker) oneOf(line int, key, value string, words []string) {
	if value == "" || slices.Contains(words, value) {
		return
	}
	if near := nearest(value, words); near != "" {
		c.complain(line, key, "is %q; did you mean %q?", value, near)
		return
	}
	c.complain(line, key, "is %q; it must be one of %s", value, strings.Join(words, ", "))
}

// positive wants a number above 0 where the key is written, at most top.
func (c *checker) positive(table, key string, value, top float64, hint string) {
	if !c.meta.IsDefined(table, key) || value > 0 && value <= top {
		return
	}
	c.complain(c.at.of(table, 0, key), key, "is %g; %s", value, hint)
}

func (c *checker) identity(s site.Identity) {
	if s.Timezone == "" {
		return
	}
	if _, err := time.LoadLocation(s.Timezone); err != nil || s.Timezone == "Local" {
		c.complain(c.at.of("site", 0, "timezone"), "timezone", `is %q; it must be an IANA name such as "UTC", "Europe/Berlin" or "America/Chicago"`, s.Timezone)
	}
}

func (c *checker) supply(s site.Supply) {
	c.oneOf(c.at.of("supply", 0, "connection"), "connection", s.Connection, site.Connections)
	c.oneOf(c.at.of("supply", 0, "point"), "point", s.Point, []string{"PCC", "internal"})
	if f := s.NominalFrequency; f != 50 && f != 60 && c.meta.IsDefined("supply", "nominal_frequency") {
		c.complain(c.at.of("supply", 0, "nominal_frequency"), "nominal_frequency", "is %g; it must be 50 or 60 (Hz)", f)
	}
	const drop = "or remove the line where it is not known"
	c.positive("supply", "nominal_voltage", s.NominalVoltage, 1.2e6, "it must be a voltage above 0, in V")
	c.positive("supply", "short_circuit_current", s.ShortCircuitCurrent, 1e6, "it must be a current above 0, in A, "+drop)
	c.positive("supply", "short_circuit_current_min", s.ShortCircuitCurrentMin, 1e6, "it must be a current above 0, in A, "+drop)
	c.positive("supply", "demand_current", s.DemandCurrent, 1e6, "it must be a current above 0, in A, "+drop)
	if s.ShortCircuitCurrentMin > s.ShortCircuitCurrent && s.ShortCircuitCurrent > 0 {
		c.complain(c.at.of("supply", 0, "short_circuit_current_min"), "short_circuit_current_min",
			"is above short_circuit_current, %g A; exchange them", s.ShortCircuitCurrent)
	}
	if s.ShortCircuitCurrent > 0 && s.DemandCurrent >= s.ShortCircuitCurrent {
		c.complain(c.at.of("supply", 0, "demand_current"), "demand_current",
			"is not below short_circuit_current, %g A; check both, in A", s.ShortCircuitCurrent)
	}
}

func (c *checker) plant(s site.Supply) {
	c.positive("supply", "transformer_kva", s.TransformerKVA, 1e7, "it must be a power above 0, in kVA")
	if z := s.TransformerImpedance; c.meta.IsDefined("supply", "transformer_impedance") && !(z >= 0.5 && z <= 50) {
		c.complain(c.at.of("supply", 0, "transformer_impedance"), "transformer_impedance", "is %g; it is in per cent, such as 6 for 6 %%", z)
	}
	for key, value := range map[string]float64{"transformer_eddy_loss": s.TransformerEddyLoss, "transformer_stray_loss": s.TransformerStrayLoss} {
		if !(value >= 0 && value <= 1) {
			c.complain(c.at.of("supply", 0, key), key, "is %g; it is per unit of the I²R loss, such as 0.10 for 10 %%", value)
		}
	}
	if k := s.TransformerKRating; c.meta.IsDefined("supply", "transformer_k_rating") && !(k >= 1 && k <= 100) {
		c.complain(c.at.of("supply", 0, "transformer_k_rating"), "transformer_k_rating", "is %g; ratings go from 1 to 50", k)
	}
	for _, q := range s.CapacitorKvar {
		if !(q > 0) || math.IsInf(q, 0) {
			c.complain(c.at.of("supply", 0, "capacitor_kvar"), "capacitor_kvar", "holds a step of %g; each must be above 0, in kvar", q)
		}
	}
	if p := s.CapacitorDetuning; c.meta.IsDefined("supply", "capacitor_detuning") && !(p == 0 || p >= 1 && p <= 50) {
		c.complain(c.at.of("supply", 0, "capacitor_detuning"), "capacitor_detuning", "is %g; it is in per cent, such as 7 for 7 %%, or 0 for none", p)
	}
}

func (c *checker) channels(channels []site.Channel) {
	source, role := map[string]int{}, map[string]int{}
	for n, ch := range channels {
		line := func(key string) int { return c.at.of("channel", n, key) }
		if ch.Source == "" {
			c.complain(line("source"), "source", "is missing from this [[channel]]; give the channel's name in the recording, or its number in quotes")
		} else if first, twice := source[ch.Source]; twice {
			c.complain(line("source"), "source", "%q stands in line %d already; a channel has one entry", ch.Source, first)
		}
		roles := make([]string, len(site.Roles))
		for i, r := range site.Roles {
			roles[i] = string(r)
		}
		c.oneOf(line("measures"), "measures", ch.Measures, roles)
		if first, twice := role[ch.Measures]; twice && ch.Measures != "" {
			c.complain(line("measures"), "measures", "%q stands in line %d already; a survey has one channel a role", ch.Measures, first)
		}
		if _, written := c.at[place{"channel", n, "scale"}]; written && (ch.Scale == 0 || math.IsNaN(ch.Scale) || math.IsInf(ch.Scale, 0)) {
			c.complain(line("scale"), "scale", "is %g; it multiplies the samples, so it cannot be that; leave it out for 1", ch.Scale)
		}
		if !(ch.Uncertainty >= 0 && ch.Uncertainty < 100) {
			c.complain(line("uncertainty"), "uncertainty", "is %g; it is in per cent of reading, such as 0.5", ch.Uncertainty)
		}
		source[ch.Source], role[ch.Measures] = line("source"), line("measures")
	}
}

func (c *checker) file(f site.File, iv site.Intervals) {
	if f.Delimiter != "" && f.Delimiter != "tab" && utf8.RuneCountInString(f.Delimiter) != 1 {
		c.complain(c.at.of("file", 0, "delimiter"), "delimiter", `is %q; it must be one character, or "tab"`, f.Delimiter)
	}
	c.oneOf(c.at.of("file", 0, "decimal"), "decimal", f.Decimal, []string{".", ","})
	c.oneOf(c.at.of("file", 0, "time_format"), "time_format", f.TimeFormat, []string{"s", "ms", "us", "index", "d/m/y", "m/d/y", "iso"})
	if f.Decimal != "" && f.Decimal == f.Delimiter {
		c.complain(c.at.of("file", 0, "decimal"), "decimal", "is the delimiter too; numbers could not be told apart")
	}
	if f.HeaderLines != nil && *f.HeaderLines < 0 {
		c.complain(c.at.of("file", 0, "header_lines"), "header_lines", "is %d; it counts the lines before the first data row, from 0", *f.HeaderLines)
	}
	c.positive("file", "sampling_rate", f.SamplingRate, 1e9, "it must be above 0, in samples per second")
	c.positive("intervals", "length_s", iv.Length, 7*86400, "it must be above 0, in seconds")
	c.oneOf(c.at.of("intervals", 0, "stamp"), "stamp", iv.Stamp, []string{"start", "end"})
}

func (c *checker) columns(columns []site.Column) {
	for n, col := range columns {
		if col.Source == "" {
			c.complain(c.at.of("column", n, "source"), "source", "is missing from this [[column]]; give the column's name, or a pattern with {phase} or {order}")
		}
		c.oneOf(c.at.of("column", n, "unit"), "unit", col.Unit, []string{"%", "V", "A", "Hz", "W", "var"})
	}
}
