package sitesheet

import (
	"bytes"
	"errors"
	"flag"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

var update = flag.Bool("update", false, "rewrite the golden files")

func full() site.Sheet {
	lines := 3
	return site.Sheet{
		Site: site.Identity{Name: `Kestrel Lane "bakery", board MB-1`, Location: `hall \ 2`, SurveyedBy: "N. N.", Purpose: "monthly\trecord", Timezone: "Europe/Berlin"},
		Supply: site.Supply{Connection: site.Wye4, NominalVoltage: 400, NominalFrequency: 50, Point: "PCC", ShortCircuitCurrent: 12500, ShortCircuitCurrentMin: 9000,
			ShortCircuitSource: "letter", DemandCurrent: 410.5, DemandSource: "bills", Generation: true, TransformerKVA: 630, TransformerImpedance: 6,
			TransformerEddyLoss: 0.1, TransformerStrayLoss: 0.05, TransformerKRating: 4, CapacitorKvar: []float64{50, 12.5}, CapacitorDetuning: 7},
		Limits: site.Limits{Apply: []string{"ieee-519-2022", "own/rules.toml"}},
		Channels: []site.Channel{{Source: "CH1", Measures: "V1", Scale: 1}, {Source: "CH2", Measures: "I1", Scale: 2.5e-3, Reversed: true, Uncertainty: 0.5},
			{Source: "CH3", Measures: ""}},
		File:      site.File{Delimiter: ";", Decimal: ",", Encoding: "windows-1252", HeaderLines: &lines, TimeColumn: "none", TimeFormat: "ms", SamplingRate: 6400},
		Intervals: site.Intervals{Length: 600, Stamp: "end"},
		Columns:   []site.Column{{Source: "U{phase} H{order:02}", Measures: "V{phase}", Quantity: "h{order}", Unit: "%"}},
	}
}

func TestWrittenSheetReadsBackTheSame(t *testing.T) {
	for name, s := range map[string]site.Sheet{"full": full(), "empty": {}, "some": {Supply: site.Supply{NominalVoltage: 230}, Channels: []site.Channel{{Source: "2", Measures: "VN"}}}} {
		var b bytes.Buffer
		if err := Write(&b, s, Comments{Files: []string{"a.cfg"}, Advice: []Advice{{"One sensor is reversed.", []string{"[[channel]]", `source = "x"`}}}}); err != nil {
			t.Fatal(err)
		}
		got, err := Parse(&b, "site.toml")
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		if s.Site.Timezone == "" {
			s.Site.Timezone = "UTC" // written out, since it is what an empty one means
		}
		if diff := cmp.Diff(s, got); diff != "" {
			t.Errorf("%s: %s", name, diff)
		}
	}
}

// Every example that stands in a comment of an empty sheet must itself be right: take the marks away and read it.
func TestExamplesInCommentsAreValid(t *testing.T) {
	var b bytes.Buffer
	if err := Write(&b, site.Sheet{}, Comments{}); err != nil {
		t.Fatal(err)
	}
	text := strings.ReplaceAll(b.String(), "\n# ", "\n")
	_, text, _ = strings.Cut(text, "\n") // the heading is prose
	s, err := Parse(strings.NewReader(text), "site.toml")
	if err != nil {
		t.Fatalf("%v in\n%s", err, text)
	}
	if s.Supply.DemandCurrent != 410 || len(s.Limits.Apply) != 2 || len(s.Supply.CapacitorKvar) != 2 || !s.Supply.Generation {
		t.Errorf("examples were not all read: %+v", s)
	}
}

func TestWriteGolden(t *testing.T) {
	s := full()
	s.Guessed = []string{`Channels were given roles by their names: "CH1" as V1; a [[channel]] entry for each in the site sheet settles it.`}
	c := Comments{Files: []string{"board.cfg", "board.dat"}, Channels: []ChannelComment{{"CH1", "V, rms 231"}},
		Advice: []Advice{{"The current of phase 2 flows backwards against its voltage at 178°: the sensor is probably turned.", []string{"[[channel]]", `source = "CH2"`, "reversed = false"}}}}
	var b bytes.Buffer
	if err := Write(&b, s, c); err != nil {
		t.Fatal(err)
	}
	golden := filepath.Join("testdata", "full.toml")
	if *update {
		if err := os.WriteFile(golden, b.Bytes(), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(golden)
	if err != nil {
		t.Fatal(err)
	}
	if diff := cmp.Diff(string(want), b.String()); diff != "" {
		t.Error(diff)
	}
}

func TestReadErrors(t *testing.T) {
	for _, c := range []struct{ text, want string }{
		{"[site]\nnaem = \"x\"", `site.toml:2: unknown key "naem"; did you mean "name"?`},
		{"[supply]\n\n# c\nnominal_volts = 400", `site.toml:4: unknown key "nominal_volts"; did you mean "nominal_voltage"?`},
		{"[site]\nname = \"\"\"\nnaem = 1\n\"\"\"\nnaem = 2", `site.toml:5: unknown key "naem"; did you mean "name"?`},
		{"[site]\nconnection = \"wye-4wire\"", `site.toml:2: unknown key "connection" in [site]; it belongs in [supply]`},
		{"nominal_voltage = 400", `site.toml:1: key "nominal_voltage" stands before any table; move it below [supply]`},
		{"[suply]\npoint = \"PCC\"", `site.toml:1: unknown table "suply"; did you mean "supply"?`},
		{"[weather]\nx = 1", `site.toml:1: unknown table "weather"; the tables are site, supply, limits, channel, file, intervals, column`},
		{"[limits]\nzzz = 1", `site.toml:2: unknown key "zzz"; the keys of [limits] are apply`},
		{"[[channel]]\nsource = \"a\"\nmeasures = \"V1\"\n[[channel]]\nsource = \"b\"\nmesures = \"V2\"", `site.toml:6: unknown key "mesures"; did you mean "measures"?`},
		{"[supply]\nconnection = \"wye\"", `site.toml:2: connection is "wye"; it must be one of single-phase, split-phase, wye-4wire, wye-3wire, delta-3wire`},
		{"[supply]\nconnection = \"wye-4-wire\"", `site.toml:2: connection is "wye-4-wire"; did you mean "wye-4wire"?`},
		{"[supply]\npoint = \"pcc\"", `site.toml:2: point is "pcc"; did you mean "PCC"?`},
		{"[supply]\nnominal_frequency = 55", `site.toml:2: nominal_frequency is 55; it must be 50 or 60 (Hz)`},
		{"[supply]\nnominal_frequency = nan", `site.toml:2: nominal_frequency is NaN; it must be 50 or 60 (Hz)`},
		{"[supply]\nnominal_voltage = -400", `site.toml:2: nominal_voltage is -400; it must be a voltage above 0, in V`},
		{"[supply]\nnominal_voltage = \"400 V\"", `site.toml:2: supply.nominal_voltage: must be a number, without quotes or unit`},
		{"[supply]\nshort_circuit_current = 0", `site.toml:2: short_circuit_current is 0; it must be a current above 0, in A, or remove the line where it is not known`},
		{"[supply]\nshort_circuit_current = 5000\nshort_circuit_current_min = 9000", `site.toml:3: short_circuit_current_min is above short_circuit_current, 5000 A; exchange them`},
		{"[supply]\ndemand_current = 5000\nshort_circuit_current = 410", `site.toml:2: demand_current is not below short_circuit_current, 410 A; check both, in A`},
		{"[supply]\ntransformer_impedance = 0.06", `site.toml:2: transformer_impedance is 0.06; it is in per cent, such as 6 for 6 %`},
		{"[supply]\ntransformer_eddy_loss = 10", `site.toml:2: transformer_eddy_loss is 10; it is per unit of the I²R loss, such as 0.10 for 10 %`},
		{"[supply]\ntransformer_k_rating = 0", `site.toml:2: transformer_k_rating is 0; ratings go from 1 to 50`},
		{"[supply]\ncapacitor_kvar = [50,\n 0]", `site.toml:2: capacitor_kvar holds a step of 0; each must be above 0, in kvar`},
		{"[supply]\ncapacitor_detuning = 0.07", `site.toml:2: capacitor_detuning is 0.07; it is in per cent, such as 7 for 7 %, or 0 for none`},
		{"[supply]\ngeneration = \"yes\"", `site.toml:2: supply.generation: must be true or false, without quotes`},
		{"[site]\ntimezone = \"CET-1\"", `site.toml:2: timezone is "CET-1"; it must be an IANA name such as "UTC", "Europe/Berlin" or "America/Chicago"`},
		{"[site]\ntimezone = \"Local\"", `site.toml:2: timezone is "Local"; it must be an IANA name such as "UTC", "Europe/Berlin" or "America/Chicago"`},
		{"[[channel]]\nmeasures = \"V1\"", `site.toml:1: source is missing from this [[channel]]; give the channel's name in the recording, or its number in quotes`},
		{"[[channel]]\nsource = 1\n[[channel]]\nsource = \"b\"", `site.toml:2: channel.source: must be a text; put it in quotes`},
		{"[[channel]]\nsource = \"a\"\nscale = \"2\"", `site.toml:3: channel.scale: must be a number, without quotes or unit`},
		{"[supply]\ncapacitor_kvar = 50", `site.toml:2: supply.capacitor_kvar: must be a list in brackets, such as [50, 50]`},
		{"supply = 3", `site.toml:1: supply: must be a table; write [supply] on a line of its own`},
		{"[[channel]]\nsource = 1", `site.toml:2: channel.source: must be a text; put it in quotes`},
		{"[[channel]]\nsource = \"a\"\nmeasures = \"V4\"", `site.toml:3: measures is "V4"; did you mean "V1"?`},
		{"[[channel]]\nsource = \"a\"\nmeasures = \"power\"", `site.toml:3: measures is "power"; it must be one of V1, V2, V3, V12, V23, V31, VN, I1, I2, I3, IN`},
		{"[[channel]]\nsource = \"a\"\nmeasures = \"V1\"\n[[channel]]\nsource = \"b\"\nmeasures = \"V1\"", `site.toml:6: measures "V1" stands in line 3 already; a survey has one channel a role`},
		{"[[channel]]\nsource = \"a\"\n[[channel]]\nsource = \"a\"", `site.toml:4: source "a" stands in line 2 already; a channel has one entry`},
		{"[[channel]]\nsource = \"a\"\nscale = 0", `site.toml:3: scale is 0; it multiplies the samples, so it cannot be that; leave it out for 1`},
		{"[[channel]]\nsource = \"a\"\nscale = inf", `site.toml:3: scale is +Inf; it multiplies the samples, so it cannot be that; leave it out for 1`},
		{"[[channel]]\nsource = \"a\"\nuncertainty = -1", `site.toml:3: uncertainty is -1; it is in per cent of reading, such as 0.5`},
		{"[limits]\napply = [\"\"]", "site.toml:2: apply holds an empty name; `wavetally rules` lists the rule sets"},
		{"[file]\ndelimiter = \";;\"", `site.toml:2: delimiter is ";;"; it must be one character, or "tab"`},
		{"[file]\ndelimiter = \",\"\ndecimal = \",\"", `site.toml:3: decimal is the delimiter too; numbers could not be told apart`},
		{"[file]\nheader_lines = -1", `site.toml:2: header_lines is -1; it counts the lines before the first data row, from 0`},
		{"[file]\nsampling_rate = 0", `site.toml:2: sampling_rate is 0; it must be above 0, in samples per second`},
		{"[intervals]\nstamp = \"middle\"", `site.toml:2: stamp is "middle"; it must be one of start, end`},
		{"[[column]]\nquantity = \"h5\"", `site.toml:1: source is missing from this [[column]]; give the column's name, or a pattern with {phase} or {order}`},
		{"[[column]]\nsource = \"a\"\nunit = \"dB\"", `site.toml:3: unit is "dB"; it must be one of %, V, A, Hz, W, var`},
		// Two faults: the first in the file is told.
		{"[supply]\nnominal_frequency = 55\nconnection = \"wye\"", `site.toml:2: nominal_frequency is 55; it must be 50 or 60 (Hz)`},
		{"[site]\nname = \"x\ny = 1", `site.toml:2: site.name: strings cannot contain newlines; each line is key = value, texts in quotes`},
		{"[site]\nname = x", `site.toml:2: site.name: expected value but found "x" instead; each line is key = value, texts in quotes`},
		{"[site]\nname = \"x\"\nname = \"y\"", `site.toml:3: site.name: is written twice; remove one of the lines`},
		{"[site]\nname = \"\xff\"", `site.toml:2: is not UTF-8 text; save the site sheet as UTF-8`},
	} {
		_, err := Parse(strings.NewReader(c.text), "site.toml")
		var parse *wave.ParseError
		if !errors.As(err, &parse) {
			t.Errorf("%q: error %v, want a parse error", c.text, err)
		} else if err.Error() != c.want {
			t.Errorf("%q:\n got %s\nwant %s", c.text, err, c.want)
		}
	}
}

func TestReadTakesBytesAsEditorsLeaveThem(t *testing.T) {
	s, err := Parse(strings.NewReader("\ufeff[supply]\r\nnominal_voltage = 400\r\n[[channel]]\r\nsource = \"Ü\"\r\nmeasures = \"V1\"\r\n"), "s.toml")
	if err != nil || s.Supply.NominalVoltage != 400 || s.Channels[0].Source != "Ü" {
		t.Errorf("%+v, %v", s, err)
	}
}

func TestReadFiles(t *testing.T) {
	dir := t.TempDir()
	if _, err := Read(dir); err == nil || !strings.Contains(err.Error(), "is a directory") {
		t.Errorf("a directory: %v", err)
	}
	if _, err := Read(filepath.Join(dir, "none.toml")); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("a missing file: %v", err)
	}
	big := filepath.Join(dir, "big.toml")
	if err := os.WriteFile(big, bytes.Repeat([]byte("#"), largest+1), 0o600); err != nil {
		t.Fatal(err)
	}
	if _, err := Read(big); err == nil || !strings.Contains(err.Error(), "larger than 1 MiB") {
		t.Errorf("a big file: %v", err)
	}
}

func FuzzParse(f *testing.F) {
	var b bytes.Buffer
	if err := Write(&b, full(), Comments{}); err != nil {
		f.Fatal(err)
	}
	f.Add(b.String())
	f.Add("[[channel]]\nsource=\"a\"\n[[channel]]\nsource='''\n'''\nx=1")
	f.Add("channel = [{source = \"a\", scale = 0}]\nsite.name = 3")
	f.Fuzz(func(t *testing.T, text string) {
		s, err := Parse(strings.NewReader(text), "f.toml")
		if err != nil {
			if strings.ContainsAny(err.Error(), "\n") {
				t.Errorf("an error is one line: %q", err)
			}
			return
		}
		for _, c := range s.Channels {
			if math.IsNaN(c.Scale) {
				t.Error("scale is NaN")
			}
		}
		var b bytes.Buffer
		if err := Write(&b, s, Comments{}); err != nil {
			t.Fatal(err)
		}
		if _, err := Parse(&b, "again.toml"); err != nil {
			t.Errorf("accepted, but its own writing is not: %v", err)
		}
	})
}

func TestLineOfSource(t *testing.T) {
	path := filepath.Join(t.TempDir(), "s.toml")
	if err := os.WriteFile(path, []byte("# head\n[[channel]]\nsource = \"a\"\n\n[[channel]]\nmeasures = \"V2\"\nsource = \"b\"\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	for source, want := range map[string]int{"a": 3, "b": 7, "c": 0} {
		if got := LineOfSource(path, source); got != want {
			t.Errorf("source %q in line %d, want %d", source, got, want)
		}
	}
	if got := LineOfSource(path+".not", "a"); got != 0 {
		t.Errorf("a missing file: line %d, want 0", got)
	}
}
