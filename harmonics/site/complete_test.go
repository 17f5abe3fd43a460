package site_test

import (
	"errors"
	"math"
	"strings"
	"testing"
	"time"

	"github.com/google/go-cmp/cmp"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// recording makes a header and a look from lines "name unit rms angle thd".
type look struct {
	name, unit  string
	rms, angle  float64
	thd         float64
	designation string
}

func recording(hz float64, looks ...look) (wave.Header, site.Look) {
	h := wave.Header{}
	l := site.Look{Frequency: hz}
	for _, c := range looks {
		h.Channels = append(h.Channels, wave.Channel{Name: c.name, Unit: c.unit, Phase: c.designation})
		l.Channels = append(l.Channels, site.ChannelLook{RMS: c.rms, Fundamental: c.rms, Angle: c.angle, THDPct: c.thd, Peak: c.rms * 1.4})
	}
	return h, l
}

func roles(s site.Sheet) string {
	var out []string
	for _, c := range s.Channels {
		r := c.Source + "=" + c.Measures
		if c.Reversed {
			r += "!"
		}
		out = append(out, r)
	}
	return strings.Join(out, " ")
}

func TestComplete(t *testing.T) {
	threePhase := []look{{name: "U1", unit: "V", rms: 231}, {name: "U2", unit: "V", rms: 230, angle: -120}, {name: "U3", unit: "V", rms: 229, angle: 120},
		{name: "I1", unit: "A", rms: 40}, {name: "I2", unit: "A", rms: 41}, {name: "I3", unit: "A", rms: 39}, {name: "I4", unit: "A", rms: 3}}
	for _, c := range []struct {
		name       string
		sheet      site.Sheet
		hz         float64
		looks      []look
		roles      string
		connection string
		volts      float64
		frequency  float64
	}{
		{"four-wire by names", site.Sheet{}, 50.02, threePhase, "U1=V1 U2=V2 U3=V3 I1=I1 I2=I2 I3=I3 I4=IN", site.Wye4, 400, 50},
		{"numbered channels by units", site.Sheet{}, 59.98, []look{{name: "CH1", unit: "V", rms: 277}, {name: "CH2", unit: "V", rms: 278, angle: -120},
			{name: "CH3", unit: "V", rms: 276, angle: 120}, {name: "CH4", unit: "A", rms: 10}, {name: "CH5", unit: "A", rms: 10}},
			"CH1=V1 CH2=V2 CH3=V3 CH4=I1 CH5=I2", site.Wye4, 480, 60},
		{"North American split phase", site.Sheet{}, 60, []look{{name: "L1", unit: "V", rms: 121}, {name: "L2", unit: "V", rms: 120, angle: 180}},
			"L1=V1 L2=V2", site.SplitPhase, 120, 60},
		{"line to line only", site.Sheet{}, 60, []look{{name: "Vab", unit: "V", rms: 475}, {name: "Vbc", unit: "V", rms: 475}, {name: "Vca", unit: "V", rms: 475}, {name: "Ia", unit: "A", rms: 4}},
			"Vab=V12 Vbc=V23 Vca=V31 Ia=I1", site.Delta3, 480, 60},
		{"declared three-wire, numbered", site.Sheet{Supply: site.Supply{Connection: site.Wye3}}, 50, []look{{name: "1", unit: "V", rms: 398}, {name: "2", unit: "V", rms: 398}, {name: "3", unit: "V", rms: 398}},
			"1=V12 2=V23 3=V31", site.Wye3, 400, 50},
		{"sound card, one channel", site.Sheet{}, 49.9996, []look{{name: "left", rms: 0.2, thd: 2}}, "left=V1", site.SinglePhase, 0, 50},
		{"one current without a unit", site.Sheet{}, 50, []look{{name: "ch1", rms: 1.3, thd: 90}}, "ch1=I1", site.SinglePhase, 0, 50},
		{"three motor currents without name or unit", site.Sheet{}, 60, []look{{name: "1", rms: 12, thd: 0.3}, {name: "2", rms: 12.4, thd: 0.2}, {name: "3", rms: 12.1, thd: 0.4}},
			"1=I1 2=I2 3=I3", site.Wye4, 0, 60},
		{"voltage and current without unit", site.Sheet{}, 50, []look{{name: "1", rms: 228, thd: 2.5}, {name: "2", rms: 5, thd: 60}}, "1=V1 2=I1", site.SinglePhase, 230, 50},
		{"medium voltage", site.Sheet{}, 60, []look{{name: "VA", unit: "V", rms: 7900}, {name: "VB", unit: "V", rms: 7900, angle: -120}}, "VA=V1 VB=V2", site.Wye4, 13800, 60},
		{"no standard voltage near", site.Sheet{}, 50, []look{{name: "V1", unit: "V", rms: 28}}, "V1=V1", site.SinglePhase, 0, 50},
		{"declared scale counts", site.Sheet{Channels: []site.Channel{{Source: "A", Measures: "V1", Scale: 100}}}, 50, []look{{name: "A", rms: 2.31}}, "A=V1", site.SinglePhase, 230, 50},
		{"declared channels are kept, others by name only", site.Sheet{Channels: []site.Channel{{Source: "probe", Measures: "V1"}, {Source: "I2", Measures: ""}}}, 50,
			[]look{{name: "probe", unit: "V", rms: 231}, {name: "I1", unit: "A", rms: 2}, {name: "I2", unit: "A", rms: 2}, {name: "aux", unit: "V", rms: 24}},
			"probe=V1 I2= I1=I1", site.SinglePhase, 230, 50},
		{"the same role twice", site.Sheet{}, 50, []look{{name: "Ua", unit: "V", rms: 60}, {name: "bus 2", unit: "V", designation: "A", rms: 60}}, "Ua=V1", site.SinglePhase, 0, 50},
		{"a word without conductor yields", site.Sheet{}, 50, []look{{name: "Current", unit: "A", rms: 6}, {name: "Ia", unit: "A", rms: 6}}, "Ia=I1", site.SinglePhase, 0, 50},
		{"a nameless voltage beside named ones", site.Sheet{}, 50, []look{{name: "V1", unit: "V", rms: 231}, {name: "aux", unit: "V", rms: 24}, {name: "probe", unit: "A", rms: 2}}, "V1=V1 probe=I1", site.SinglePhase, 230, 50},
		{"R S T only together", site.Sheet{}, 50, []look{{name: "VS", rms: 231, thd: 1}, {name: "IS", rms: 6, thd: 30}}, "VS=V1 IS=I1", site.SinglePhase, 230, 50},
		{"nothing is overruled", site.Sheet{Supply: site.Supply{Connection: site.SplitPhase, NominalVoltage: 120, NominalFrequency: 60}}, 50.02, threePhase[:2], "U1=V1 U2=V2", site.SplitPhase, 120, 60},
		{"a dead channel gets no role by size", site.Sheet{}, 50, []look{{name: "CH1", unit: "V", rms: 230}, {name: "CH2", unit: "V", rms: 0}}, "CH1=V1", site.SinglePhase, 230, 50},
	} {
		t.Run(c.name, func(t *testing.T) {
			h, l := recording(c.hz, c.looks...)
			got, err := site.Complete(c.sheet, h, l)
			if err != nil {
				t.Fatal(err)
			}
			if r := roles(got); r != c.roles {
				t.Errorf("roles %s, want %s", r, c.roles)
			}
			if s := got.Supply; s.Connection != c.connection || s.NominalVoltage != c.volts || s.NominalFrequency != c.frequency {
				t.Errorf("supply %s, %g V, %g Hz, want %s, %g V, %g Hz", s.Connection, s.NominalVoltage, s.NominalFrequency, c.connection, c.volts, c.frequency)
			}
			if n := count(got, c.sheet); n > 0 && len(got.Guessed) == 0 {
				t.Errorf("%d values were filled in and not a word said", n)
			}
			for _, g := range got.Guessed {
				if !strings.Contains(g, ";") || !strings.HasSuffix(g, ".") {
					t.Errorf("a guess says what, from what and what settles it: %q", g)
				}
			}
		})
	}
}

// count returns how much was filled in.
func count(got, declared site.Sheet) int {
	n := len(got.Channels) - len(declared.Channels)
	for _, changed := range []bool{got.Supply.Connection != declared.Supply.Connection, got.Supply.NominalVoltage != declared.Supply.NominalVoltage,
		got.Supply.NominalFrequency != declared.Supply.NominalFrequency} {
		if changed {
			n++
		}
	}
	return n
}

func TestCompleteSaysWhatItGuessed(t *testing.T) {
	h, l := recording(50.012, look{name: "U1", unit: "V", rms: 231}, look{name: "V1", unit: "V", rms: 230})
	h.Start = time.Date(2026, 3, 2, 8, 0, 0, 0, time.UTC)
	h.Nominal = 60
	got, err := site.Complete(site.Sheet{}, h, l)
	if err != nil {
		t.Fatal(err)
	}
	want := []string{
		`Channels were given roles by their names and units: "U1" as V1; a [[channel]] entry for each in the site sheet settles it.`,
		`Left out because another channel has the role already: "V1" (V1); a [[channel]] entry in the site sheet chooses another.`,
		`The nominal frequency was taken to be 50 Hz, from the measured 50.01 Hz, although the file says 60 Hz; supply.nominal_frequency in the site sheet, or --nominal-frequency, settles it.`,
		`The connection was taken to be single-phase, from a single voltage; supply.connection in the site sheet settles it.`,
		`The nominal voltage was taken to be 230 V, the standard voltage nearest to the 231 V of V1; supply.nominal_voltage in the site sheet, or --nominal-voltage, settles it.`,
		`The recording's clock was taken to be UTC, for the file names no time zone; site.timezone in the site sheet settles it.`,
	}
	if diff := cmp.Diff(want, got.Guessed); diff != "" {
		t.Error(diff)
	}
}

func TestCompleteDoesNotTouchItsArgument(t *testing.T) {
	h, l := recording(50, look{name: "U1", unit: "V", rms: 231}, look{name: "U2", unit: "V", rms: 231})
	sheet := site.Sheet{Channels: make([]site.Channel, 1, 4), Guessed: make([]string, 0, 4)}
	sheet.Channels[0] = site.Channel{Source: "U1", Measures: "V1"}
	if _, err := site.Complete(sheet, h, l); err != nil {
		t.Fatal(err)
	}
	if spare := sheet.Channels[:2][1]; spare.Source != "" {
		t.Errorf("the caller's channels were written to: %+v", spare)
	}
	if len(sheet.Guessed) != 0 || !cmp.Equal(sheet.Supply, site.Supply{}) {
		t.Errorf("the caller's sheet was changed: %+v", sheet)
	}
}

func TestCompleteNamesAMissingChannel(t *testing.T) {
	h, l := recording(50, look{name: "U1", unit: "V", rms: 231})
	_, err := site.Complete(site.Sheet{Channels: []site.Channel{{Source: "U7", Measures: "V1"}}}, h, l)
	var missing *site.NoChannelError
	if !errors.As(err, &missing) || missing.Source != "U7" || !strings.Contains(err.Error(), `it has "U1"`) {
		t.Errorf("error %v, want one that names U7 and what there is", err)
	}
}

func TestFind(t *testing.T) {
	h, _ := recording(50, look{name: "2"}, look{name: "Ua"}, look{name: "UA"})
	for source, want := range map[string]int{"2": 0, "1": 0, "3": 2, "4": -1, "0": -1, "Ua": 1, "UA": 2, " ua ": 1, "Ub": -1, "": -1} {
		if got := site.Find(h, source); got != want {
			t.Errorf("Find(%q) = %d, want %d", source, got, want)
		}
	}
}

// Rated voltages of IEC 60038 and ANSI C84.1, from memory; 240/415 V systems have become 230/400 V in IEC 60038.
func TestNearestNominal(t *testing.T) {
	for _, c := range []struct {
		volts, hz  float64
		threePhase bool
		want       float64
	}{
		{398, 50, true, 400}, {415, 50, true, 400}, {381, 50, true, 400}, {690, 50, true, 690}, {11_100, 50, true, 11_000}, {104, 50, true, 100},
		{205, 60, true, 208}, {479, 60, true, 480}, {12_400, 60, true, 12_470}, {13_500, 60, true, 13_800}, {231, 50, false, 230}, {118, 60, false, 120},
		{276, 60, false, 277}, {50, 50, true, 0}, {150, 50, false, 0}, {0, 50, true, 0}, {math.NaN(), 50, true, 0}, {math.Inf(1), 60, true, 0},
	} {
		if got := site.NearestNominal(c.volts, c.hz, c.threePhase); got != c.want {
			t.Errorf("%g V at %g Hz, three-phase %t: nominal %g V, want %g V", c.volts, c.hz, c.threePhase, got, c.want)
		}
	}
}
