package xlsx

import (
	"fmt"
	"io"
	"runtime"
	"strings"
	"sync"

	"github.com/xuri/excelize/v2"

	"wavetally/report"
)

// A book is the workbook being made. Sheets are filled in any order, since formulas point both ways, and stand in the
// order in which they were announced. The first error is kept and asked for once, by write.
type book struct {
	file   *excelize.File
	survey *report.Survey
	sheets []*sheet
	styles map[style]int
	tables map[string]report.Table // the survey's, by key
	force  *sheet                  // limits in force
	err    error
}

func newBook(s *report.Survey) *book {
	b := &book{file: excelize.NewFile(), survey: s, styles: map[style]int{}, tables: map[string]report.Table{}}
	for _, t := range append(report.Tables(s), report.FullTables(s)...) {
		b.tables[t.Key] = t
	}
	b.keep(b.file.SetDefaultFont(font))
	return b
}

func (b *book) keep(err error) {
	if b.err == nil && err != nil {
		b.err = err
	}
}

// id is the style's number in the workbook.
func (b *book) id(s style) int {
	id, known := b.styles[s]
	if !known {
		var err error
		id, err = b.file.NewStyle(s.excel())
		b.keep(err)
		b.styles[s] = id
	}
	return id
}

// sheet announces a sheet. What it holds is said in one line, for the list of contents.
func (b *book) sheet(name, about string) *sheet {
	if len(b.sheets) == 0 {
		b.keep(b.file.SetSheetName("Sheet1", name))
	} else {
		_, err := b.file.NewSheet(name)
		b.keep(err)
	}
	s := &sheet{book: b, name: name, about: about}
	b.sheets = append(b.sheets, s)
	return s
}

// name gives a cell or range a name that formulas and people can use.
func (b *book) name(name, refersTo string) {
	b.keep(b.file.SetDefinedName(&excelize.DefinedName{Name: name, RefersTo: refersTo}))
}

// properties are the document's, with the survey's time instead of the clock's.
func (b *book) properties() {
	made := b.survey.MadeAt.UTC().Format("2006-01-02T15:04:05Z")
	b.keep(b.file.SetDocProps(&excelize.DocProperties{
		Title: cut(clean("Harmonics survey: "+b.title()), 200), Creator: b.program(), LastModifiedBy: b.program(),
		Created: made, Modified: made, Description: report.SafetyShort,
	}))
	b.keep(b.file.SetAppProps(&excelize.AppProperties{Application: b.survey.Program.Name}))
	full := true
	b.keep(b.file.SetCalcProps(&excelize.CalcPropsOptions{FullCalcOnLoad: &full}))
}

func (b *book) program() string {
	return clean(strings.TrimSpace(b.survey.Program.Name + " " + b.survey.Program.Version))
}

// title is the site's name, or what stands for it.
func (b *book) title() string {
	if name := strings.TrimSpace(clean(b.survey.Site.Site.Name)); name != "" {
		return name
	}
	if files := b.survey.Recording.Files; len(files) > 0 {
		return clean(files[0].Name)
	}
	return "unnamed site"
}

// write lays the sheets down, side by side, and packs them.
func (b *book) write(w io.Writer) error {
	b.properties()
	for _, s := range b.sheets {
		s.open()
	}
	if b.err != nil {
		return fmt.Errorf("xlsx: %w", b.err)
	}
	if err := b.stream(); err != nil {
		return fmt.Errorf("xlsx: %w", err)
	}
	b.file.SetZipWriter(func(to io.Writer) excelize.ZipWriter { return &packer{w: to, bodies: b.bodies()} })
	if err := b.file.Write(w); err != nil {
		return fmt.Errorf("xlsx: %w", err)
	}
	return nil
}

// bodies are what sheets write while they are compressed, by the names of their parts.
func (b *book) bodies() map[string]func(io.Writer) error {
	out := map[string]func(io.Writer) error{}
	for i, s := range b.sheets {
		if s.body != nil {
			out[fmt.Sprintf("xl/worksheets/sheet%d.xml", i+1)] = s.body
		}
	}
	return out
}

// stream writes the cells of all sheets, one sheet a worker.
func (b *book) stream() error {
	errs := make([]error, len(b.sheets))
	var work sync.WaitGroup
	free := make(chan struct{}, runtime.GOMAXPROCS(0))
	for i, s := range b.sheets {
		work.Go(func() {
			free <- struct{}{}
			errs[i] = s.write()
			<-free
		})
	}
	work.Wait()
	for i, err := range errs {
		if err != nil {
			return fmt.Errorf("sheet %q: %w", b.sheets[i].name, err)
		}
	}
	return nil
}

func (b *book) close() { _ = b.file.Close() }
