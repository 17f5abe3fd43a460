package fitness_test

import (
	"context"
	"fmt"
	"math"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/site"
	"wavetally/harmonics/synth"
)

// A setting is one clean installation.
type setting struct {
	connection string
	nominal    float64 // Hz
	angle      float64 // degrees by which the currents lag
	load       float64 // of the rated 100 A
	thd        float64 // of the currents, share
}

func (s setting) String() string {
	return fmt.Sprintf("%s %g Hz, %g° at %g %% load, %g %% THD", s.connection, s.nominal, s.angle, 100*s.load, 100*s.thd)
}

// A trial is an installation, with or without a fault, ready to be measured.
type trial struct {
	setting
	recording synth.Recording
	sheet     site.Sheet
	code      string      // the doubt to expect; "" none
	channels  []site.Role // on any of these; empty: any
	// twin is set where another hook-up explains the angles as well: the doubt raised must say so, and may be its.
	twin bool
}

const (
	ratedA = 100.0
	lineV  = 230.0
)

// pattern is a spectrum as loads have it: falling with order, shares of the THD.
var pattern = []struct {
	order int
	share float64
}{{3, .35}, {5, .66}, {7, .45}, {9, .12}, {11, .3}, {13, .22}, {17, .14}, {19, .1}}

func spectrum(rms, thd, angle float64) []synth.Harmonic {
	var norm float64
	for _, p := range pattern {
		norm += p.share * p.share
	}
	hs := []synth.Harmonic{{Order: 1, RMS: rms, Angle: angle}}
	for _, p := range pattern {
		hs = append(hs, synth.Harmonic{Order: p.order, RMS: rms * thd * p.share / math.Sqrt(norm), Angle: angle*float64(p.order) + 40*float64(p.order)})
	}
	return hs
}

func clean(s setting) trial {
	t := trial{setting: s}
	t.recording = synth.Recording{Rate: 128 * s.nominal, Seconds: 0.9, Frequency: synth.Frequency{Hz: s.nominal * 1.0004}, Seed: 9}
	t.sheet.Supply = site.Supply{Connection: s.connection, NominalVoltage: lineV, NominalFrequency: s.nominal, Point: "PCC"}
	delays := []float64{0}
	switch s.connection {
	case site.Wye4:
		delays = []float64{0, 1.0 / 3, 2.0 / 3}
		t.sheet.Supply.NominalVoltage = lineV * math.Sqrt(3)
	case site.SplitPhase:
		delays = []float64{0, 0.5}
	}
	t.sheet.Supply.TransformerKVA = float64(len(delays)) * lineV * ratedA / 1000
	shares := []float64{1, 0.9, 0.85} // loads are never quite equal
	for k, d := range delays {
		t.add(synth.Channel{Name: fmt.Sprintf("V%d", k+1), Unit: "V", Harmonics: synth.Delayed(spectrum(lineV, 0.02, 0), d), Noise: 0.02, Range: 600, Bits: 16})
	}
	for k, d := range delays {
		rms := ratedA * s.load * shares[k]
		t.add(synth.Channel{Name: fmt.Sprintf("I%d", k+1), Unit: "A", Harmonics: synth.Delayed(spectrum(rms, s.thd, -s.angle), d), Noise: 0.003, Range: 600, Bits: 16})
	}
	if s.connection == site.Wye4 {
		var sum []synth.Harmonic
		for k, d := range delays {
			sum = append(sum, synth.Delayed(spectrum(ratedA*s.load*shares[k], s.thd, -s.angle), d)...)
		}
		t.add(synth.Channel{Name: "IN", Unit: "A", Harmonics: sum, Noise: 0.003, Range: 600, Bits: 16})
	}
	return t
}

func (t *trial) add(c synth.Channel) {
	t.recording.Channels = append(t.recording.Channels, c)
	t.sheet.Channels = append(t.sheet.Channels, site.Channel{Source: c.Name, Measures: c.Name})
}

func (t *trial) channel(name string) *synth.Channel {
	for i := range t.recording.Channels {
		if t.recording.Channels[i].Name == name {
			return &t.recording.Channels[i]
		}
	}
	return nil
}

func (t *trial) phases() int {
	return map[string]int{site.Wye4: 3, site.SplitPhase: 2}[t.connection] + b2i(t.connection == site.SinglePhase)
}

func b2i(b bool) int {
	if b {
		return 1
	}
	return 0
}

func (t *trial) turn(name string) {
	c := t.channel(name)
	c.Harmonics = synth.Scaled(c.Harmonics, -1)
}

// plausibleLoad is what a load's angle is taken to be (thresholds.go).
func plausibleLoad(angle float64) bool { return math.Abs(math.Mod(angle+540, 360)-180) <= 72 }

// A fault changes a clean trial into a faulty one; false: it does not apply to the setting.
type fault struct {
	name  string
	apply func(t *trial, variant int) bool
}

var faults = []fault{
	{"one current reversed", func(t *trial, v int) bool {
		name := fmt.Sprintf("I%d", v%t.phases()+1)
		t.turn(name)
		t.code, t.channels = "current-reversed", []site.Role{site.Role(name)}
		return true
	}},
	{"two currents swapped", func(t *trial, v int) bool {
		n := t.phases()
		if n < 2 {
			return false
		}
		a, b := v%n, (v+1)%n
		x, y := t.channel(fmt.Sprintf("I%d", a+1)), t.channel(fmt.Sprintf("I%d", b+1))
		x.Harmonics, y.Harmonics = y.Harmonics, x.Harmonics
		t.code, t.channels = "current-on-wrong-phase", []site.Role{site.Role(x.Name), site.Role(y.Name)}
		// Between two lines in opposition, swapped and both turned round are the same picture; with three phases, at an
		// angle of 60° another pair swapped fits as well.
		t.twin = n == 2 || math.Abs(t.angle) == 60
		return true
	}},
	{"currents moved on by one phase", func(t *trial, v int) bool {
		if t.phases() != 3 {
			return false
		}
		a, b, c := t.channel("I1"), t.channel("I2"), t.channel("I3")
		if v%2 == 0 {
			a.Harmonics, b.Harmonics, c.Harmonics = b.Harmonics, c.Harmonics, a.Harmonics
		} else {
			a.Harmonics, b.Harmonics, c.Harmonics = c.Harmonics, a.Harmonics, b.Harmonics
		}
		shift := 120.0
		if v%2 == 1 {
			shift = -120
		}
		t.code, t.channels = "current-on-wrong-phase", []site.Role{"I1", "I2", "I3"}
		if plausibleLoad(t.angle + shift) {
			t.code, t.channels, t.twin = "wiring-ambiguous", nil, true
		} else if plausibleLoad(t.angle + shift + 180) {
			t.twin = true // all three turned round explains it too
		}
		return true
	}},
	{"two voltage leads swapped", func(t *trial, v int) bool {
		if t.phases() != 3 {
			return false
		}
		x, y := t.channel("V2"), t.channel([]string{"V3", "V1"}[v%2])
		x.Harmonics, y.Harmonics = y.Harmonics, x.Harmonics
		t.code = "voltage-rotation"
		return true
	}},
	{"voltage scaled wrongly", func(t *trial, v int) bool {
		f := []float64{math.Sqrt(3), 1 / math.Sqrt(3), 10, 0.1, 1000, 0.001, 2}[v%7]
		for k := range t.phases() {
			c := t.channel(fmt.Sprintf("V%d", k+1))
			c.Harmonics, c.Noise, c.Range = synth.Scaled(c.Harmonics, f), c.Noise*f, c.Range*f
			t.channels = append(t.channels, site.Role(c.Name))
		}
		t.code = "nominal-mismatch"
		return true
	}},
	{"current scaled wrongly", func(t *trial, v int) bool {
		f := []float64{10, 100, 1000}[v%3]
		if t.load*f < 2 {
			return false
		}
		for k := range t.phases() {
			c := t.channel(fmt.Sprintf("I%d", k+1))
			c.Harmonics, c.Noise, c.Range = synth.Scaled(c.Harmonics, f), c.Noise*f, c.Range*f
			t.channels = append(t.channels, site.Role(c.Name))
		}
		if n := t.channel("IN"); n != nil {
			n.Harmonics, n.Noise, n.Range = synth.Scaled(n.Harmonics, f), n.Noise*f, n.Range*f
		}
		t.code = "ratio-suspect"
		return true
	}},
	{"coil not integrated", func(t *trial, v int) bool {
		if t.thd < 0.1 {
			return false // below, the spectrum is flat under the noise and says nothing: not told
		}
		for k := range t.phases() {
			c := t.channel(fmt.Sprintf("I%d", k+1))
			hs := slices.Clone(c.Harmonics)
			for i := range hs {
				hs[i].RMS *= float64(hs[i].Order)
				hs[i].Angle += 90
			}
			c.Harmonics, c.Range = hs, 12*math.Sqrt2*hs[0].RMS
			t.channels = append(t.channels, site.Role(c.Name))
		}
		t.code = "derivative-like-current"
		return true
	}},
	{"clipped", func(t *trial, v int) bool {
		name := []string{"I1", "V1"}[v%2]
		c := t.channel(name)
		c.Range = 0.85 * math.Sqrt2 * c.Harmonics[0].RMS
		t.code, t.channels = "clipped", []site.Role{site.Role(name)}
		return true
	}},
	{"range far too large", func(t *trial, v int) bool {
		c := t.channel("I1")
		c.Bits, c.Range, c.Noise = 12, 2048*c.Harmonics[0].RMS*math.Sqrt2/15, 0
		t.code, t.channels = "low-resolution", []site.Role{"I1"}
		return true
	}},
	{"dead channel", func(t *trial, v int) bool {
		if t.phases() < 2 {
			return false
		}
		name := []string{"I2", "V2", "I1"}[v%3]
		t.channel(name).Harmonics = nil
		t.code, t.channels = "dead-channel", []site.Role{site.Role(name)}
		return true
	}},
	{"zero wanders", func(t *trial, v int) bool {
		c := t.channel("I1")
		c.Tones = append(c.Tones, synth.Tone{Hz: 0.3, RMS: 0.1 * c.Harmonics[0].RMS, Angle: -90})
		t.code, t.channels = "channel-drift", []site.Role{"I1"}
		return true
	}},
	{"folded", func(t *trial, v int) bool {
		c := t.channel("I1")
		c.Tones = append(c.Tones, synth.Tone{Hz: 0.551 * t.recording.Rate, RMS: 0.02 * c.Harmonics[0].RMS})
		t.code, t.channels = "aliasing-possible", []site.Role{"I1"}
		return true
	}},
	{"sampled too slowly", func(t *trial, v int) bool {
		perCycle := []float64{32, 64, 96, 100}[v%4]
		t.recording.Rate = perCycle * t.nominal
		for i := range t.recording.Channels { // behind an anti-alias filter
			c := &t.recording.Channels[i]
			c.Harmonics = slices.DeleteFunc(slices.Clone(c.Harmonics), func(h synth.Harmonic) bool { return float64(h.Order) > 0.45*perCycle })
		}
		t.code = "sampling-too-slow"
		return true
	}},
	{"unsteady frequency", func(t *trial, v int) bool {
		t.recording.Frequency.Wander = []synth.Wander{{Hz: 0.6, Period: 3}}
		t.code = "unsteady-frequency"
		return true
	}},
	{"frequency jumps", func(t *trial, v int) bool {
		t.recording.Frequency.Steps = []synth.Step{{At: 0.42, Hz: 0.7}}
		t.code = "unsteady-frequency"
		return true
	}},
	{"supply lost", func(t *trial, v int) bool {
		for i := range t.recording.Channels {
			t.recording.Channels[i].Dips = []synth.Dip{{At: 0.41, Length: 10, Depth: 1}}
		}
		t.code = "no-lock"
		return true
	}},
	{"gap", func(t *trial, v int) bool {
		t.recording.Gaps = []synth.Span{{At: 0.43, Length: 0.05}}
		t.code = "gap"
		return true
	}},
	{"hardly loaded", func(t *trial, v int) bool {
		if t.load > 0.5 {
			return false
		}
		t.sheet.Supply.DemandCurrent = ratedA
		t.code = "light-load"
		return true
	}},
	{"noisy", func(t *trial, v int) bool {
		c := t.channel([]string{"I1", "V1"}[v%2])
		c.Noise = 0.06 * c.Harmonics[0].RMS
		t.code, t.channels = "noise-floor", []site.Role{site.Role(c.Name)}
		return true
	}},
	{"neutral sensor wrong", func(t *trial, v int) bool {
		c := t.channel("IN")
		if c == nil {
			return false
		}
		c.Harmonics = synth.Scaled(c.Harmonics, []float64{3, 0.2}[v%2])
		t.code, t.channels = "neutral-mismatch", []site.Role{"IN"}
		return true
	}},
	{"mains signalling", func(t *trial, v int) bool {
		for k := range t.phases() {
			c := t.channel(fmt.Sprintf("V%d", k+1))
			c.Tones = append(c.Tones, synth.Tone{Hz: 7.27 * t.nominal, RMS: 3})
		}
		t.code = "mains-signalling"
		return true
	}},
	{"line-to-line voltages", func(t *trial, v int) bool {
		if t.connection != site.Wye4 {
			return false
		}
		t.sheet.Supply.Connection = site.Delta3
		for k := range 3 {
			next := synth.Scaled(t.channel(fmt.Sprintf("V%d", (k+1)%3+1)).Harmonics, -1)
			c := t.channel(fmt.Sprintf("V%d", k+1))
			t.sheet.Channels[k].Measures = []string{"V12", "V23", "V31"}[k]
			defer func() { c.Harmonics = append(slices.Clone(c.Harmonics), next...) }()
		}
		t.sheet.Channels = t.sheet.Channels[:6]
		t.code = "triplen-blind"
		return true
	}},
}

func settings() []setting {
	var out []setting
	for _, c := range []string{site.Wye4, site.SplitPhase, site.SinglePhase} {
		for _, f := range []float64{50, 60} {
			for _, angle := range []float64{-60, -40, -20, 0, 20, 40, 60} {
				for _, load := range []float64{0.02, 0.2, 1, 1.2} {
					for _, thd := range []float64{0.01, 0.1, 0.4} {
						out = append(out, setting{c, f, angle, load, thd})
					}
				}
			}
		}
	}
	return out
}

// assess measures a trial and returns its doubts. The record is given the length of a week: how long a week is, is not
// what is tried here.
func (t *trial) assess() ([]fitness.Doubt, error) {
	src := synth.New(t.recording)
	sum, err := harmonics.Measure(context.Background(), src, t.sheet, harmonics.Options{Workers: 1})
	if err != nil {
		return nil, err
	}
	sum.Duration = 7 * 86400
	for range 1008 {
		sum.Tens = append(sum.Tens, harmonics.Interval{Complete: true})
	}
	return fitness.Assess(t.sheet, src.Header(), nil, sum), nil
}

type tally struct{ trials, missed, alarms, twins int }

// Each fault is put into otherwise clean recordings: the right code on the right channel, and nothing else of weight
// caution or more. Clean recordings raise none.
func TestMatrix(t *testing.T) {
	started := time.Now()
	type job struct {
		name string
		trial
	}
	var jobs []job
	for i, s := range settings() {
		jobs = append(jobs, job{"clean", clean(s)})
		for k, f := range faults {
			if (i+k)%5 != 0 { // a fifth of the settings for each fault, another fifth for the next
				continue
			}
			if tr := clean(s); f.apply(&tr, i/5) {
				jobs = append(jobs, job{f.name, tr})
			}
		}
	}
	results := make([]string, len(jobs))
	var wg sync.WaitGroup
	next := make(chan int)
	for range 2 {
		wg.Go(func() {
			for i := range next {
				results[i] = jobs[i].judge()
			}
		})
	}
	for i := range jobs {
		next <- i
	}
	close(next)
	wg.Wait()

	tallies := map[string]*tally{}
	shown := map[string]int{}
	for i, j := range jobs {
		n := tallies[j.name]
		if n == nil {
			n = &tally{}
			tallies[j.name] = n
		}
		n.trials++
		if j.twin {
			n.twins++
		}
		r := results[i]
		if strings.Contains(r, "missed") {
			n.missed++
		}
		if strings.Contains(r, "false alarm") {
			n.alarms++
		}
		if r != "" {
			if shown[j.name]++; shown[j.name] <= 3 {
				t.Errorf("%s, %s: %s", j.name, j.setting, r)
			}
		}
	}
	t.Logf("%-32s %7s %7s %13s %29s", "fault", "trials", "missed", "false alarms", "two hook-ups look the same")
	all := tally{}
	for _, name := range append([]string{"clean"}, names()...) {
		n := tallies[name]
		t.Logf("%-32s %7d %7d %13d %29d", name, n.trials, n.missed, n.alarms, n.twins)
		all.trials, all.missed, all.alarms, all.twins = all.trials+n.trials, all.missed+n.missed, all.alarms+n.alarms, all.twins+n.twins
	}
	t.Logf("%-32s %7d %7d %13d %29d   (%.0f s)", "all", all.trials, all.missed, all.alarms, all.twins, time.Since(started).Seconds())
	if all.trials < 2000 {
		t.Errorf("%d trials, want 2000 at the least", all.trials)
	}
}

func names() []string {
	var out []string
	for _, f := range faults {
		out = append(out, f.name)
	}
	return out
}

// judge returns what is wrong with the doubts raised, or "".
func (t *trial) judge() string {
	doubts, err := t.assess()
	if err != nil {
		return "missed: " + err.Error()
	}
	var wrong []string
	found := map[site.Role]bool{}
	said := false
	for _, d := range doubts {
		switch {
		case d.Code == t.code && (len(t.channels) == 0 || slices.Contains(t.channels, d.Channel)):
			found[d.Channel] = true
		case t.twin && (d.Code == "current-reversed" || d.Code == "current-on-wrong-phase") && strings.Contains(d.Text, "As plausible"):
			said = true
		case d.Weight == fitness.Note:
		default:
			wrong = append(wrong, fmt.Sprintf("false alarm: %s on %q: %s %v", d.Code, d.Channel, d.Text, d.Evidence))
		}
	}
	if t.code == "" || said {
		return strings.Join(wrong, "; ")
	}
	for _, c := range t.channels {
		if !found[c] {
			wrong = append(wrong, fmt.Sprintf("missed: %s on %s", t.code, c))
		}
	}
	if len(t.channels) == 0 && len(found) == 0 {
		wrong = append(wrong, "missed: "+t.code)
	}
	return strings.Join(wrong, "; ")
}
