// Package trend compares surveys of one site from month to month: is it within limits, is it worse, since when, did the
// fix work, how long until the limit. Its result, a [Report], is trend.json (schema "wavetally.trend/1").
package trend

import (
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"math"
	"slices"
	"sort"
	"strings"
	"time"

	"wavetally/report"
)

// Facts are what a logbook keeps of one survey: what comparison needs, a hundredth of survey.json.
type Facts struct {
	Site     string    `json:"site"`
	Start    time.Time `json:"start"`
	Duration float64   `json:"duration_s"`
	Zone     string    `json:"zone"`
	MadeAt   time.Time `json:"made_at"`
	Nominal  float64   `json:"nominal_hz"`
	Files    []string  `json:"files"` // SHA-256
	Config   Config    `json:"config"`

	Coverage report.Coverage `json:"coverage"`
	Channels []ChannelFacts  `json:"channels"`
}

// Config is what must not change for values to be comparable: ratios, nominal values, method, rule sets, demand current.
type Config struct {
	Connection string   `json:"connection"`
	NominalV   float64  `json:"nominal_v"`
	NominalHz  float64  `json:"nominal_hz"`
	Point      string   `json:"point"`
	DemandA    float64  `json:"demand_a"`
	RuleSets   []string `json:"rule_sets"`
	Channels   []string `json:"channels"` // "I1 = CH4 × 1"
	Method     string   `json:"method"`
}

// ID is short and the same for equal configurations.
func (c Config) ID() string {
	b, err := json.Marshal(c)
	if err != nil { // plain strings and numbers: cannot be
		panic(err)
	}
	sum := sha256.Sum256(b)
	return hex.EncodeToString(sum[:4])
}

// Differs says in words what changed from c to d.
func (c Config) Differs(d Config) string {
	var out []string
	add := func(what string, changed bool) {
		if changed {
			out = append(out, what)
		}
	}
	add("the connection", c.Connection != d.Connection)
	add("the nominal voltage", c.NominalV != d.NominalV)
	add("the nominal frequency", c.NominalHz != d.NominalHz)
	add("the measuring point", c.Point != d.Point)
	add("the demand current", c.DemandA != d.DemandA)
	add("the rule sets", !slices.Equal(c.RuleSets, d.RuleSets))
	add("the channels or their ratios", !slices.Equal(c.Channels, d.Channels))
	add("the method", c.Method != d.Method)
	return strings.Join(out, ", ")
}

// ChannelFacts are one channel's.
type ChannelFacts struct {
	Name     string           `json:"name"`
	Quantity string           `json:"quantity"` // "voltage" or "current"
	Unit     string           `json:"unit"`
	RMS      report.Number    `json:"rms"`
	K        report.Number    `json:"k"`
	Rows     []Row            `json:"rows"`
	LoadBins []report.LoadBin `json:"load_bins,omitempty"`
}

// A Row is one quantity of a channel, with its lowest limit in the same unit.
type Row struct {
	Quantity string             `json:"quantity"` // "harmonic", "thd" or "tdd"
	Order    int                `json:"order"`
	Unit     string             `json:"unit"`
	Stats    *report.LevelStats `json:"stats"`
	Limit    report.Number      `json:"limit"`
	RuleSet  string             `json:"rule_set"`
}

// ErrNoStart says that a survey cannot be placed in time.
var ErrNoStart = errors.New("the recording has no start time, so it belongs to no month; survey a recording that has one")

// ErrNoName says that a survey cannot be told from another site's.
var ErrNoName = errors.New("the site has no name, so its months cannot be told from another site's; put a name into the site sheet and survey again")

// FactsOf takes from a survey what comparison needs.
func FactsOf(s *report.Survey) (*Facts, error) {
	if s.Recording.Start == nil {
		return nil, ErrNoStart
	}
	if s.Site.Site.Name == "" {
		return nil, ErrNoName
	}
	f := &Facts{Site: s.Site.Site.Name, Start: s.Recording.Start.UTC(), Duration: float64(s.Recording.Duration),
		Zone: s.Site.Site.Timezone, MadeAt: s.MadeAt, Nominal: s.Site.Supply.NominalFrequency, Coverage: s.Recording.Coverage, Config: configOf(s)}
	for _, file := range s.Recording.Files {
		f.Files = append(f.Files, file.SHA256)
	}
	sort.Strings(f.Files)
	for i := range s.Channels {
		f.Channels = append(f.Channels, channelFacts(s, &s.Channels[i]))
	}
	return f, nil
}

func configOf(s *report.Survey) Config {
	c := Config{Connection: s.Site.Supply.Connection, NominalV: s.Site.Supply.NominalVoltage, NominalHz: s.Site.Supply.NominalFrequency,
		Point: s.Site.Supply.Point, DemandA: s.Site.Supply.DemandCurrent, RuleSets: slices.Clone(s.Site.Limits.Apply), Method: s.Recording.Kind + ", subgroups to 50"}
	sort.Strings(c.RuleSets)
	for _, ch := range s.Site.Channels {
		if ch.Measures != "" {
			c.Channels = append(c.Channels, fmt.Sprintf("%s = %s × %g", ch.Measures, ch.Source, ch.Gain()))
		}
	}
	sort.Strings(c.Channels)
	return c
}

// Key tells whether two surveys are the same: of the same files, at the same site, in the same configuration.
func (f *Facts) Key() string {
	h := sha256.Sum256([]byte(f.Site + "\x00" + strings.Join(f.Files, "\x00") + "\x00" + f.Config.ID() + "\x00" + f.Start.UTC().Format(time.RFC3339Nano)))
	return hex.EncodeToString(h[:])
}

func channelFacts(s *report.Survey, c *report.Channel) ChannelFacts {
	out := ChannelFacts{Name: c.Name, Quantity: c.Quantity, Unit: c.Unit, RMS: c.RMS, K: c.KFactor, LoadBins: c.LoadBins}
	for _, h := range c.Harmonics {
		if h.Level == nil {
			continue
		}
		limit, set := limitOf(s, c, "harmonic", h.Order)
		out.Rows = append(out.Rows, Row{Quantity: "harmonic", Order: h.Order, Unit: c.Unit, Stats: h.Level, Limit: limit, RuleSet: set})
	}
	if st := percent(c.THD); st != nil && c.Quantity == "voltage" {
		limit, set := limitOf(s, c, "thd", 0)
		out.Rows = append(out.Rows, Row{Quantity: "thd", Unit: "%", Stats: st, Limit: limit, RuleSet: set})
	}
	if c.TDD != nil {
		if st := percent(*c.TDD); st != nil {
			limit, set := limitOf(s, c, "tdd", 0)
			out.Rows = append(out.Rows, Row{Quantity: "tdd", Unit: "%", Stats: st, Limit: limit, RuleSet: set})
		}
	}
	return out
}

func percent(s report.Stats) *report.LevelStats {
	st, interval := s.Minutes, report.Number(600)
	if st == nil {
		st, interval = s.Seconds, 3
	}
	if st == nil {
		return nil
	}
	return &report.LevelStats{Interval: interval, N: st.N, P50: st.P50, P95: st.P95, P99: st.P99, Max: st.Max}
}

// limitOf returns the lowest limit that any rule set puts on a quantity: of harmonics in the channel's unit, of totals in
// per cent.
func limitOf(s *report.Survey, c *report.Channel, quantity string, order int) (report.Number, string) {
	lowest, set := report.Number(math.NaN()), ""
	for _, f := range s.Findings {
		if f.Channel != c.Name || f.Quantity != quantity || f.Order != order || !f.Limit.Known() {
			continue
		}
		limit := f.Limit
		if quantity == "harmonic" {
			if limit = f.LimitLevel; !limit.Known() {
				limit = f.Limit / 100 * c.Fundamental.RMS
			}
		}
		if !(lowest <= limit) {
			lowest, set = limit, f.RuleSet
		}
	}
	return lowest, set
}
