package xlsx

import (
	"io"

	"wavetally/report"
)

// Write writes the survey as a workbook. Of a survey that was read back from its JSON form, which holds no series and no
// tables, it writes what there is.
func Write(w io.Writer, s *report.Survey) error {
	b := newBook(s)
	defer b.close()
	b.fill()
	return b.write(w)
}

// fill announces the sheets in their order, and fills them in the order in which they need each other's addresses.
func (b *book) fill() {
	summary := b.sheet("Summary", "answers, counts of results, highest shares of limits")
	siteInputs := b.sheet("Site", "what was declared; the inputs that verdicts follow")
	method := b.sheet("Method", "how the numbers came about, after which clause")
	limitTables := b.sheet("Limits", "the rule sets' tables and factors, with their sources")
	b.force = b.sheet("Limits in force", "the limit of every order and statistic at the inputs")
	onVoltage := b.sheet("Verdicts voltage", "every limit on a voltage, live")
	onCurrent := b.sheet("Verdicts current", "every limit on a current, live")

	in := b.siteSheet(siteInputs)
	regimes := b.regimes()
	refs := b.limitSheet(limitTables, regimes)
	forces := b.forceSheet(b.force, regimes, refs)
	verdicts := []verdictRange{
		b.verdictSheet(onVoltage, "voltage", b.lines(forces, true), in),
		b.verdictSheet(onCurrent, "current", b.lines(forces, false), in),
	}
	b.methodSheet(method)
	b.measuredSheets(verdicts)
	b.closingSheets()
	b.summarySheet(summary, verdicts)
}
