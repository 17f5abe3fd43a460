package fitness

import (
	"fmt"
	"math"
	"strings"

	"wavetally/harmonics/site"
)

// A factor by which a voltage or current is commonly wrong.
type factor struct {
	ratio float64
	why   string
}

var voltageFactors = []factor{
	{math.Sqrt(3), "line to line taken for line to neutral"},
	{1 / math.Sqrt(3), "line to neutral taken for line to line"},
	{2, "a ratio off by two"}, {0.5, "a ratio off by two"},
	{10, "a probe's ratio"}, {0.1, "a probe's ratio"}, {100, "a probe's ratio"}, {0.01, "a probe's ratio"},
	{1000, "kV taken for V, or V for mV"}, {0.001, "V taken for kV, or mV for V"},
}

// recognise returns the common factor that ratio is, with what usually causes it.
func recognise(ratio float64, known []factor) (factor, bool) {
	for _, f := range known {
		if math.Abs(ratio/f.ratio-1) < factorFit {
			return f, true
		}
	}
	return factor{}, false
}

// nominal compares the voltages with the nominal one.
func (a *assessment) nominal() {
	for _, c := range a.sum.Channels {
		want := a.sheet.Supply.NominalOf(c.Role)
		if want <= 0 || a.dead[c.Role] || math.IsNaN(c.Fundamental) {
			continue
		}
		ratio := c.Fundamental / want
		if ratio >= nominalOddLow && ratio <= nominalOddHigh {
			continue
		}
		d := Doubt{Code: "nominal-mismatch", Weight: Caution, Channel: c.Role,
			Evidence: map[string]float64{"fundamental_v": c.Fundamental, "nominal_v": want, "ratio": ratio}}
		switch f, known := recognise(ratio, voltageFactors); {
		case ratio >= nominalLow && ratio <= nominalHigh:
			d.Text = fmt.Sprintf("%s is at %s V, %s %% of the nominal %s V. Check the nominal voltage in the site sheet; if it is right, the supply is outside its usual band.",
				c.Role, figure(c.Fundamental), figure(100*ratio), figure(want))
		case known:
			d.Weight = StopsVerdict
			d.Evidence["factor"] = f.ratio
			d.Text = fmt.Sprintf("%s is at %s V, %s times the nominal %s V: %s. Correct the scale, or what the channel measures, or the nominal voltage in the site sheet.",
				c.Role, figure(c.Fundamental), factorName(f.ratio), figure(want), f.why)
			d.Proposal = a.rescaled(c.Role, 1/f.ratio)
		default:
			d.Weight = StopsVerdict
			d.Text = fmt.Sprintf("%s is at %s V, %s times the nominal %s V. Check the voltage transformer's ratio, and the nominal voltage in the site sheet.",
				c.Role, figure(c.Fundamental), figure(ratio), figure(want))
		}
		a.add(d)
	}
}

func factorName(r float64) string {
	switch {
	case math.Abs(r-math.Sqrt(3)) < 1e-9:
		return "√3"
	case math.Abs(r-1/math.Sqrt(3)) < 1e-9:
		return "1/√3"
	}
	return figure(r)
}

// rescaled returns the site-sheet lines that multiply a channel by k.
func (a *assessment) rescaled(r site.Role, k float64) []string {
	for _, c := range a.sheet.Channels {
		if site.Role(c.Measures) == r {
			scale := c.Scale
			if scale == 0 {
				scale = 1
			}
			return []string{"[[channel]]", fmt.Sprintf("source = %q", c.Source), fmt.Sprintf("measures = %q", c.Measures), fmt.Sprintf("scale = %.6g", scale*k)}
		}
	}
	return nil
}

var currentFactors = []factor{{2, "a ratio off by two"}, {5, "a sensor's secondary of 5 A taken for 1 A"}, {10, "a clamp's range"},
	{100, "a clamp's range"}, {1000, "A taken for mA, or mV for A"}}

// ratio compares the currents with what the transformer and the declared demand allow.
func (a *assessment) ratio() {
	s := a.sheet.Supply
	var rated float64
	if s.TransformerKVA > 0 && s.NominalVoltage > 0 {
		rated = 1000 * s.TransformerKVA / s.NominalVoltage
		if s.ThreePhase() {
			rated /= math.Sqrt(3)
		} else if s.Connection == site.SplitPhase {
			rated /= 2
		}
	}
	for i := range a.sum.Channels {
		c := &a.sum.Channels[i]
		if !current(c.Role) || a.dead[c.Role] {
			continue
		}
		highest := a.highest(i)
		against, of, allowed := rated, "the transformer's rated current", ratingExcess
		if s.DemandCurrent > 0 && highest > demandExcess*s.DemandCurrent && !(rated > 0 && highest <= ratingExcess*rated) {
			against, of, allowed = s.DemandCurrent, "the declared demand current", demandExcess
		}
		if against <= 0 || highest <= allowed*against {
			continue
		}
		times := highest / against
		why := "the ratio of its sensor is probably wrong"
		d := Doubt{Code: "ratio-suspect", Weight: StopsVerdict, Channel: c.Role,
			Evidence: map[string]float64{"highest_a": highest, "against_a": against, "times": times}}
		for _, f := range currentFactors {
			if times/f.ratio <= allowed && times/f.ratio > 0.02 {
				why += fmt.Sprintf("; a factor of %s (%s) would explain it", figure(f.ratio), f.why)
				break
			}
		}
		d.Text = fmt.Sprintf("%s reaches %s A, %s times %s of %s A: %s. Compare with a clamp meter or the revenue meter's power, and correct the scale in the site sheet.",
			c.Role, figure(highest), figure(times), of, figure(against), why)
		a.add(d)
	}
}

// highest is the highest fundamental of channel i in a window, or in an interval where there were no windows.
func (a *assessment) highest(i int) float64 {
	if i < len(a.sum.Facts) && !math.IsInf(a.sum.Facts[i].FundamentalHigh, 0) {
		return a.sum.Facts[i].FundamentalHigh
	}
	return a.sum.Channels[i].H(1).Level10m.Max
}

// neutral compares the measured neutral with the sum of the phases.
func (a *assessment) neutral() {
	p := a.sum.Power
	if p == nil || p.Neutral == nil || p.Neutral.Computed || math.IsNaN(p.Neutral.Mismatch) || a.dead["IN"] {
		return
	}
	for _, code := range []string{"current-reversed", "current-on-wrong-phase", "derivative-like-current", "dead-channel", "clipped"} {
		for _, r := range []site.Role{"I1", "I2", "I3"} {
			if a.has(code, r) {
				return // the sum is wrong because a phase is
			}
		}
	}
	measured := p.Neutral.H[1]
	sum := a.phaseSum()
	var mean float64
	for _, r := range []site.Role{"I1", "I2", "I3"} {
		if c, _ := a.channel(r); c != nil {
			mean += c.Fundamental / 3
		}
	}
	larger := math.Max(measured, sum)
	if math.Abs(measured-sum) < neutralMismatch*larger || math.Abs(measured-sum) < neutralFloor*mean {
		return
	}
	a.add(Doubt{Code: "neutral-mismatch", Weight: Caution, Channel: "IN",
		Text: fmt.Sprintf("The neutral carries %s A of fundamental, the phases add up to %s A: the neutral sensor's ratio or place is wrong, or not all conductors pass through the sensors. Check that every parallel conductor is inside its sensor.",
			figure(measured), figure(sum)),
		Evidence: map[string]float64{"measured_a": measured, "sum_a": sum}})
}

// phaseSum is the magnitude of the sum of the phase currents' fundamentals.
func (a *assessment) phaseSum() float64 {
	if len(a.sum.Power.Sequence) == 0 {
		return math.NaN()
	}
	return 3 * a.sum.Power.Sequence[0].IZero
}

// load compares the highest load with the declared demand.
func (a *assessment) load() {
	demand := a.sheet.Supply.DemandCurrent
	if demand <= 0 || a.has("ratio-suspect", "") {
		return
	}
	highest := math.NaN()
	for i, c := range a.sum.Channels {
		if current(c.Role) && !a.dead[c.Role] {
			if h := a.highest(i); !(highest >= h) {
				highest = h
			}
		}
	}
	share := highest / demand
	if math.IsNaN(share) || share >= loadCaution {
		return
	}
	weight := Caution
	if share < loadStops {
		weight = StopsVerdict
	}
	a.add(Doubt{Code: "light-load", Weight: weight,
		Text: fmt.Sprintf("The highest load while recording was %s A, %s %% of the declared demand of %s A: the currents do not show the installation at work. Record while it carries its usual load.",
			figure(highest), figure(100*share), figure(demand)),
		Evidence: map[string]float64{"highest_a": highest, "demand_a": demand, "share_pct": 100 * share}})
}

// noise compares the noise floor with the smallest limits in use.
func (a *assessment) noise() {
	for i := range a.sum.Channels {
		c := &a.sum.Channels[i]
		if a.dead[c.Role] || c.Role.Neutral() || math.IsNaN(c.FloorPct) {
			continue
		}
		floor, of := c.FloorPct, "its fundamental"
		if d := a.sheet.Supply.DemandCurrent; c.Role.Current() && d > 0 {
			floor, of = c.FloorPct*c.Fundamental/d, "the demand current"
		}
		if floor <= noiseCaution || a.has("low-resolution", c.Role) || a.has("clipped", c.Role) || a.has("aliasing-possible", c.Role) {
			continue
		}
		// A vector mean over n windows has the noise of one over √n; the rms that limits are about keeps it all.
		window := float64(a.sum.Windows.Cycles) / a.sum.Nominal
		long := window * (floor / noiseCaution) * (floor / noiseCaution)
		a.add(Doubt{Code: "noise-floor", Weight: Caution, Channel: c.Role,
			Text: fmt.Sprintf("Noise puts %s %% of %s into each order of %s, more than half of the smallest limits (0.3 %%): high orders cannot be judged by their rms. Use a smaller range or a better sensor; a steady harmonic at that limit shows in the mean angle of a record of %s or more.",
				figure(floor), of, c.Role, length(long)),
			Evidence: map[string]float64{"floor_pct": floor, "long_enough_s": long}})
	}
}

// tones looks for a strong line between the harmonics of a voltage that may be the utility's signalling.
func (a *assessment) tones() {
	for i := range a.sum.Channels {
		c := &a.sum.Channels[i]
		if !voltage(c.Role) || a.dead[c.Role] || len(c.Inter) == 0 {
			continue
		}
		best, level := -1, 0.0
		var all []float64
		for h := 2; h < len(c.Inter); h++ { // beside the fundamental its own wandering shows
			if v := c.Inter[h]; !math.IsNaN(v) {
				all = append(all, v)
				if v > level {
					best, level = h, v
				}
			}
		}
		if best < 0 || level < toneShare*c.Fundamental || level < toneOverMedian*middle(all) {
			continue
		}
		a.add(Doubt{Code: "mains-signalling", Weight: Note, Channel: c.Role,
			Text: fmt.Sprintf("%s holds a line between order %d and %d (%s to %s Hz) of %s %% of the fundamental, possibly the utility's mains signalling, which is no harmonic. Ask the utility for its frequency before taking it for distortion.",
				c.Role, best, best+1, figure(float64(best)*a.sum.Frequency.Mean), figure(float64(best+1)*a.sum.Frequency.Mean), figure(100*level/c.Fundamental)),
			Evidence: map[string]float64{"order_below": float64(best), "level_pct": 100 * level / c.Fundamental}})
	}
}

func middle(v []float64) float64 {
	s := append([]float64(nil), v...)
	for i := 1; i < len(s); i++ {
		for j := i; j > 0 && s[j] < s[j-1]; j-- {
			s[j], s[j-1] = s[j-1], s[j]
		}
	}
	if len(s) == 0 {
		return math.NaN()
	}
	return s[len(s)/2]
}

// connection says what the hook-up cannot see.
func (a *assessment) connection() {
	lineOnly, toNeutral := false, false
	for _, c := range a.sum.Channels {
		lineOnly = lineOnly || c.Role.LineToLine()
		toNeutral = toNeutral || c.Role.Voltage() && !c.Role.LineToLine() && !c.Role.Neutral()
	}
	if a.sheet.Supply.ThreePhase() && lineOnly && !toNeutral {
		a.add(Doubt{Code: "triplen-blind", Weight: Note,
			Text: "Voltages were taken between the lines: third, ninth and other triplen harmonics that are equal in all phases cancel there and cannot be seen. Record line to neutral to judge them."})
	}
}

func list(roles []site.Role) string {
	var s []string
	for _, r := range roles {
		s = append(s, string(r))
	}
	if len(s) < 2 {
		return strings.Join(s, "")
	}
	return strings.Join(s[:len(s)-1], ", ") + " and " + s[len(s)-1]
}
