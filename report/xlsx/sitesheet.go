package xlsx

import (
	"fmt"
	"math"
	"strings"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics/site"
	"wavetally/report"
)

// Names of the cells that verdicts rest on.
const (
	namePoint      = "Point"
	nameConnection = "Connection"
	nameNominal    = "Nominal_voltage"
	nameIsc        = "Short_circuit_current_Isc"
	nameIL         = "Demand_current_IL"
	nameSystem     = "System_voltage"
	nameRatio      = "Isc_over_IL"
)

// inputs tells where on sheet Site the cells are that formulas need, by channel.
type inputs struct {
	uncertainty map[site.Role]string
	nominal     map[site.Role]string
}

// siteBuilder fills sheet Site: what was declared, with the inputs marked.
type siteBuilder struct {
	*sheet
	supply site.Supply
	in     inputs
}

func (b *book) siteSheet(s *sheet) inputs {
	w := &siteBuilder{sheet: s, supply: b.survey.Site.Supply, in: inputs{map[site.Role]string{}, map[site.Role]string{}}}
	s.title("Site, supply and channels")
	s.note("Cells marked \"input\" may be changed: rows, limits, shares and verdicts of this workbook follow. What the survey was made with stays beside them.", noteWidth)
	s.gap()
	s.header([]column{{head: "What", width: 44}, {head: "Value", width: 26}, {head: "Unit", width: 12}, {head: "Kind"}, {head: "As surveyed", width: 18}, {head: "Source or remark", width: wideColumn}})
	s.freeze(s.next()-1, 0, s.next()-2)
	id := b.survey.Site.Site
	w.words("Site", id.Name)
	w.words("Location", id.Location)
	w.words("Surveyed by", id.SurveyedBy)
	w.words("Purpose", id.Purpose)
	w.words("Time zone of the recording", id.Timezone)
	w.network()
	w.plant()
	w.words("Rule sets asked for", strings.Join(b.survey.Site.Limits.Apply, ", "))
	w.channels()
	if len(b.survey.Site.Guessed) > 0 {
		s.gap()
		s.part("Not declared, so taken from the recording")
		for _, g := range b.survey.Site.Guessed {
			s.note(g, noteWidth)
		}
	}
	return w.in
}

const undeclared = "not declared"

func (w *siteBuilder) words(what, value string) {
	kind := "declared"
	if value == "" {
		value, kind = undeclared, ""
	}
	w.add(text(what), text(value).as(wrapLook), none, text(kind))
}

// declaredNumber is a number as it was typed in, in a column of words and numbers.
func declaredNumber(v float64) cell {
	return cell{value: v, style: style{format: limitFormat, left: true, indent: true}}
}

// declared is a number that verdicts do not rest on; 0 is one that was not declared.
func (w *siteBuilder) declared(what string, v float64, unit, remark string) {
	if v == 0 {
		w.words(what, "")
		return
	}
	w.add(text(what), declaredNumber(v), text(unit), text("declared"), none, text(remark).as(wrapLook))
}

// input is a number that verdicts rest on.
func (w *siteBuilder) input(name, what string, v float64, unit, remark string) int {
	c, surveyed := cell{style: style{format: limitFormat, left: true}}, text(undeclared)
	if v > 0 {
		c, surveyed = declaredNumber(v), declaredNumber(v)
	}
	c.style.fill, c.style.frame = inputLook.fill, true
	r := w.add(text(what), c, text(unit), text("input").as(boldLook), surveyed, text(remark).as(wrapLook))
	if name != "" {
		w.book.name(name, w.ref(2, r))
	}
	return r
}

// choice is a word that verdicts rest on, out of a list.
func (w *siteBuilder) choice(name, what, value, remark string, list []string) {
	r := w.add(text(what), text(value).as(inputLook), none, text("input").as(boldLook), text(or(value, undeclared)), text(remark).as(wrapLook))
	w.book.name(name, w.ref(2, r))
	v := excelize.NewDataValidation(true)
	v.Sqref = at(2, r)
	w.book.keep(v.SetDropList(list))
	v.SetError(excelize.DataValidationErrorStyleStop, "Not one of the list", "Choose "+strings.Join(list, ", ")+".")
	w.book.keep(w.book.file.AddDataValidation(w.name, v))
}

func or(s, otherwise string) string {
	if s == "" {
		return otherwise
	}
	return s
}

// positive lets only numbers of 0 or more into an input.
func (w *siteBuilder) positive(r int, most float64, help string) {
	v := excelize.NewDataValidation(true)
	v.Sqref = at(2, r)
	w.book.keep(v.SetRange(0, most, excelize.DataValidationTypeDecimal, excelize.DataValidationOperatorBetween))
	v.SetInput("Input", help)
	v.SetError(excelize.DataValidationErrorStyleStop, "Not a number that fits", help)
	w.book.keep(w.book.file.AddDataValidation(w.name, v))
}

// computed is a number that follows from inputs.
func (w *siteBuilder) computed(name, what string, v float64, formula, unit, remark string) int {
	c := number(v, computedFormat).orEmpty()
	c.style.left, c.style.indent = true, true
	r := w.add(text(what), c.live(formula), text(unit), text("computed"), none, text(remark).as(wrapLook))
	if name != "" {
		w.book.name(name, w.ref(2, r))
	}
	return r
}

func (w *siteBuilder) network() {
	sup := w.supply
	w.choice(nameConnection, "Connection", sup.Connection, "decides the nominal voltage across each channel", site.Connections)
	w.choice(namePoint, "Point", sup.Point, "limits made for the PCC (point of common coupling) do not judge an internal point, and the other way round", []string{"PCC", "internal"})
	w.positive(w.input(nameNominal, "Nominal voltage", sup.NominalVoltage, "V", nominalRemark(sup)), 1e7, "Nominal voltage in V, line to line; line to neutral for single-phase and split-phase.")
	w.declared("Nominal frequency", sup.NominalFrequency, "Hz", "")
	w.positive(w.input(nameIsc, "Short-circuit current Isc, highest", sup.ShortCircuitCurrent, "A", or(sup.ShortCircuitSource, "source not declared")), 1e7, "Highest short-circuit current at the point, in A.")
	w.declared("Short-circuit current, lowest in normal operation", sup.ShortCircuitCurrentMin, "A", "")
	w.positive(w.input(nameIL, "Demand current IL", sup.DemandCurrent, "A", or(sup.DemandSource, "source not declared")), 1e7, "Maximum demand load current, fundamental, in A.")
	w.computed(nameRatio, "Isc / IL", ratioOf(sup), fmt.Sprintf(`IF(AND(N(%s)>0,N(%s)>0),%s/%s,"")`, nameIsc, nameIL, nameIsc, nameIL), "", "decides the row of the current limits")
	w.computed(nameSystem, "Voltage that decides the table", systemVoltage(sup), fmt.Sprintf(`IF(N(%s)>0,IF(%s="%s",2*%s,%s),"")`, nameNominal, nameConnection, site.SplitPhase, nameNominal, nameNominal),
		"V", "the nominal voltage between lines")
	generation := "no"
	if sup.Generation {
		generation = "yes"
	}
	w.words("Generation on site", generation)
}

func nominalRemark(s site.Supply) string {
	if s.ThreePhase() {
		return "line to line"
	}
	return "line to neutral"
}

// ratioOf is Isc/IL; NaN where one is not declared.
func ratioOf(s site.Supply) float64 {
	if s.ShortCircuitCurrent > 0 && s.DemandCurrent > 0 {
		return s.ShortCircuitCurrent / s.DemandCurrent
	}
	return math.NaN()
}

// systemVoltage is the nominal voltage between lines; NaN where it is not declared.
func systemVoltage(s site.Supply) float64 {
	switch {
	case !(s.NominalVoltage > 0):
		return math.NaN()
	case s.Connection == site.SplitPhase:
		return 2 * s.NominalVoltage
	}
	return s.NominalVoltage
}

func (w *siteBuilder) plant() {
	sup := w.supply
	w.declared("Transformer rating", sup.TransformerKVA, "kVA", "")
	w.declared("Transformer impedance", sup.TransformerImpedance, "%", "")
	if sup.TransformerEddyLoss > 0 {
		w.declared("Transformer winding eddy loss", sup.TransformerEddyLoss, "pu", "of the I²R loss at rated load")
	}
	if sup.TransformerStrayLoss > 0 {
		w.declared("Transformer other stray loss", sup.TransformerStrayLoss, "pu", "of the I²R loss at rated load")
	}
	if sup.TransformerKRating > 0 {
		w.declared("Transformer K rating", sup.TransformerKRating, "", "")
	}
	for i, q := range sup.CapacitorKvar {
		w.declared(fmt.Sprintf("Capacitor step %d", i+1), q, "kvar", "")
	}
	if len(sup.CapacitorKvar) > 0 && sup.CapacitorDetuning > 0 {
		w.declared("Detuning of the capacitors, reactor share", sup.CapacitorDetuning, "%", "")
	}
}

// channels lists the hook-up: the uncertainties as inputs, and the nominal voltage across each voltage channel.
func (w *siteBuilder) channels() {
	w.gap()
	w.part("Channels: uncertainty of sensor and input together")
	for _, c := range w.book.survey.Site.Channels {
		role := site.Role(c.Measures)
		if !role.Known() {
			w.add(text("Recorded as "+c.Source), text("measures nothing judged here"))
			continue
		}
		u := w.uncertainty(role, c.Uncertainty)
		r := w.input("", c.Measures, u, "% of reading", hookUp(c))
		w.positive(r, 100, "Uncertainty in per cent of reading; empty where it is not declared.")
		if _, seen := w.in.uncertainty[role]; !seen {
			w.in.uncertainty[role] = w.ref(2, r)
		}
	}
	w.gap()
	w.part("Nominal voltage across each voltage channel")
	for _, c := range w.book.survey.Site.Channels {
		role := site.Role(c.Measures)
		if _, seen := w.in.nominal[role]; seen || !role.Voltage() || role.Neutral() {
			continue
		}
		v := w.supply.NominalOf(role)
		if !(v > 0) {
			v = math.NaN()
		}
		w.in.nominal[role] = w.ref(2, w.computed("", c.Measures, v, nominalFormula(role), "V", ""))
	}
}

// uncertainty is the one that the verdicts were made with.
func (w *siteBuilder) uncertainty(role site.Role, declared float64) float64 {
	if sum := w.book.survey.Summary; sum != nil {
		if ch := sum.Channel(role); ch != nil {
			return ch.Uncertainty
		}
	}
	return declared
}

// nominalFormula is site.Supply.NominalOf as a formula.
func nominalFormula(role site.Role) string {
	if role.LineToLine() {
		return nameSystem
	}
	return fmt.Sprintf(`IF(N(%[1]s)>0,IF(OR(%[2]s="%[3]s",%[2]s="%[4]s",%[2]s="%[5]s"),%[1]s/SQRT(3),%[1]s),"")`,
		nameNominal, nameConnection, site.Wye4, site.Wye3, site.Delta3)
}

func hookUp(c site.Channel) string {
	scale := c.Scale
	if scale == 0 {
		scale = 1
	}
	out := "recorded as " + c.Source + ", scale " + report.Sig(scale)
	if c.Reversed {
		out += ", reversed"
	}
	return out
}
