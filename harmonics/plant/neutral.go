package plant

import (
	"fmt"
	"math"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// NeutralCurrent is the neutral current of a balanced load: orders 3, 9, 15 … of the three phases add up, all others
// cancel. It is three times their rms in one phase.
func NeutralCurrent(phase Spectrum) float64 { return 3 * phase.Triplen() }

func (s *screening) neutral() {
	if s.sum.Power == nil || s.sum.Power.Neutral == nil {
		return
	}
	n := s.sum.Power.Neutral
	how := "measured"
	if n.Computed {
		how = "computed from the phase currents, not measured"
	}
	text := fmt.Sprintf("%s A in the neutral, %s; %s A of it in orders 3, 9, 15 and so on.", num(n.RMS), how, num(n.TriplenRMS))
	c, line := worst(s.currents(), func(c *harmonics.ChannelSummary) float64 { return c.RMS })
	if c != nil && line > 0 {
		share := n.RMS / line
		text += fmt.Sprintf(" That is %s %% of the highest line current (%s, %s A).", num(100*share), c.Role, num(line))
		switch {
		case share > 1:
			text += " The neutral carries more than a line: check its section and the rating of each part in its way."
		case n.TriplenRMS > line/2:
			text += " Its triplen part alone is more than half a line current."
		}
	}
	s.add(Figure{Neutral, "Neutral current", n.RMS, "A", text})
}

// A CableFactor is the reduction of IEC 60364-5-52, annex E, for cables with four or five loaded cores.
type CableFactor struct {
	Factor    float64 // by which the tabulated current-carrying capacity is multiplied
	OnNeutral bool    // the section is chosen by the neutral current instead of the line current
}

// ThirdHarmonicFactor returns the reduction for a third harmonic in per cent of the line current: 1.0 up to 15 %, 0.86 up
// to 33 %, then by the neutral current 0.86 up to 45 % and 1.0 above (IEC 60364-5-52:2009, annex E; values from memory).
// It holds for a balanced load and a neutral of the lines' section and material.
func ThirdHarmonicFactor(third float64) CableFactor {
	switch {
	case third <= 15:
		return CableFactor{1, false}
	case third <= 33:
		return CableFactor{0.86, false}
	case third <= 45:
		return CableFactor{0.86, true}
	}
	return CableFactor{1, true}
}

// CableCapacity returns the tabulated current-carrying capacity in A that a four- or five-core cable needs for a line
// current in A with the given third harmonic in per cent of it. The branch is chosen first: dividing a line current by
// the factor where the neutral rules would come out too small.
func CableCapacity(line, third float64) float64 {
	f := ThirdHarmonicFactor(third)
	if f.OnNeutral {
		return 3 * line * third / 100 / f.Factor
	}
	return line / f.Factor
}

// otherTriplens and neutralOverload are where annex E says that its table no longer suffices, per cent of the line current.
const (
	otherTriplens   = 10
	neutralOverload = 135
)

func (s *screening) cable() {
	if s.supply.Connection != site.Wye4 {
		return
	}
	c, need := worst(s.currents(), func(c *harmonics.ChannelSummary) float64 {
		i := spectrumOf(c)
		return CableCapacity(i.RMS(), 100*i[3]/i.RMS())
	})
	if c == nil || len(c.Harmonics) < 9 {
		return
	}
	i := spectrumOf(c)
	line := i.RMS()
	third := 100 * i[3] / line
	f := ThirdHarmonicFactor(third)
	by := fmt.Sprintf("line current, %s A", num(line))
	if f.OnNeutral {
		by = fmt.Sprintf("neutral current, 3 × %s A", num(i[3]))
	}
	text := fmt.Sprintf("%s: the third harmonic is %s %% of the line current (rms), so a four- or five-core cable is chosen by the %s, over the factor %g: a tabulated capacity of %s A for the record's mean load (IEC 60364-5-52 annex E, from memory; balanced load).",
		c.Role, num(third), by, f.Factor, num(need))
	i[3] = 0
	if others := 100 * i.Triplen() / line; others > otherTriplens {
		text += fmt.Sprintf(" Orders 9, 15 and so on make %s %%, above 10 %%: a lower factor applies.", num(others))
	}
	if n := s.neutralRMS(); n > neutralOverload*line/100 {
		text += fmt.Sprintf(" The neutral carries %s %% of the line current, above 135 %%: choose the section by the neutral.", num(100*n/line))
	}
	s.add(Figure{Cable, "Cable capacity needed", need, "A", text})
}

func (s *screening) neutralRMS() float64 {
	if s.sum.Power == nil || s.sum.Power.Neutral == nil {
		return math.NaN()
	}
	return s.sum.Power.Neutral.RMS
}
