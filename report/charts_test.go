package report_test

import (
	"math"
	"sync"
	"testing"

	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// surveys are built once; tests that change anything build their own.
var surveys = sync.OnceValue(func() map[string]*report.Survey {
	return map[string]*report.Survey{"week": fixture.Week(), "short": fixture.Short(), "tiny": fixture.Tiny(), "log": fixture.Log()}
})

// Whatever the recording, a renderer may rely on this of every chart.
func TestChartsHoldTogether(t *testing.T) {
	for name, s := range surveys() {
		checkCharts(t, name, s)
	}
}

func checkCharts(t *testing.T, name string, s *report.Survey) {
	t.Helper()
	keys := map[string]bool{}
	for _, c := range report.Charts(s) {
		if keys[c.Key] {
			t.Errorf("%s: two charts %q", name, c.Key)
		}
		keys[c.Key] = true
		if c.Title == "" || c.Caption == "" {
			t.Errorf("%s %s: title %q, caption %q", name, c.Key, c.Title, c.Caption)
		}
		for _, a := range []report.Axis{c.X, c.Y} {
			if c.Kind != report.PhasorChart && !(a.High > a.Low) {
				t.Errorf("%s %s: axis %q from %g to %g", name, c.Key, a.Label, a.Low, a.High)
			}
		}
		for _, line := range c.Series {
			if len(line.X) != len(line.Y) || len(line.X) == 0 {
				t.Errorf("%s %s %s: %d X, %d Y", name, c.Key, line.Name, len(line.X), len(line.Y))
			}
		}
		if g := c.Grid; g != nil {
			if len(g.Xs) != len(g.Value) || len(g.Ys) != len(g.Value[0]) || !(g.High > g.Low) {
				t.Errorf("%s %s: grid of %d × %d for %d × %d, scale %g to %g", name, c.Key, len(g.Value), len(g.Value[0]), len(g.Xs), len(g.Ys), g.Low, g.High)
			}
		}
	}
}

func TestChartsThereAre(t *testing.T) {
	want := map[string][]string{
		"week": {"spectrum-V-ieee-519-2022", "spectrum-V-en-50160", "spectrum-I-ieee-519-2022", "spectrum-N", "waveform-V", "waveform-I", "waveform-N",
			"rebuilt-V1", "rebuilt-V2", "rebuilt-V3", "rebuilt-I1", "rebuilt-I2", "rebuilt-I3", "rebuilt-IN", "trend-thd-V", "trend-tdd-I", "trend-load",
			"heat-V-ieee-519-2022", "heat-V-en-50160", "heat-I-ieee-519-2022", "phasor"},
		"tiny": {"spectrum-V", "spectrum-I", "waveform-V", "waveform-I", "rebuilt-V1", "rebuilt-I1", "phasor"},
	}
	all := surveys()
	for name, keys := range want {
		var got []string
		for _, c := range report.Charts(all[name]) {
			got = append(got, c.Key)
		}
		if len(got) != len(keys) {
			t.Fatalf("%s: %q", name, got)
		}
		for i := range keys {
			if got[i] != keys[i] {
				t.Errorf("%s: chart %d is %q, want %q", name, i, got[i], keys[i])
			}
		}
	}
	for _, c := range report.Charts(all["log"]) {
		if c.Kind == report.WaveformChart || c.Kind == report.PhasorChart {
			t.Errorf("log: %q, of which a log of intervals holds nothing", c.Key)
		}
	}
	spectrograms := 0
	for _, c := range report.Charts(all["short"]) {
		if c.Kind == report.SpectrogramChart {
			spectrograms++
		}
	}
	if spectrograms != 2 {
		t.Errorf("short: %d spectrograms, want one voltage and one current", spectrograms)
	}
}

func chart(t *testing.T, s *report.Survey, key string) report.Chart {
	t.Helper()
	for _, c := range report.Charts(s) {
		if c.Key == key {
			return c
		}
	}
	t.Fatalf("no chart %q", key)
	return report.Chart{}
}

// Bars, whiskers and limits of a judged spectrum are the numbers of the findings.
func TestSpectrumDrawsTheFindings(t *testing.T) {
	s := surveys()["week"]
	c := chart(t, s, "spectrum-I-ieee-519-2022")
	const k = 11 - 2
	for i, role := range []string{"I1", "I2", "I3"} {
		var f report.Finding
		for _, x := range s.Findings {
			if x.Channel == role && x.Order == 11 && x.Statistic == "95th percentile of 10 min values over a week" {
				f = x
			}
		}
		if bar := c.Series[i]; bar.Name != role || bar.Y[k] != float64(f.Value) {
			t.Errorf("%s order 11: bar of %s %g, finding %g", role, bar.Name, bar.Y[k], float64(f.Value))
		}
		high := c.Series[3+i]
		want := 100 * s.Summary.Channel("I"+high.Role[1:]).H(11).Level10m.Max / 410
		if high.Use != report.Highest || math.Abs(high.Y[k]-want) > 1e-12 {
			t.Errorf("%s order 11: whisker %g, highest 10 min value %g %% of 410 A", role, high.Y[k], want)
		}
		if c.Limits[0].Y[k] != 3.5 { // IEEE 519-2022 Table 2, Isc/IL 20 to <50, 11 <= h < 17 (shared/standards.md 1.2, corroborated)
			t.Errorf("limit of order 11: %g", c.Limits[0].Y[k])
		}
	}
}

// A cell of the heat map over 100 % is an interval over the limit, and no invalid interval has a cell.
func TestHeatMapAgainstIntervals(t *testing.T) {
	s := surveys()["week"]
	c := chart(t, s, "heat-V-en-50160")
	fold := int(math.Round(c.Grid.DX / 600))
	const order, limit = 15, 0.5 // EN 50160, order 15
	for i, column := range c.Grid.Value {
		want := math.NaN()
		for _, iv := range s.Summary.Tens[i*fold : min((i+1)*fold, len(s.Summary.Tens))] {
			for ch := range 3 {
				if v := 100 * iv.Channels[ch].H[order] / iv.Channels[ch].H[1] / limit * 100; iv.Valid() && !(v <= want) {
					want = v
				}
			}
		}
		if got := column[order-2]; math.Abs(got-want) > 1e-9 || math.IsNaN(got) != math.IsNaN(want) {
			t.Fatalf("column %d: %g, want %g", i, got, want)
		}
	}
}

// What is rebuilt and what is left add up to what was recorded.
func TestRebuiltPlusResidual(t *testing.T) {
	c := chart(t, surveys()["week"], "rebuilt-I2")
	for i := range c.Series[0].Y {
		if d := c.Series[0].Y[i] - c.Series[1].Y[i] - c.Series[2].Y[i]; math.Abs(d) > 1e-9 {
			t.Fatalf("sample %d: off by %g A", i, d)
		}
	}
}

func TestTrendShadesWhatDoesNotCount(t *testing.T) {
	c := chart(t, surveys()["week"], "trend-thd-V")
	if len(c.Shades) != 2 || c.Shades[0].Why != "dip" || c.Shades[1].Why != "missing samples" || c.Shades[1].To-c.Shades[1].From != 2400 {
		t.Errorf("shades %+v", c.Shades)
	}
}
