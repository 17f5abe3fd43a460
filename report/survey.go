// Package report decides what a survey says: the Survey value, from which every document is made, and its JSON form
// (schema "wavetally.survey/1", documented in DEVELOPERS.md).
package report

import (
	"math"
	"strconv"
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
)

// Schema names the form of survey.json.
const Schema = "wavetally.survey/1"

// A Number is a measured value: NaN, "not measured", is null in JSON and never 0. JSON carries eight significant
// digits, beyond any instrument, so that files compare and diff well.
type Number float64

// MarshalJSON writes null for NaN and infinities.
func (n Number) MarshalJSON() ([]byte, error) {
	f := float64(n)
	if math.IsNaN(f) || math.IsInf(f, 0) {
		return []byte("null"), nil
	}
	if f == 0 {
		return []byte("0"), nil // no negative zero
	}
	short, err := strconv.ParseFloat(strconv.FormatFloat(f, 'e', 7, 64), 64)
	if err != nil {
		return nil, err
	}
	format := byte('f')
	if a := math.Abs(short); a < 1e-6 || a >= 1e15 {
		format = 'e'
	}
	return strconv.AppendFloat(nil, short, format, -1, 64), nil
}

// UnmarshalJSON reads null as NaN.
func (n *Number) UnmarshalJSON(b []byte) error {
	if string(b) == "null" {
		*n = Number(math.NaN())
		return nil
	}
	f, err := strconv.ParseFloat(string(b), 64)
	*n = Number(f)
	return err
}

// Known reports whether the number was measured.
func (n Number) Known() bool { return !math.IsNaN(float64(n)) && !math.IsInf(float64(n), 0) }

// A Survey is one recording, measured and judged. The fields up to Doubts are survey.json; the rest feeds the
// documents' charts and tables.
type Survey struct {
	Schema    string       `json:"schema"`
	Program   Program      `json:"program"`
	MadeAt    time.Time    `json:"made_at"`
	Site      site.Sheet   `json:"site"`
	Recording Recording    `json:"recording"`
	Channels  []Channel    `json:"channels"`
	Power     Power        `json:"power"`
	Unbalance Unbalance    `json:"unbalance"`
	Neutral   *Neutral     `json:"neutral"`
	Plant     []Screening  `json:"plant"`
	Findings  []Finding    `json:"findings"`
	Doubts    []Doubt      `json:"doubts"`
	Headline  Headline     `json:"headline"`
	Method    []MethodItem `json:"method"`
	Cautions  []string     `json:"safety_cautions"`

	Summary  *harmonics.Summary `json:"-"` // series, capture, spectrogram, power by order
	Judged   []limits.Finding   `json:"-"` // as Findings, in the same order, with what live formulas need
	RuleSets []*limits.RuleSet  `json:"-"` // those applied
}

// Program says what made the survey.
type Program struct {
	Name    string `json:"name"`
	Version string `json:"version"`
}

// Recording describes the files and the time they span.
type Recording struct {
	Kind      string     `json:"kind"` // "waveform" or "intervals"
	Files     []File     `json:"files"`
	Start     *time.Time `json:"start"`
	Duration  Number     `json:"duration_s"`
	Windows   Windows    `json:"windows"`
	Coverage  Coverage   `json:"coverage"`
	Gaps      []Gap      `json:"gaps"`
	Frequency MinMeanMax `json:"frequency_hz"`
	Events    []Event    `json:"events"`
}

// A File is one input file.
type File struct {
	Name       string `json:"name"`
	Format     string `json:"format"`
	SHA256     string `json:"sha256"`
	Channels   int    `json:"channels"`
	Samples    *int64 `json:"samples"` // per channel; null where several files make up the recording
	SamplingHz Number `json:"sampling_hz"`
}

// Windows counts the analysis windows.
type Windows struct {
	Cycles  int `json:"cycles"`
	Total   int `json:"total"`
	Used    int `json:"used"`
	Flagged int `json:"flagged"`
}

// A Gap is a stretch without usable samples.
type Gap struct {
	At     Number `json:"at_s"`
	Length Number `json:"length_s"`
}

// An Event is a voltage dip, swell or interruption.
type Event struct {
	Kind     string   `json:"kind"`
	At       Number   `json:"at_s"`
	Length   Number   `json:"length_s"`
	ExtremeV Number   `json:"extreme_v"`
	Pct      Number   `json:"pct_of_nominal"`
	Channels []string `json:"channels"`
}

// MinMeanMax is what it says.
type MinMeanMax struct {
	Mean Number `json:"mean"`
	Min  Number `json:"min"`
	Max  Number `json:"max"`
}

// A Channel is everything measured on one channel.
type Channel struct {
	Name           string          `json:"name"`
	Source         string          `json:"source"`
	Quantity       string          `json:"quantity"` // "voltage" or "current"
	Unit           string          `json:"unit"`
	RMS            Number          `json:"rms"`
	DC             Number          `json:"dc"`
	Peak           Number          `json:"peak"`
	Crest          Number          `json:"crest_factor"`
	Fundamental    Fundamental     `json:"fundamental"`
	NoiseFloor     Number          `json:"noise_floor_pct"`
	THD            Stats           `json:"thd_pct"`
	TDD            *Stats          `json:"tdd_pct"`        // nil without a declared demand current
	THCLevel       *LevelStats     `json:"harmonic_level"` // of the root of the sum of squares of orders 2 to 50
	KFactor        Number          `json:"k_factor"`
	FHL            Number          `json:"harmonic_loss_factor"`
	Harmonics      []Harmonic      `json:"harmonics"`
	LoadBins       []LoadBin       `json:"load_bins"` // phase currents only
	Interharmonics []Interharmonic `json:"interharmonics"`
}

// Fundamental is order 1 of a channel.
type Fundamental struct {
	RMS   Number `json:"rms"`
	Angle Number `json:"angle_deg"`
}

// A Harmonic is one order of a channel.
type Harmonic struct {
	Order      int    `json:"order"`
	Frequency  Number `json:"frequency_hz"`
	RMS        Number `json:"rms"`
	Pct        Number `json:"pct"`
	Angle      Number `json:"angle_deg"`
	AboveNoise bool   `json:"above_noise"`
	Floor      Number `json:"noise_floor"` // rms, in the channel's unit
	Stats      Stats  `json:"stats"`

	Level *LevelStats `json:"level"` // in the channel's unit; nil where there is no interval
}

// An Interharmonic is the centred subgroup between OrderBelow and the next order.
type Interharmonic struct {
	OrderBelow int    `json:"order_below"`
	RMS        Number `json:"rms"`
	Pct        Number `json:"pct"`
}

// Stats are a quantity's statistics in per cent.
type Stats struct {
	Mean    Number         `json:"mean_pct"`
	Seconds *IntervalStats `json:"3s"`
	Minutes *IntervalStats `json:"10min"`
}

// IntervalStats are statistics over valid intervals of one length, in per cent. Percentiles are nearest-rank.
type IntervalStats struct {
	N       int    `json:"n"`
	P50     Number `json:"p50_pct"`
	P95     Number `json:"p95_pct"`
	P99     Number `json:"p99_pct"`
	Max     Number `json:"max_pct"`
	P95Low  Number `json:"p95_low_pct"` // 95 % distribution-free confidence bounds; null when n is too small
	P95High Number `json:"p95_high_pct"`
}

// Power holds one entry a phase, and the total.
type Power struct {
	Phases []PhasePower `json:"phases"`
	Total  *TotalPower  `json:"total"`
}

// PhasePower is one phase's power after IEEE 1459-2010.
type PhasePower struct {
	Phase string `json:"phase"`
	P     Number `json:"p_w"`
	P1    Number `json:"p1_w"`
	Q1    Number `json:"q1_var"`
	S     Number `json:"s_va"`
	S1    Number `json:"s1_va"`
	SN    Number `json:"sn_va"`
	DI    Number `json:"di_var"`
	DV    Number `json:"dv_var"`
	SH    Number `json:"sh_va"`
	PF    Number `json:"pf"`
	PF1   Number `json:"pf1"`
}

// TotalPower is the three-phase total after IEEE 1459-2010: effective apparent power.
type TotalPower struct {
	P   Number `json:"p_w"`
	P1  Number `json:"p1_w"`
	Q1  Number `json:"q1_var"` // of the positive sequence
	S   Number `json:"s_va"`   // effective, Se; a single phase's own S where there is one phase
	SN  Number `json:"sn_va"`
	SU1 Number `json:"su1_va"`
	PF  Number `json:"pf"`
	PF1 Number `json:"pf1"`
}

// Unbalance is in per cent of the positive sequence.
type Unbalance struct {
	U2 Number `json:"u2_pct"`
	U0 Number `json:"u0_pct"`
	I2 Number `json:"i2_pct"`
	I0 Number `json:"i0_pct"`
}

// Neutral is the neutral conductor's current.
type Neutral struct {
	RMS      Number `json:"rms"`
	Triplen  Number `json:"triplen_rms"`
	Computed bool   `json:"computed"`
}

// A Screening is one figure on what the harmonics do to the plant: a screening, not a design.
type Screening struct {
	Topic string `json:"topic"` // "transformer", "neutral", "cable", "capacitor", "resonance", "motor"
	Name  string `json:"name"`
	Value Number `json:"value"`
	Unit  string `json:"unit"`
	Text  string `json:"text"` // what it means, with the number, and its source
}

// A Finding is one limit applied to one value.
type Finding struct {
	RuleSet    string `json:"rule_set"`
	Clause     string `json:"clause"`
	Channel    string `json:"channel"`
	Quantity   string `json:"quantity"`
	Order      int    `json:"order"`
	Statistic  string `json:"statistic"`
	Value      Number `json:"value"`
	ValueLow   Number `json:"value_low"` // value less and plus the declared uncertainty: what the result rests on
	ValueHigh  Number `json:"value_high"`
	SampleLow  Number `json:"sample_low"` // 95 % confidence bounds of the percentile; null when unknown
	SampleHigh Number `json:"sample_high"`
	Over       Number `json:"over_pct"` // share of the intervals behind value that are above the limit; null when unknown
	From       Number `json:"from_s"`   // the week or day that governs, else the whole record
	To         Number `json:"to_s"`
	Floor      Number `json:"noise_floor"` // what noise alone reads, in unit; null when unknown
	Limit      Number `json:"limit"`
	LimitLevel Number `json:"limit_level"` // the limit in the channel's unit; null where it is of the fundamental
	Unit       string `json:"unit"`
	Share      Number `json:"share_pct"`
	Result     string `json:"result"`
	Why        string `json:"why"`
	Basis      string `json:"basis"`
	N          int    `json:"n"`          // intervals behind value
	Indicative bool   `json:"indicative"` // value is the nearest the record gives, not the statistic the rule asks for
	Unverified bool   `json:"unverified"` // the limit is from memory, not corroborated
}

// A Doubt is anything in the data that weakens a number.
type Doubt struct {
	Code     string            `json:"code"`
	Weight   string            `json:"weight"`
	Channel  string            `json:"channel"`
	Text     string            `json:"text"`
	Evidence map[string]Number `json:"evidence"`
	Proposal []string          `json:"proposal,omitempty"`
}

// Headline is what page 1 and the terminal say, in sentences with numbers.
type Headline struct {
	Verdict string   `json:"verdict"` // the worst result over all findings
	Answers []string `json:"answers"` // one sentence each: voltage, current
	Fitness string   `json:"fitness"` // how good the record is, one sentence
	Next    []string `json:"next"`    // at most three actions, each with how to verify
	Not     []string `json:"not_examined"`
}
