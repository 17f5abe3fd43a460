package xlsx

import (
	"fmt"
	"time"

	"wavetally/harmonics/limits"
	"wavetally/report"
)

// Columns of the verdict sheets. Those up to verdictSurveyed are printed; the rest shows how they come about.
const (
	verdictSet = 1 + iota
	verdictChannel
	verdictWhat
	verdictStatistic
	verdictValue
	verdictLow
	verdictHigh
	verdictLimit
	verdictShare
	verdictResult
	verdictSurveyed
	verdictOrder
	verdictClause
	verdictN
	verdictMeasured
	verdictMeasuredLow
	verdictMeasuredHigh
	verdictUnit
	verdictSize
	verdictBasis
	verdictUncertainty
	verdictNoise
	verdictNoisePct
	verdictAllows
	verdictStop
	verdictRow
	verdictSampleLow
	verdictSampleHigh
	verdictOver
	verdictKeyed
	verdictFrom
	verdictTo
	verdictWhy
)

var verdictColumns = []column{
	{head: "Rule set"}, {head: "Channel"}, {head: "What"}, {head: "Statistic"}, {head: "Value", unit: "% of basis"}, {head: "At least", unit: "% of basis"},
	{head: "At most", unit: "% of basis"}, {head: "Limit", unit: "% of basis"}, {head: "Share of limit", unit: "%", width: 9}, {head: "Result", width: 14}, {head: "As surveyed", width: 14},
	{head: "Order"}, {head: "Clause"}, {head: "Intervals", width: 10}, {head: "Measured", unit: "V, A or %"}, {head: "Measured, low", unit: "V, A or %", width: 10},
	{head: "Measured, high", unit: "V, A or %", width: 10}, {head: "Unit"}, {head: "Basis", unit: "V or A"}, {head: "Per cent of"}, {head: "Uncertainty", unit: "% of reading", width: 13},
	{head: "Noise", unit: "V, A or %", width: 10}, {head: "Noise", unit: "% of basis", width: 10}, {head: "Record allows", width: 14}, {head: "Stopped, since", width: 22}, {head: "Row of the table", width: 14},
	{head: "Percentile, low", unit: "% of basis", width: 11}, {head: "Percentile, high", unit: "% of basis", width: 11}, {head: "Time over limit", unit: "%, as surveyed", width: 14}, {head: "Sort key"}, {head: "Period from", unit: "UTC"}, {head: "Period to", unit: "UTC"},
	{head: "Why, as surveyed", width: 90},
}

// A verdictRange is where the findings of a sheet stand.
type verdictRange struct {
	sheet       *sheet
	first, last int
	row         map[verdictKey]int
	lines       []line
}

// A verdictKey names a finding.
type verdictKey struct {
	set, channel string
	order        int
	statistic    string
}

func keyOf(f limits.Finding) verdictKey {
	return verdictKey{f.RuleSet, string(f.Channel), f.Order, f.Statistic}
}

func (v verdictRange) empty() bool { return v.last < v.first }

// column is the address of a column of the findings.
func (v verdictRange) column(c int) string { return v.sheet.span(c, v.first, c, v.last) }

// verdictSheet writes the findings, one a row, as formulas.
func (b *book) verdictSheet(s *sheet, kind string, lines []line, in inputs) verdictRange {
	s.title("Verdicts on " + kind + "s, one limit a row")
	s.note(verdictNote, noteWidth)
	s.note("Columns from \"Order\" on are the workings. Values are the survey's; only they and the two columns \"as surveyed\" are fixed, all else is computed.", noteWidth)
	units := s.header(verdictColumns)
	s.freeze(units, verdictStatistic, units-1)
	s.printed = verdictSurveyed
	out := verdictRange{sheet: s, first: units + 1, row: map[verdictKey]int{}, lines: lines}
	for i := range lines {
		out.row[keyOf(lines[i].Finding)] = b.verdictRow(s, &lines[i], in)
	}
	out.last = s.next() - 1
	if out.empty() {
		s.note("Nothing is judged here: no rule set with limits for "+kind+"s was applied, or there is no such channel.", noteWidth)
		return out
	}
	s.filter = fmt.Sprintf("A%d:%s", units, at(verdictWhy, out.last))
	b.name("Verdicts_"+kind, s.span(verdictSet, out.first, verdictWhy, out.last))
	b.emphasise(s, fmt.Sprintf("%s:%s", at(verdictResult, out.first), at(verdictResult, out.last)), at(verdictResult, out.first))
	return out
}

const verdictNote = "Result: within when the value and its bounds (value ± declared uncertainty) are at or below the limit; exceeds when they are above it; undecided when the limit lies between them, " +
	"noise alone reads more than half the limit, or the record is shorter than the statistic; not assessed when something needed is missing or a doubt stops the verdict."

func (b *book) verdictRow(s *sheet, l *line, in inputs) int {
	n := s.next()
	c := func(column int) string { return fmt.Sprintf("$%s", at(column, n)) }
	row := make([]cell, verdictWhy)
	put := func(column int, c cell) { row[column-1] = c }
	put(verdictSet, text(report.RuleTitle(l.RuleSet)))
	put(verdictChannel, text(string(l.Channel)))
	put(verdictWhat, text(report.QuantityName(l.Quantity, l.Order)))
	put(verdictStatistic, text(report.ShortStatistic(l.Statistic)))
	put(verdictValue, number(l.Value, computedFormat).orEmpty().live(l.scaled(c(verdictMeasured), c(verdictSize))))
	put(verdictLow, number(l.ValueLow, computedFormat).orEmpty().live(l.bound(c(verdictMeasuredLow), c(verdictSize), "-", c(verdictUncertainty))))
	put(verdictHigh, number(l.ValueHigh, computedFormat).orEmpty().live(l.bound(c(verdictMeasuredHigh), c(verdictSize), "+", c(verdictUncertainty))))
	b.putLimit(put, l)
	put(verdictShare, number(l.Share, computedFormat).orEmpty().live(fmt.Sprintf(`IF(AND(ISNUMBER(%[1]s),N(%[2]s)>0),100*%[1]s/%[2]s,"")`, c(verdictValue), c(verdictLimit))))
	put(verdictResult, result(l.Result).live(resultFormula(c)))
	put(verdictSurveyed, text(l.Result))
	if l.Order > 0 {
		put(verdictOrder, count(l.Order))
	}
	put(verdictClause, text(l.Clause))
	put(verdictN, count(l.N))
	put(verdictMeasured, measured(l.measured))
	put(verdictMeasuredLow, measured(l.low))
	put(verdictMeasuredHigh, measured(l.high))
	put(verdictUnit, text(l.unit()))
	put(verdictSize, l.sizeCell(in))
	put(verdictBasis, text(l.Basis))
	if ref := in.uncertainty[l.Channel]; ref != "" {
		put(verdictUncertainty, number(l.uncertainty(b), computedFormat).live("N("+ref+")"))
	} else {
		put(verdictUncertainty, number(l.uncertainty(b), computedFormat))
	}
	put(verdictNoise, measured(l.noise))
	put(verdictNoisePct, number(l.Floor, computedFormat).orEmpty().live(l.scaled(c(verdictNoise), c(verdictSize))))
	put(verdictAllows, text(l.allows))
	put(verdictSampleLow, number(l.SampleLow, computedFormat))
	put(verdictSampleHigh, number(l.SampleHigh, computedFormat))
	put(verdictOver, number(l.OverPct, computedFormat))
	// Equal shares get keys of their own, so that the summary can rank them.
	put(verdictKeyed, number(sortKey(l.Share, n), computedFormat).orEmpty().live(fmt.Sprintf(`IF(ISNUMBER(%[1]s),%[1]s-ROW()*1E-9,"")`, c(verdictShare))))
	if start := b.survey.Recording.Start; start != nil && l.To > l.From {
		put(verdictFrom, moment(start.Add(seconds(l.From))))
		put(verdictTo, moment(start.Add(seconds(l.To))))
	}
	put(verdictWhy, text(l.Why))
	return s.add(row...)
}

func sortKey(share float64, row int) float64 { return share - float64(row)*1e-9 }

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }

// putLimit fills in the limit and what it comes from: by formula where the rule set is at hand.
func (b *book) putLimit(put func(int, cell), l *line) {
	if l.regime == nil {
		put(verdictLimit, number(l.Limit, limitFormat))
		put(verdictRow, text(l.LimitRow))
		return
	}
	forces := b.force
	put(verdictLimit, number(l.Limit, limitFormat).orEmpty().live(forces.ref(forceLimit, l.force.row)))
	put(verdictRow, result(l.force.label).live(forces.ref(forceRow, l.force.row)))
	put(verdictStop, result(l.regime.stop()).live(l.regime.stopRef))
}

// scaled is a measured number in per cent of the basis.
func (l *line) scaled(measured, size string) string {
	if l.relative {
		return fmt.Sprintf(`IF(ISNUMBER(%[1]s),%[1]s,"")`, measured)
	}
	return fmt.Sprintf(`IF(AND(ISNUMBER(%[1]s),N(%[2]s)>0),100*%[1]s/%[2]s,"")`, measured, size)
}

// bound is a measured number less or plus the uncertainty, in per cent of the basis.
func (l *line) bound(measured, size, sign, uncertainty string) string {
	if l.relative {
		return fmt.Sprintf(`IF(ISNUMBER(%[1]s),%[1]s*(1%[2]s%[3]s/100),"")`, measured, sign, uncertainty)
	}
	return fmt.Sprintf(`IF(AND(ISNUMBER(%[1]s),N(%[2]s)>0),100*%[1]s/%[2]s*(1%[3]s%[4]s/100),"")`, measured, size, sign, uncertainty)
}

// resultFormula is decide as a formula.
func resultFormula(c func(int) string) string {
	value, low, high, limit, noise, allows := c(verdictValue), c(verdictLow), c(verdictHigh), c(verdictLimit), c(verdictNoisePct), c(verdictAllows)
	last := fmt.Sprintf(`IF(OR(%s=%s,%s>%s),%s,%s)`, allows, quote(allowsExceeds), high, limit, quote(limits.Undecided), quote(limits.Within))
	compared := fmt.Sprintf(`IF(%s>%s,%s,%s)`, low, limit, quote(limits.Exceeds), last)
	noisy := fmt.Sprintf(`AND(N(%[1]s)>%[2]s/2,%[3]s^2-N(%[1]s)^2<=%[2]s^2)`, noise, limit, low)
	open := fmt.Sprintf(`IF(OR(%s=%s,%s),%s,%s)`, allows, quote(allowsOpen), noisy, quote(limits.Undecided), compared)
	return fmt.Sprintf(`IF(OR(%s<>"",NOT(ISNUMBER(%s)),N(%s)<=0,%s=%s),%s,%s)`, c(verdictStop), value, limit, allows, quote(allowsNothing), quote(limits.NotAssessed), open)
}

// emphasise makes results stand out, also in grey: by weight, slant and a dark field. The words say the same.
func (b *book) emphasise(s *sheet, where, first string) {
	for _, r := range []struct {
		word string
		look style
	}{
		{limits.Exceeds, style{bold: true, ink: "FFFFFF", fill: "A84200"}},
		{limits.Undecided, style{bold: true, fill: "D9D9D9"}},
		{limits.NotAssessed, style{italic: true, ink: grey}},
	} {
		look := r.look.excel()
		look.Font.Family, look.Font.Size, look.Alignment = "", 0, nil
		if look.Fill.Type != "" {
			look.Fill.Color = []string{r.look.fill}
		}
		id, err := b.file.NewConditionalStyle(look)
		b.keep(err)
		s.conditions = append(s.conditions, condition{where, first + "=" + quote(r.word), id})
	}
}
