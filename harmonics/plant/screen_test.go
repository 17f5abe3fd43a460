package plant

import (
	"math"
	"strings"
	"testing"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// invented is a 400 V supply with a 630 kVA transformer and three steps of 50 kvar.
func invented() site.Sheet {
	return site.Sheet{Supply: site.Supply{Connection: site.Wye4, NominalVoltage: 400, NominalFrequency: 50,
		ShortCircuitCurrent: 12500, ShortCircuitCurrentMin: 9000, TransformerKVA: 630, TransformerImpedance: 6,
		TransformerEddyLoss: 0.10, CapacitorKvar: []float64{50, 50, 50}}}
}

func channel(role site.Role, h map[int]float64) harmonics.ChannelSummary {
	c := harmonics.ChannelSummary{Role: role, TopOrder: 50, Fundamental: h[1], Harmonics: make([]harmonics.Harmonic, 50)}
	var sum float64
	for n := 1; n <= 50; n++ {
		*c.H(n) = harmonics.Harmonic{Order: n, RMS: h[n], Pct: 100 * h[n] / h[1]}
		sum += h[n] * h[n]
	}
	c.RMS = math.Sqrt(sum)
	return c
}

// recorded is a summary with electronic loads on all phases, most on the second.
func recorded() *harmonics.Summary {
	volts := map[int]float64{1: 230, 3: 2, 5: 9.2, 7: 4.6, 11: 2.3, 13: 1.15}
	amps := func(of float64) map[int]float64 {
		return map[int]float64{1: of, 3: 0.4 * of, 5: 0.2 * of, 7: 0.1 * of, 9: 0.03 * of}
	}
	s := &harmonics.Summary{Nominal: 50, Duration: 600}
	s.Channels = append(s.Channels, channel("V1", volts), channel("V2", volts), channel("V3", volts),
		channel("I1", amps(300)), channel("I2", amps(400)), channel("I3", amps(350)), channel("IN", map[int]float64{1: 50, 3: 420}))
	s.Channels[4].H(3).RMS = 0.5 * 400 // the second phase has more of the third
	s.Power = &harmonics.Power{Neutral: &harmonics.NeutralCurrent{RMS: 425, TriplenRMS: 420}}
	return s
}

func pick(t *testing.T, figures []Figure, name string) Figure {
	t.Helper()
	for _, f := range figures {
		if f.Name == name {
			return f
		}
	}
	var names []string
	for _, f := range figures {
		names = append(names, f.Name)
	}
	t.Fatalf("no figure %q among %q", name, names)
	return Figure{}
}

func TestScreen(t *testing.T) {
	got := Screen(invented(), recorded())
	// I2, over I1²: 1, 0.25, 0.04, 0.01, 0.0009 at 1, 3, 5, 7, 9: 1.3009; h²: 1 + 2.25 + 1 + 0.49 + 0.0729 = 4.8129.
	const squares, weighted = 1.3009, 4.8129
	line := 400 * math.Sqrt(squares)
	for _, c := range []struct {
		name  string
		value float64
		unit  string
		says  []string
	}{
		{"Short-circuit current behind the transformer", 630e3 / (math.Sqrt(3) * 400 * 0.06), "A", []string{"upper value"}},
		{"K-factor of the load", weighted / squares, "", []string{"I2: K-factor 3.7 ", "next standard rating is 4.", "rated 909 A"}},
		{"F_HL, harmonic loss factor", weighted / squares, "", []string{"IEEE C57.110", "orders 1 to 9"}},
		{"Permissible load, IEEE C57.110", 100 * math.Sqrt(1.1/(1+0.1*weighted/squares)), "%", []string{"dry-type", "eddy loss 0.1 pu", "50.2 % of rated"}},
		{"Neutral current", 425, "A", []string{"425 A in the neutral, measured", "420 A of it", "96.6 % of the highest line current (I2, 440 A)", "more than half a line current"}},
		// Third harmonic 0.5/1.14057 = 43.8 % of the line's rms: by the neutral, 3 × 200 A over 0.86.
		{"Cable capacity needed", 600 / 0.86, "A", []string{"I2: the third harmonic is 43.8 %", "neutral current, 3 × 200 A"}},
		{"Capacitor current", 0, "%", []string{"IEEE 18", "safe side"}},
		{"Parallel resonance, 100 kvar, maximum fault level", math.Sqrt(math.Sqrt(3) * 400 * 12500 / 100e3), "", []string{"(465 Hz)", "Too near to order 9, which is strong here"}},
		{"Parallel resonance, 150 kvar, minimum fault level", math.Sqrt(math.Sqrt(3) * 400 * 9000 / 150e3), "", []string{"order 6.45 (322 Hz), the supply taken as inductive."}},
		{"Parallel resonance, 50 kvar, maximum fault level", math.Sqrt(math.Sqrt(3) * 400 * 12500 / 50e3), "", []string{"Too near to order 13, which converters make"}},
		{"HVF, harmonic voltage factor", 0, "", []string{"0.0196", "no concern"}},
	} {
		f := pick(t, got, c.name)
		if c.value != 0 && math.Abs(f.Value-c.value) > 1e-9*c.value || f.Unit != c.unit {
			t.Errorf("%s: %v %q, want %v %q", c.name, f.Value, f.Unit, c.value, c.unit)
		}
		for _, s := range c.says {
			if !strings.Contains(f.Text, s) {
				t.Errorf("%s says %q, not %q", c.name, f.Text, s)
			}
		}
	}
	if math.Abs(line-456.2) > 0.1 {
		t.Fatal("the line current of this test's own sums is wrong")
	}
	n := 0
	for _, f := range got {
		t.Logf("%-11s %-50s %8.4g %-2s %s", f.Topic, f.Name, f.Value, f.Unit, f.Text)
		if f.Topic == Resonance {
			n++
		}
		if math.IsNaN(f.Value) || math.IsInf(f.Value, 0) || !strings.Contains(f.Text, num(f.Value)) && f.Unit == "" {
			t.Errorf("%s: %v is no number, or its text lacks it: %q", f.Name, f.Value, f.Text)
		}
	}
	if n != 6 {
		t.Errorf("%d resonances, want three sums at two fault levels", n)
	}
}

// What is not declared gives no figure.
func TestScreenWithoutDeclarations(t *testing.T) {
	sheet := site.Sheet{Supply: site.Supply{Connection: site.Wye4}}
	for _, f := range Screen(sheet, recorded()) {
		if f.Topic == Capacitor || f.Topic == Resonance || f.Topic == Motor || strings.Contains(f.Name, "Permissible") || strings.Contains(f.Name, "Factor K") {
			t.Errorf("%s comes of nothing: %s", f.Name, f.Text)
		}
	}
	if got := Screen(site.Sheet{}, &harmonics.Summary{}); len(got) != 0 {
		t.Errorf("%d figures of an empty summary", len(got))
	}
	blank := &harmonics.Summary{Channels: []harmonics.ChannelSummary{{Role: "I1"}, channel("V1", map[int]float64{}), channel("I2", map[int]float64{1: math.NaN()})}}
	for _, f := range Screen(invented(), blank) {
		if f.Topic != Resonance && !strings.HasPrefix(f.Name, "Short-circuit") {
			t.Errorf("%s comes of dead channels: %v", f.Name, f.Value)
		}
	}
}

func TestScreenTexts(t *testing.T) {
	says := func(name, want string, change func(*site.Sheet, *harmonics.Summary)) {
		t.Helper()
		sheet, sum := invented(), recorded()
		change(&sheet, sum)
		if f := pick(t, Screen(sheet, sum), name); !strings.Contains(f.Text, want) {
			t.Errorf("%s says %q, not %q", name, f.Text, want)
		}
	}
	says("Permissible load, IEEE C57.110", "liquid-filled transformer with eddy loss 0.1 pu, other stray loss 0.2 pu", func(s *site.Sheet, _ *harmonics.Summary) { s.Supply.TransformerStrayLoss = 0.2 })
	says("K-factor of the load", "The declared transformer has 4: enough.", func(s *site.Sheet, _ *harmonics.Summary) { s.Supply.TransformerKRating = 4 })
	says("K-factor of the load", "The declared transformer has 1: less", func(s *site.Sheet, _ *harmonics.Summary) { s.Supply.TransformerKRating = 1 })
	says("K-factor of the load", "above the highest standard rating", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Channels[4].H(49).RMS = 100 })
	says("K-factor of the load", "without the orders that do not stand clear of the noise it is 3.7.", func(_ *site.Sheet, sum *harmonics.Summary) {
		sum.Channels[4].H(49).RMS, sum.Channels[4].H(49).Floor = 10, 12
	})
	says("Neutral current", "computed from the phase currents, not measured", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Power.Neutral.Computed = true })
	says("Neutral current", "The neutral carries more than a line", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Power.Neutral.RMS = 441 })
	says("Cable capacity needed", "choose the section by the neutral", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Power.Neutral.RMS = 700 })
	says("Cable capacity needed", "a lower factor applies", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Channels[4].H(9).RMS = 80 })
	says("Short-circuit current behind the transformer", "check which side", func(s *site.Sheet, _ *harmonics.Summary) { s.Supply.ShortCircuitCurrent = 30000 })
	says("Tuned order of the detuned bank", "order 3.78 (189 Hz), and its capacitors see 108 % of the supply's voltage. Order 3 is strong here", func(s *site.Sheet, _ *harmonics.Summary) { s.Supply.CapacitorDetuning = 7 })
	says("Parallel resonance, 50 kvar, transformer alone", "10.5 MVA", func(s *site.Sheet, _ *harmonics.Summary) {
		s.Supply.ShortCircuitCurrent, s.Supply.ShortCircuitCurrentMin = 0, 0
	})
	says("Parallel resonance, 50 kvar, minimum fault level", "Too near to order 11, which is strong here", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Channels[2].H(11).RMS = 3 })
	says("HVF, harmonic voltage factor", "derate motors", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Channels[1].H(5).RMS = 20 })
	says("Capacitor current", "above the 135 %", func(_ *site.Sheet, sum *harmonics.Summary) { sum.Channels[1].H(13).RMS = 23 })
	says("Lowest parallel resonance, maximum fault level", "63 amounts of kvar", func(s *site.Sheet, _ *harmonics.Summary) {
		s.Supply.CapacitorKvar = []float64{1, 2, 4, 8, 16, 32}
	})
}

// Of many combinations only those with a warning get a figure of their own, a dozen a fault level at most.
func TestScreenBoundsResonances(t *testing.T) {
	sheet := invented()
	sheet.Supply.CapacitorKvar = nil
	for i := range 30 {
		sheet.Supply.CapacitorKvar = append(sheet.Supply.CapacitorKvar, 10+float64(i)/7)
	}
	n := 0
	for _, f := range Screen(sheet, recorded()) {
		if f.Topic == Resonance {
			n++
		}
	}
	if n < 4 || n > 2*(mostShown+1) {
		t.Errorf("%d figures", n)
	}
}

// A bank between the lines is judged by line-to-line voltages where they were recorded.
func TestCapacitorTakesLineVoltages(t *testing.T) {
	sum := recorded()
	sum.Channels = append(sum.Channels, channel("V12", map[int]float64{1: 400, 5: 40}))
	f := pick(t, Screen(invented(), sum), "Capacitor current")
	if want := 100 * math.Sqrt(1+25*0.01); math.Abs(f.Value-want) > 1e-9 || !strings.HasPrefix(f.Text, "V12") || strings.Contains(f.Text, "safe side") {
		t.Errorf("%v %%: %q", f.Value, f.Text)
	}
}
