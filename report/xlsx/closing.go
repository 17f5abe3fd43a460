package xlsx

import (
	"wavetally/report"
)

func (b *book) methodSheet(s *sheet) {
	s.title("Method")
	s.tables("method")
	s.width(1, 24)
	s.width(2, 95)
	s.width(3, 55)
	s.freeze(3, 0, 2)
}

// closingSheets are doubts, log and safety.
func (b *book) closingSheets() {
	b.doubtSheet(b.sheet("Doubts", "what weakens the numbers, what stays open, what was left out"))
	b.logSheet(b.sheet("Log", "files with their checksums, program, settings"))
	b.safetySheet(b.sheet("Safety", "cautions, and what this workbook is not"))
}

func (b *book) doubtSheet(s *sheet) {
	s.title("Doubts, open findings, events and what was left out")
	s.gap()
	if !s.tables("doubts", "open", "noise", "events", "excluded") {
		s.note("None: nothing was found that weakens the numbers.", noteWidth)
	}
	s.frozen = 1
}

func (b *book) logSheet(s *sheet) {
	s.title("Log")
	s.gap()
	s.tables("files", "recording")
	s.gap()
	s.part("Settings")
	for _, line := range b.settings() {
		s.add(line...)
	}
	s.frozen = 1
}

// settings are what another run needs to come to the same numbers.
func (b *book) settings() [][]cell {
	s := b.survey
	out := [][]cell{
		heads("What", "Value"),
		{text("Program"), text(b.program())},
		{text("Made at (UTC)"), moment(s.MadeAt.UTC())},
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
		s.add(count(i+1).as(topLook), text(words).as(wrapLook))
	}
	s.width(1, 5)
	s.width(2, 120)
	s.frozen = 1
}
