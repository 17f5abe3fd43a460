package xlsx

import (
	"slices"

	"wavetally/report"
)

func (b *book) methodSheet(s *sheet) {
	t := b.tables["method"]
	s.title("Method: how the numbers came about, and after which clause")
	s.untitled(t)
	s.width(1, 24)
	s.width(2, 95)
	s.width(3, 55)
	s.freeze(2, 0, 2)
}

// closingSheets are doubts, what was left out, log and safety.
func (b *book) closingSheets() {
	b.doubtSheet(b.sheet("Doubts", "what weakens the numbers, and what stays open"))
	for _, one := range []struct{ name, about, key string }{
		{"Events", "voltage dips, swells and interruptions", "events"},
		{"Excluded", "stretches that statistics leave out", "excluded"},
		{"Noise", "orders whose noise hides a harmonic at the limit", "noise"},
	} {
		if _, ok := b.tables[one.key]; ok {
			b.single(b.sheet(one.name, one.about), one.key)
		}
	}
	b.logSheet(b.sheet("Log", "files with their checksums, program, settings"))
	b.safetySheet(b.sheet("Safety", "cautions, and what this workbook is not"))
}

func (b *book) doubtSheet(s *sheet) {
	s.title("Doubts and open findings")
	s.gap()
	any := s.tables("doubts")
	if t, ok := b.tables["open"]; ok {
		s.gap()
		s.table(withLast(t, "n")) // so that the reasons stand under the doubts' texts
		any = true
	}
	if !any {
		s.note("None: nothing was found that weakens the numbers.", noteWidth)
	}
	s.frozen = 1
}

// withLast moves a column to the end of a table.
func withLast(t report.Table, key string) report.Table {
	i := slices.IndexFunc(t.Columns, func(c report.Column) bool { return c.Key == key })
	if i < 0 {
		return t
	}
	out := t
	out.Columns = append(slices.Delete(slices.Clone(t.Columns), i, i+1), t.Columns[i])
	out.Rows = nil
	for _, r := range t.Rows {
		out.Rows = append(out.Rows, append(slices.Delete(slices.Clone(r), i, i+1), r[i]))
	}
	return out
}

func (b *book) logSheet(s *sheet) {
	s.tight = true
	s.title("Log")
	s.gap()
	s.tables("files", "recording")
	s.gap()
	s.part("Settings")
	for _, line := range b.settings() {
		s.add(line...)
	}
	s.width(6, 68)
	s.frozen = 1
}

// settings are what another run needs to come to the same numbers.
func (b *book) settings() [][]cell {
	s := b.survey
	out := [][]cell{
		heads("What", "Value"),
		{text("Program"), text(b.program())},
		{text("Made at (UTC)"), moment(s.MadeAt.UTC()).as(style{left: true, indent: true})},
		{text("Form of survey.json"), text(s.Schema)},
	}
	for _, set := range s.RuleSets {
		where := "built in"
		if set.File != "" {
			where = set.File
		}
		out = append(out, []cell{text("Rule set " + set.Name), text(set.Document + ", " + set.Edition + ", " + where)})
	}
	f := s.Site.File
	for _, line := range [][2]string{{"Delimiter", f.Delimiter}, {"Decimal mark", f.Decimal}, {"Encoding", f.Encoding}, {"Time column", f.TimeColumn}, {"Time format", f.TimeFormat}} {
		if line[1] != "" {
			out = append(out, []cell{text(line[0] + " of the file, as declared"), text(line[1])})
		}
	}
	if f.HeaderLines != nil {
		out = append(out, []cell{text("Header lines of the file, as declared"), count(*f.HeaderLines)})
	}
	if f.SamplingRate > 0 {
		out = append(out, []cell{text("Sampling rate, as declared, Hz"), measured(f.SamplingRate)})
	}
	return out
}

func (b *book) safetySheet(s *sheet) {
	s.title(report.SafetyTitle)
	s.gap()
	for i, words := range b.survey.Cautions {
		s.add(count(i+1), text(words).as(wrapLook))
	}
	s.width(1, 5)
	s.width(2, 120)
	s.frozen = 1
}
