// Package plant estimates what measured harmonics do to the plant: transformers, neutral conductors, cables, capacitors
// and motors. It screens: the figures show where a qualified engineer should look, they are no design.
//
// Each formula is a function of its own with its source; [Screen] applies them to a summary and a site sheet, as far as
// the sheet declares what they need, and says each result in words.
//
// A [Spectrum] is indexed by order and holds rms values; per unit means 1 for the rated or nominal value.
package plant

import (
	"cmp"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// Topics of figures.
const (
	Transformer = "transformer"
	Neutral     = "neutral"
	Cable       = "cable"
	Capacitor   = "capacitor"
	Resonance   = "resonance"
	Motor       = "motor"
)

// A Figure is one result of the screening.
type Figure struct {
	Topic string  // such as Transformer
	Name  string  // such as "K-factor of the load"
	Value float64 // in Unit
	Unit  string  // "A", "%", or "" for a plain number
	Text  string  // what it means, with the number, and its source
}

// Screen gives every figure that the summary and the site sheet have the inputs for, in the order of the topics. Of
// several phases it takes the one where the effect is worst, and names it.
func Screen(sheet site.Sheet, sum *harmonics.Summary) []Figure {
	s := screening{sheet: sheet, supply: sheet.Supply, sum: sum}
	s.transformer()
	s.neutral()
	s.cable()
	s.capacitor()
	s.resonance()
	s.motor()
	return s.figures
}

type screening struct {
	sheet   site.Sheet
	supply  site.Supply
	sum     *harmonics.Summary
	figures []Figure
}

func (s *screening) add(f Figure) { s.figures = append(s.figures, f) }

// currents are the line currents, voltages those of the phases to neutral or, where there is none, between lines.
func (s *screening) currents() []*harmonics.ChannelSummary {
	return s.channels(func(r site.Role) bool { return r.Current() && !r.Neutral() })
}

func (s *screening) voltages() []*harmonics.ChannelSummary {
	toNeutral := s.channels(func(r site.Role) bool { return r.Voltage() && !r.Neutral() && !r.LineToLine() })
	if len(toNeutral) > 0 {
		return toNeutral
	}
	return s.channels(site.Role.LineToLine)
}

// acrossLines are the voltages that a bank between the lines sees, as far as they were recorded.
func (s *screening) acrossLines() []*harmonics.ChannelSummary {
	if between := s.channels(site.Role.LineToLine); len(between) > 0 {
		return between
	}
	return s.voltages()
}

// channels are those of a kind that carry anything.
func (s *screening) channels(want func(site.Role) bool) []*harmonics.ChannelSummary {
	var out []*harmonics.ChannelSummary
	for i := range s.sum.Channels {
		if c := &s.sum.Channels[i]; want(c.Role) && c.Fundamental > 0 && len(c.Harmonics) > 0 {
			out = append(out, c)
		}
	}
	return out
}

// worst returns the channel with the highest value of a figure, nil when there is no channel.
func worst(channels []*harmonics.ChannelSummary, of func(*harmonics.ChannelSummary) float64) (*harmonics.ChannelSummary, float64) {
	var best *harmonics.ChannelSummary
	var highest float64
	for _, c := range channels {
		if v := of(c); best == nil || cmp.Compare(v, highest) > 0 {
			best, highest = c, v
		}
	}
	return best, highest
}
