// Package pdf sets a survey as a document to sign, on A4 or Letter paper. What it says comes from package report; this
// package decides where it stands.
package pdf

import (
	"fmt"
	"io"
	"strings"
	"time"

	"github.com/jung-kurt/gofpdf"

	"wavetally/harmonics/site"
	"wavetally/report"
	"wavetally/report/chart"
)

// Papers lists the paper sizes that Options takes, in points.
var papers = map[string]gofpdf.SizeType{
	"a4":     {Wd: 595.28, Ht: 841.89},
	"letter": {Wd: 612, Ht: 792},
}

// Options say how the document is set.
type Options struct {
	Paper string // "A4" or "Letter", in any letter case; "" is Letter where the mains has 60 Hz, else A4
}

// paper chooses the paper size. Most places with 60 Hz use Letter (common practice).
func (o Options) paper(s *report.Survey) (gofpdf.SizeType, error) {
	name := strings.ToLower(o.Paper)
	switch {
	case name == "" && s.Site.Supply.NominalFrequency == 60:
		name = "letter"
	case name == "":
		name = "a4"
	}
	size, ok := papers[name]
	if !ok {
		return size, fmt.Errorf("paper %q is not known; use A4 or Letter", o.Paper)
	}
	return size, nil
}

// Margins of the page, in points. The side column holds captions and labels.
const (
	leftMargin   = 46
	rightMargin  = 42
	topMargin    = 52
	bottomMargin = 50
	sideWidth    = 98
	gutter       = 14
)

// A document is a survey being set.
type document struct {
	s     *report.Survey
	pen   *pen
	place chart.Place
	left  float64
	side  float64 // width of the side column

	tables map[string]report.Table
	charts []report.Chart
}

// Write writes the survey as a PDF. The same survey gives the same bytes.
func Write(w io.Writer, s *report.Survey, opt Options) error {
	size, err := opt.paper(s)
	if err != nil {
		return err
	}
	d := newDocument(s, size)
	pages := compose(d.blocks(), topMargin, size.Ht-bottomMargin)
	for i, page := range pages {
		d.pen.doc.AddPage()
		for _, b := range page {
			if b.outline != "" {
				d.pen.doc.SetFont(family, "", textFace.size)
				d.pen.doc.Bookmark(clean(b.outline), 0, b.y)
			}
			b.draw(b.y, b.h)
		}
		d.frame(i+1, len(pages))
	}
	return d.pen.doc.Output(w)
}

func newDocument(s *report.Survey, size gofpdf.SizeType) *document {
	doc := gofpdf.NewCustom(&gofpdf.InitType{UnitStr: "pt", Size: size})
	doc.SetAutoPageBreak(false, 0)
	doc.SetMargins(0, 0, 0)
	doc.SetCatalogSort(true)
	doc.SetCreationDate(s.MadeAt)
	doc.SetModificationDate(s.MadeAt)
	doc.SetTitle(clean("Harmonic survey: "+siteName(s)), true)
	doc.SetSubject(clean(s.Headline.Verdict), true)
	doc.SetAuthor(clean(s.Site.Site.SurveyedBy), true)
	doc.SetCreator(clean(s.Program.Name+" "+s.Program.Version), true)
	addFonts(doc)
	d := &document{s: s, pen: &pen{doc, size.Wd, size.Ht}, left: leftMargin, side: sideWidth}
	if s.Recording.Start != nil {
		d.place = chart.Place{Start: *s.Recording.Start, Zone: zoneOf(s.Site)}
	}
	return d
}

// zoneOf is the site's clock. A name that is not known was refused when the sheet was read; that of this machine would
// give other bytes elsewhere.
func zoneOf(sheet site.Sheet) *time.Location {
	zone, err := time.LoadLocation(sheet.Site.Timezone)
	if err != nil || zone == time.Local {
		return time.UTC
	}
	return zone
}

func siteName(s *report.Survey) string {
	if name := s.Site.Site.Name; name != "" {
		return name
	}
	if len(s.Recording.Files) > 0 {
		return "Unnamed site, " + s.Recording.Files[0].Name
	}
	return "Unnamed site"
}

// mainX and main are the main column, full the whole width between the margins.
func (d *document) mainX() float64 { return d.left + d.side + gutter }
func (d *document) main() float64  { return d.full() - d.side - gutter }
func (d *document) full() float64  { return d.pen.width - leftMargin - rightMargin }
func (d *document) rightX() float64 {
	return d.pen.width - rightMargin
}

// frame sets a page's running head and foot.
func (d *document) frame(page, of int) {
	p := d.pen
	if page > 1 {
		number := "Harmonic survey"
		p.text(tinyFace, chart.Faint, d.left, 32, shorten(p.measure, tinyFace, siteName(d.s), d.full()-120))
		p.right(tinyFace, chart.Faint, d.rightX(), 32, number)
		p.rule(chart.Rule, 0.4, d.left, d.rightX(), 37)
	}
	y := p.height - 26
	p.rule(chart.Rule, 0.4, d.left, d.rightX(), y-10)
	count := fmt.Sprintf("page %d of %d", page, of)
	p.right(tinyFace, chart.Faint, d.rightX(), y, count)
	p.text(tinyFace, chart.Faint, d.left, y, shorten(p.measure, tinyFace, d.identity(), d.full()-70))
}

// identity ties a page to what it was made from.
func (d *document) identity() string {
	parts := []string{d.s.Program.Name + " " + d.s.Program.Version, "made " + d.s.MadeAt.UTC().Format("2006-01-02 15:04 UTC")}
	if files := d.s.Recording.Files; len(files) > 0 {
		hash := files[0].Name
		if len(files[0].SHA256) >= 16 {
			hash += " SHA-256 " + files[0].SHA256[:16] + "…"
		}
		if len(files) > 1 {
			hash += fmt.Sprintf(" and %d more files", len(files)-1)
		}
		parts = append(parts, hash)
	}
	return strings.Join(parts, " · ")
}
