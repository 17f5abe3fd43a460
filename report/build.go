package report

import (
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// Inputs are what a survey is made from.
type Inputs struct {
	Sheet    site.Sheet // as used: completed, with its guesses
	Header   wave.Header
	Notes    []wave.Note // of the header and of the reading
	Summary  *harmonics.Summary
	Doubts   []fitness.Doubt
	Findings []limits.Finding
	RuleSets []*limits.RuleSet // those applied
	Plant    []Screening
	Hashes   map[string]string // SHA-256 in hex, by path
	Version  string
	MadeAt   time.Time
}

// Build makes the survey. It measures and judges nothing: it brings what was found into one shape, and finds words.
func Build(in Inputs) *Survey {
	s := &Survey{
		Schema:    Schema,
		Program:   Program{Name: "wavetally", Version: in.Version},
		MadeAt:    in.MadeAt.UTC(),
		Site:      tidySheet(in.Sheet),
		Recording: recordingOf(in),
		Channels:  channelsOf(in.Summary, in.Sheet.Supply),
		Power:     powerOf(in.Summary.Power),
		Unbalance: unbalanceOf(in.Summary.Power),
		Neutral:   neutralOf(in.Summary.Power),
		Plant:     in.Plant,
		Findings:  findingsOf(in.Findings),
		Doubts:    doubtsOf(in.Doubts, allNotes(in), in.Sheet, in.Header),
		Cautions:  SafetyCautions(),
		Summary:   in.Summary,
		Judged:    in.Findings,
		RuleSets:  in.RuleSets,
	}
	if s.Plant == nil {
		s.Plant = []Screening{}
	}
	s.Headline = headlineOf(s)
	s.Method = methodOf(s)
	return s
}

// tidySheet is the sheet as used: scales that were left out are 1, and lists are lists even where nothing was declared, so
// that readers of the JSON need not tell null from empty.
func tidySheet(sheet site.Sheet) site.Sheet {
	if sheet.Guessed == nil {
		sheet.Guessed = []string{}
	}
	if sheet.Limits.Apply == nil {
		sheet.Limits.Apply = []string{}
	}
	if sheet.Supply.CapacitorKvar == nil {
		sheet.Supply.CapacitorKvar = []float64{}
	}
	channels := make([]site.Channel, 0, len(sheet.Channels))
	for _, c := range sheet.Channels {
		if c.Scale == 0 {
			c.Scale = 1
		}
		channels = append(channels, c)
	}
	sheet.Channels = channels
	return sheet
}

func recordingOf(in Inputs) Recording {
	sum := in.Summary
	r := Recording{
		Kind:      "waveform",
		Files:     filesOf(in),
		Duration:  Number(sum.Duration),
		Windows:   Windows(sum.Windows),
		Coverage:  coverageOf(sum, in.Sheet.Site.Timezone),
		Gaps:      []Gap{},
		Frequency: MinMeanMax{Number(sum.Frequency.Mean), Number(sum.Frequency.Min), Number(sum.Frequency.Max)},
		Events:    []Event{},
	}
	if sum.Intervals {
		r.Kind = "intervals"
	}
	if !sum.Start.IsZero() {
		start := sum.Start
		r.Start = &start
	}
	for _, g := range sum.Gaps {
		r.Gaps = append(r.Gaps, Gap{Number(g.At), Number(g.Length)})
	}
	for _, e := range sum.Events {
		r.Events = append(r.Events, eventOf(e))
	}
	return r
}

// filesOf lists the files. How many samples each of several files gave is not kept, so it is null then.
func filesOf(in Inputs) []File {
	files := []File{}
	for _, f := range in.Header.Files {
		file := File{Name: f.Name, Format: f.Format, SHA256: in.Hashes[f.Path], Channels: len(in.Header.Channels),
			SamplingHz: orNaN(in.Summary.Rate)}
		if len(in.Header.Files) == 1 && in.Summary.Samples > 0 {
			n := in.Summary.Samples
			file.Samples = &n
		}
		files = append(files, file)
	}
	return files
}

func eventOf(e harmonics.VoltageEvent) Event {
	out := Event{At: Number(e.At), Length: Number(e.Length), ExtremeV: Number(e.Extreme), Pct: Number(e.Share), Channels: []string{}}
	switch e.Kind {
	case harmonics.Dip:
		out.Kind = "dip"
	case harmonics.Swell:
		out.Kind = "swell"
	case harmonics.Interruption:
		out.Kind = "interruption"
	}
	for _, c := range e.Channels {
		out.Channels = append(out.Channels, string(c))
	}
	return out
}

func powerOf(p *harmonics.Power) Power {
	out := Power{Phases: []PhasePower{}}
	if p == nil {
		return out
	}
	for _, q := range p.Phases {
		out.Phases = append(out.Phases, PhasePower{
			Phase: "L" + string(rune('0'+q.Phase)), P: Number(q.P), P1: Number(q.P1), Q1: Number(q.Q1), S: Number(q.S),
			S1: Number(q.S1), SN: Number(q.SN), DI: Number(q.DI), DV: Number(q.DV), SH: Number(q.SH), PF: Number(q.PF), PF1: Number(q.PF1),
		})
	}
	out.Total = totalOf(p)
	return out
}

func totalOf(p *harmonics.Power) *TotalPower {
	if e := p.Effective; e != nil {
		return &TotalPower{P: Number(e.P), P1: Number(e.P1Pos), Q1: Number(e.Q1Pos), S: Number(e.Se), SN: Number(e.SeN),
			SU1: Number(e.SU1), PF: Number(e.PFe), PF1: Number(e.PF1Pos)}
	}
	if len(p.Phases) == 1 {
		q := p.Phases[0]
		return &TotalPower{P: Number(q.P), P1: Number(q.P1), Q1: Number(q.Q1), S: Number(q.S), SN: Number(q.SN), SU1: NaN,
			PF: Number(q.PF), PF1: Number(q.PF1)}
	}
	return nil
}

func unbalanceOf(p *harmonics.Power) Unbalance {
	if p == nil {
		return Unbalance{NaN, NaN, NaN, NaN}
	}
	u := p.Unbalance
	return Unbalance{Number(u.U2), Number(u.U0), Number(u.I2), Number(u.I0)}
}

func neutralOf(p *harmonics.Power) *Neutral {
	if p == nil || p.Neutral == nil {
		return nil
	}
	return &Neutral{Number(p.Neutral.RMS), Number(p.Neutral.TriplenRMS), p.Neutral.Computed}
}

func findingsOf(in []limits.Finding) []Finding {
	out := []Finding{}
	for _, f := range in {
		out = append(out, Finding{
			RuleSet: f.RuleSet, Clause: f.Clause, Channel: string(f.Channel), Quantity: f.Quantity, Order: f.Order,
			Statistic: f.Statistic, Value: Number(f.Value), ValueLow: Number(f.ValueLow), ValueHigh: Number(f.ValueHigh),
			SampleLow: Number(f.SampleLow), SampleHigh: Number(f.SampleHigh), Over: Number(f.OverPct), From: Number(f.From), To: Number(f.To),
			Floor: Number(f.Floor), Limit: Number(f.Limit), LimitLevel: Number(f.Limit * f.BasisSize / 100), Unit: f.Unit, Share: Number(f.Share), Result: f.Result, Why: f.Why, Basis: f.Basis,
			N: f.N, Indicative: f.Indicative, Unverified: f.Unverified,
		})
	}
	return out
}
