package report

import (
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// NaN is a number that was not measured.
var NaN = Number(math.NaN())

// orNaN is for figures of which 0 means that they are not known.
func orNaN(v float64) Number {
	if v == 0 {
		return NaN
	}
	return Number(v)
}

func channelsOf(sum *harmonics.Summary, supply site.Supply) []Channel {
	out := []Channel{}
	for i := range sum.Channels {
		c := channelOf(&sum.Channels[i], sum, supply)
		c.LoadBins = loadBinsOf(sum, i, supply)
		out = append(out, c)
	}
	return out
}

func channelOf(c *harmonics.ChannelSummary, sum *harmonics.Summary, supply site.Supply) Channel {
	out := Channel{
		Name: string(c.Role), Source: c.Source, Quantity: "current", Unit: c.Unit,
		RMS: Number(c.RMS), DC: Number(c.DC), Peak: Number(c.Peak), Crest: Number(c.Crest),
		Fundamental: Fundamental{Number(c.Fundamental), Number(c.Angle1)},
		NoiseFloor:  Number(c.FloorPct),
		THD:         statsOf(c.THDPct, c.THD3s, c.THD10m, 1),
		KFactor:     NaN, FHL: NaN,
		THCLevel:  levelStatsOf(c.THC3s, c.THC10m),
		Harmonics: []Harmonic{}, Interharmonics: []Interharmonic{},
	}
	if c.Role.Voltage() {
		out.Quantity = "voltage"
	} else {
		out.KFactor, out.FHL = Number(c.KFactor), Number(c.FHL)
	}
	if tdd, ok := tddOf(c, supply); ok {
		out.TDD = &tdd
	}
	for _, h := range c.Harmonics {
		out.Harmonics = append(out.Harmonics, Harmonic{
			Order: h.Order, Frequency: Number(float64(h.Order) * sum.Frequency.Mean), RMS: Number(h.RMS), Pct: Number(h.Pct),
			Angle: Number(h.Angle), AboveNoise: h.Above, Floor: Number(h.Floor), Stats: statsOf(h.Pct, h.Share3s, h.Share10m, 1),
			Level: levelStatsOf(h.Level3s, h.Level10m),
		})
	}
	for order, rms := range c.Inter {
		out.Interharmonics = append(out.Interharmonics, Interharmonic{order, Number(rms), Number(100 * rms / c.Fundamental)})
	}
	return out
}

// tddOf is the total demand distortion of a line current: its harmonics over the declared demand current. The
// neutral has none.
func tddOf(c *harmonics.ChannelSummary, supply site.Supply) (Stats, bool) {
	if !c.Role.Current() || c.Role.Neutral() || supply.DemandCurrent <= 0 {
		return Stats{}, false
	}
	scale := 100 / supply.DemandCurrent
	return statsOf(scale*c.THDPct/100*c.Fundamental, c.THC3s, c.THC10m, scale), true
}

// statsOf brings the statistics of one quantity into per cent by scale. whole is the value over the whole recording,
// already in per cent, which stands for the mean when there is no interval to take a mean of.
func statsOf(whole float64, threes, tens harmonics.Stats, scale float64) Stats {
	out := Stats{Mean: Number(whole), Seconds: intervalStatsOf(threes, scale), Minutes: intervalStatsOf(tens, scale)}
	switch {
	case threes.N > 0:
		out.Mean = Number(scale * threes.Mean)
	case tens.N > 0:
		out.Mean = Number(scale * tens.Mean)
	}
	return out
}

func intervalStatsOf(s harmonics.Stats, scale float64) *IntervalStats {
	if s.N == 0 {
		return nil
	}
	k := Number(scale)
	return &IntervalStats{
		N: s.N, P50: k * Number(s.P50), P95: k * Number(s.P95), P99: k * Number(s.P99), Max: k * Number(s.Max),
		P95Low: k * Number(s.P95Low), P95High: k * Number(s.P95High),
	}
}
