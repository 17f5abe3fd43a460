package xlsx

import (
	"fmt"
	"math"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/site"
	"wavetally/report"
)

// What a record allows a finding to be, whatever its value and limit.
const (
	allowsAny     = "any result"
	allowsOpen    = "undecided"    // the record is shorter than the statistic
	allowsNothing = "not assessed" // a doubt stops the verdict, or nothing was measured
	allowsExceeds = "not within"   // a total lacks orders: it can only be seen to exceed

	levelUnitShare = "% of fund."
	levelUnitBasis = "% of basis"
)

// A line is one finding as the verdict sheets need it.
type line struct {
	limits.Finding
	regime *regime // nil where the rule set is not at hand
	force  force
	allows string
	size   float64 // of the basis; NaN for the fundamental or unknown

	// What the verdict rests on, in the channel's unit, or in per cent where the basis is the fundamental.
	measured, low, high, noise float64
	relative                   bool // the basis is the fundamental
}

// decide gives the result as limits.Judge does: the formula of the result column, in Go.
func decide(stop, allows string, value, low, high, limit, noise float64) string {
	switch {
	case stop != "" || math.IsNaN(value) || math.IsNaN(limit) || allows == allowsNothing:
		return limits.NotAssessed
	case allows == allowsOpen || noise > limit/2 && !(low*low-noise*noise > limit*limit):
		return limits.Undecided
	case low > limit:
		return limits.Exceeds
	case allows == allowsExceeds || high > limit:
		return limits.Undecided
	}
	return limits.Within
}

// lines prepares the survey's findings on voltages or on currents.
func (b *book) lines(forces map[forceKey]force, voltage bool) []line {
	var out []line
	doubts := doubtsOf(b.survey.Doubts)
	for _, f := range b.judged() {
		if f.Channel.Voltage() == voltage {
			out = append(out, b.line(f, forces, doubts))
		}
	}
	return out
}

// judged are the findings with what formulas need; those of a survey read back from JSON have less.
func (b *book) judged() []limits.Finding {
	if len(b.survey.Judged) == len(b.survey.Findings) {
		return b.survey.Judged
	}
	nan := math.NaN()
	var out []limits.Finding
	for _, f := range b.survey.Findings {
		out = append(out, limits.Finding{RuleSet: f.RuleSet, Clause: f.Clause, Channel: site.Role(f.Channel), Quantity: f.Quantity, Order: f.Order,
			Statistic: f.Statistic, Value: float64(f.Value), ValueLow: float64(f.ValueLow), ValueHigh: float64(f.ValueHigh), SampleLow: nan, SampleHigh: nan,
			OverPct: nan, Level: nan, Limit: float64(f.Limit), Unit: f.Unit, Share: float64(f.Share), Result: f.Result, Why: f.Why, Basis: f.Basis, N: f.N,
			Indicative: f.Indicative, Unverified: f.Unverified, TablePct: nan, Factor: nan, OfOrder: nan, OfStat: nan, BasisSize: nan, Floor: nan})
	}
	return out
}

func doubtsOf(in []report.Doubt) []fitness.Doubt {
	var out []fitness.Doubt
	for _, d := range in {
		out = append(out, fitness.Doubt{Code: d.Code, Weight: d.Weight, Channel: site.Role(d.Channel), Text: d.Text})
	}
	return out
}

func (b *book) line(f limits.Finding, forces map[forceKey]force, doubts []fitness.Doubt) line {
	l := line{Finding: f, size: f.BasisSize, noise: math.NaN()}
	l.relative = math.IsNaN(f.BasisSize) && (f.Basis == "fundamental" || math.IsNaN(f.Level))
	kind := "current"
	if f.Channel.Voltage() {
		kind = "voltage"
	}
	if at, ok := forces[forceKey{f.RuleSet, kind, f.Order, f.Statistic}]; ok {
		l.regime, l.force = at.regime, at
	}
	l.rest(b)
	l.allows = l.allowed(b, doubts)
	return l
}

// rest works out what the verdict rests on before the declared uncertainty is put to it, in the units of the basis.
func (l *line) rest(b *book) {
	u := l.uncertainty(b) / 100
	unit := 1.0
	l.measured = l.Value
	if !l.relative {
		unit = l.size / 100
		l.measured = l.Level
	}
	l.low, l.high = l.ValueLow/(1-u)*unit, l.ValueHigh/(1+u)*unit
	if !l.Indicative {
		l.low, l.high = l.measured, l.measured // exactly, without the rounding of the way there and back
	} else if math.IsNaN(l.low) {
		l.low, l.high = l.measured, l.measured
	}
	l.noise = l.Floor * unit
	if math.IsNaN(l.noise) && !l.relative {
		l.noise = l.noiseLevel(b)
	}
}

// noiseLevel is what noise alone reads, in the channel's unit, where the finding cannot tell since its basis was not
// declared.
func (l *line) noiseLevel(b *book) float64 {
	if b.survey.Summary == nil {
		return math.NaN()
	}
	ch := b.survey.Summary.Channel(l.Channel)
	switch {
	case ch == nil:
		return math.NaN()
	case l.Order > 0:
		return ch.H(l.Order).Floor
	}
	sum := 0.0
	for h := 2; h <= l.Top; h++ {
		if f := ch.H(h).Floor; !math.IsNaN(f) {
			sum += f * f
		}
	}
	return math.Sqrt(sum)
}

// uncertainty is the one that the finding was made with, in per cent of reading.
func (l *line) uncertainty(b *book) float64 {
	if b.survey.Summary != nil {
		if ch := b.survey.Summary.Channel(l.Channel); ch != nil {
			return ch.Uncertainty
		}
	}
	for _, c := range b.survey.Site.Channels {
		if site.Role(c.Measures) == l.Channel {
			return c.Uncertainty
		}
	}
	return 0
}

// allowed tells what the record allows. What it cannot tell from the finding itself, it takes from the survey's result:
// a result that is more careful than value and limit alone would give stays so.
func (l *line) allowed(b *book, doubts []fitness.Doubt) string {
	known := allowsAny
	switch {
	case l.stoppedBy(doubts) || math.IsNaN(l.measured):
		known = allowsNothing
	case l.Indicative:
		known = allowsOpen
	case l.lacksOrders(b):
		known = allowsExceeds
	}
	switch {
	case l.Result == l.decided(known):
		return known
	case l.Result == limits.NotAssessed:
		return allowsNothing
	case l.Result == limits.Undecided:
		return allowsOpen
	}
	return known
}

// stoppedBy reports whether a doubt would take away even a clear verdict, or what a record too short leaves of one.
func (l *line) stoppedBy(doubts []fitness.Doubt) bool {
	clear := l.Finding
	clear.Result = limits.Within
	if l.Indicative {
		clear.Result = limits.Undecided
	}
	return fitness.Apply([]limits.Finding{clear}, doubts)[0].Result == limits.NotAssessed
}

func (l *line) lacksOrders(b *book) bool {
	if l.Order != 0 || b.survey.Summary == nil {
		return false
	}
	ch := b.survey.Summary.Channel(l.Channel)
	return ch != nil && ch.TopOrder > 0 && ch.TopOrder < l.Top
}

// decided is the result at the survey's inputs.
func (l *line) decided(allows string) string {
	stop := ""
	if l.regime != nil {
		stop = l.regime.stop()
	}
	return decide(stop, allows, l.Value, l.ValueLow, l.ValueHigh, l.Limit, l.Floor)
}

// unit is that of the measured numbers.
func (l *line) unit() string {
	switch {
	case l.relative && l.Basis != "fundamental":
		return levelUnitBasis // of a survey read back from JSON
	case l.relative:
		return levelUnitShare
	case l.Channel.Voltage():
		return "V"
	}
	return "A"
}

// sizeCell is the number that per cent are of.
func (l *line) sizeCell(in inputs) cell {
	switch {
	case l.relative:
		return none
	case l.Channel.Voltage() && in.nominal[l.Channel] != "":
		return number(l.size, computedFormat).orEmpty().live(in.nominal[l.Channel])
	case l.Channel.Current():
		return number(l.size, computedFormat).orEmpty().live(fmt.Sprintf(`IF(N(%[1]s)>0,%[1]s,"")`, nameIL))
	}
	return measured(l.size)
}
