package limits

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics"
)

// A verdict is one finding being decided.
type verdict struct {
	*judge
	setting   *setting
	cell      *cell
	quantity  quantity
	statistic Statistic
	reading   reading
	finding   *Finding
	why       []string
}

func (v *verdict) say(format string, args ...any) {
	v.why = append(v.why, fmt.Sprintf(format, args...))
}

// decide sets Result and Why. What makes a finding not assessed goes before what leaves it undecided, and that before
// the comparison.
func (v *verdict) decide() {
	f := v.finding
	switch {
	case v.stopped():
		f.Result = NotAssessed
		if f.Indicative {
			v.why = append(v.why, v.reading.indicative)
		}
	case f.Indicative:
		f.Result = Undecided
		v.tellIndicative()
	case v.noisy() || v.partTotal():
		f.Result = Undecided
	default:
		f.Result = compare(f.ValueLow, f.ValueHigh, f.Limit)
		v.tellCompared()
	}
	if f.Result != NotAssessed {
		v.why = append(v.why, v.reading.warnings...)
		v.why = append(v.why, v.setting.mind...)
	}
	f.Why = strings.Join(v.why, "; ")
}

// compare holds a value that lies between low and high against a limit. A value at the limit is within.
func compare(low, high, limit float64) string {
	switch {
	case low > limit:
		return Exceeds
	case high <= limit:
		return Within
	}
	return Undecided // also for NaN
}

// stopped reports whether nothing can be judged, and says why.
func (v *verdict) stopped() bool {
	f := v.finding
	switch {
	case len(v.setting.stops) > 0:
		v.why = append(v.why, v.setting.stops...)
		v.tellStrictest()
	case !math.IsNaN(f.Value):
		return false
	case v.notMeasured():
		v.say("order %d was not measured: it lies above what the sampling rate supports, order %d; a faster recording would settle it",
			f.Order, v.sum.Channels[v.setting.channel].TopOrder)
	case v.reading.indicative != "":
		v.why = append(v.why, v.reading.indicative)
	default:
		v.say("the record holds no value for it")
	}
	return true
}

// notMeasured reports whether the order is above what the sampling rate supports.
func (v *verdict) notMeasured() bool {
	top := v.sum.Channels[v.setting.channel].TopOrder
	return top > 0 && v.finding.Order > top
}

// tellStrictest gives what the strictest row of the table can tell where the right one is not known.
func (v *verdict) tellStrictest() {
	f := v.finding
	if v.setting.table.rowsBy != byRatio || v.setting.fixed != nil {
		return
	}
	switch {
	case !math.IsNaN(f.Value) && f.Value <= f.Limit:
		v.say("the value is %s %% of the limit of that row, and no row is stricter", sig(f.Share, 3))
	case !math.IsNaN(f.Value):
		v.say("the value is %s %% of the limit of that row; other rows allow more", sig(f.Share, 3))
	case v.quantity.basis == basisDemand && f.Limit > 0:
		got := v.readingWithoutBasis()
		if amps := got.value; amps > 0 {
			v.reading = got
			f.Level, f.N, f.Indicative = amps, got.n, got.indicative != ""
			v.say("%s A would keep to the strictest row's %s %% for any demand current from %s A", sig(amps, 3), sig(f.Limit, 3), sig(100*amps/f.Limit, 3))
		}
	}
}

// readingWithoutBasis reads the statistic in amperes where the demand current is not declared.
func (v *verdict) readingWithoutBasis() reading {
	q := v.quantity
	q.size = 100 // so that per cent are amperes
	return v.reader.read(v.statistic, q)
}

// tellIndicative says why the record cannot decide, what it shows so far, and what would settle it.
func (v *verdict) tellIndicative() {
	f := v.finding
	v.why = append(v.why, v.reading.indicative)
	if f.Value > f.Limit {
		v.say("the indicative value is already above the limit%s", v.spent())
	}
	v.say("a record of %s would settle it", map[string]string{week: "seven days", day: "24 h"}[v.statistic.Period])
}

// spent tells when a record shorter than a period holds more intervals above the limit than a whole period may have.
func (v *verdict) spent() string {
	span := periodLengths[v.statistic.Period]
	if v.statistic.Interval != tenMinutes || v.sum.Duration > span {
		return ""
	}
	over := v.reading.sorted.above(v.finding.Limit)
	want := int(span) / tenMinuteSeconds
	allowed := want - harmonics.NearestRank(want, v.statistic.Percentile)
	if over <= allowed {
		return ""
	}
	return fmt.Sprintf(", in %d intervals, where a whole %s may have %d", over, v.statistic.Period, allowed)
}

// noisy reports whether noise hides the answer: when it makes more than half the limit, a value cannot be told from it.
// A value that stays above the limit when all noise is taken off its square is not hidden.
func (v *verdict) noisy() bool {
	f := v.finding
	floor := v.quantity.floor(&v.sum.Channels[v.setting.channel])
	if !(floor > f.Limit/2) {
		return false
	}
	if clean := f.ValueLow*f.ValueLow - floor*floor; clean > f.Limit*f.Limit {
		return false
	}
	v.say("noise alone reads %s %%, more than half the limit of %s %%; a sensor or range nearer to the signal would settle it", sig(floor, 2), sig(f.Limit, 3))
	return true
}

// partTotal reports whether a total that is within its limit lacks orders which the sampling rate does not support.
func (v *verdict) partTotal() bool {
	f := v.finding
	top := v.sum.Channels[v.setting.channel].TopOrder
	if f.Order != 0 || top == 0 || top >= v.quantity.top || f.ValueLow > f.Limit {
		return false
	}
	v.say("the total lacks orders %d to %d, which the sampling rate does not support; a faster recording would settle it", top+1, v.quantity.top)
	return true
}

// classI is the uncertainty in per cent of reading that IEC 61000-4-7 allows a class I instrument.
const classI = 5

// tellCompared says what stands beside a comparison.
func (v *verdict) tellCompared() {
	f := v.finding
	value, limit := apart(f.Value, f.Limit)
	declared := v.sum.Channels[v.setting.channel].Uncertainty
	off := 100 * math.Abs(f.Value-f.Limit) / f.Limit
	switch {
	case f.Result == Undecided:
		v.say("the limit of %s %% lies inside %s %% ± %s %% of reading; a sensor with less uncertainty, or a longer record, would settle it", limit, value, sig(declared, 3))
		return
	case declared == 0 && off < classI:
		v.say("no uncertainty is declared for this channel; %d %% of reading, which IEC 61000-4-7 allows a class I instrument, would leave it undecided", classI)
	}
	v.tellSampling()
	v.tellMinimum()
}

// tellSampling says when another such period could well turn out otherwise.
func (v *verdict) tellSampling() {
	f := v.finding
	if !(f.SampleLow <= f.Limit && f.SampleHigh > f.Limit) {
		return
	}
	low, _ := apart(f.SampleLow, f.Limit)
	high, limit := apart(f.SampleHigh, f.Limit)
	v.say("close: over many such %ss the %s lies between %s %% and %s %% (95 %% confidence at best) and the limit is %s %%, so another %s may come out otherwise",
		v.statistic.Period, percentileName(v.statistic.Percentile), low, high, limit, v.statistic.Period)
}

// tellMinimum says when the verdict would be another by the row of the minimum short-circuit current.
func (v *verdict) tellMinimum() {
	f, supply := v.finding, v.sheet.Supply
	if v.setting.table.rowsBy != byRatio || supply.ShortCircuitCurrentMin == 0 || f.Result != Within {
		return
	}
	r := v.setting.table.rowFor(supply.ShortCircuitCurrentMin / supply.DemandCurrent)
	if r == nil || r.of(f.Order) == nil {
		return
	}
	limit := r.of(f.Order).limit(f.Order) * f.Factor
	if result := compare(f.ValueLow, f.ValueHigh, limit); result != Within {
		v.say("by the minimum short-circuit current the row is %s and the limit %s %%: %s", r.span, sig(limit, 3), result)
	}
}

// tellRaising adds, to the findings of one channel that are above their limit, what the document's rule for raising
// limits would allow. It is not applied: that is a matter between the user and the utility.
func (j *judge) tellRaising(findings []Finding) {
	for i := range findings {
		f := &findings[i]
		if f.Order == 0 || f.Quantity != "harmonic" || f.Channel.Voltage() || f.Result != Exceeds {
			continue
		}
		for _, r := range slices.Backward(j.set.Raising) {
			if limit := f.Limit * r.Factor; !slices.Contains(r.Orders, f.Order) && f.Value <= limit && held(findings, f.Statistic, r) {
				f.Why = addTo(f.Why, fmt.Sprintf("clause %s would raise this limit to %s %% (× %g), since orders %s are each held to %g %% of theirs; it is not applied here",
					r.Clause, sig(limit, 3), r.Factor, listOf(r.Orders), r.HeldTo))
				break
			}
		}
	}
}

// held reports whether each of the raising's orders keeps to its share of its own limit.
func held(findings []Finding, statistic string, r Raising) bool {
	n := 0
	for i := range findings {
		f := &findings[i]
		if f.Statistic == statistic && slices.Contains(r.Orders, f.Order) {
			if !(f.Share <= r.HeldTo) {
				return false
			}
			n++
		}
	}
	return n == len(r.Orders)
}

func addTo(why, more string) string {
	if why == "" {
		return more
	}
	return why + "; " + more
}

func listOf(orders []int) string {
	return strings.Trim(strings.ReplaceAll(fmt.Sprint(orders), " ", ", "), "[]")
}
