package xlsx

import (
	"archive/zip"
	"bytes"
	"encoding/xml"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
	"unicode/utf8"

	"github.com/xuri/excelize/v2"

	"wavetally/harmonics"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// The same survey gives the same bytes, and no time of the clock is in them.
func TestSameBytes(t *testing.T) {
	first := shortBook()
	for range 3 { // what comes in the order of a map shows on one of several runs
		if !bytes.Equal(first, written(t, judged(t, fixture.ShortInputs(), "ieee-519-2022", "en-50160"))) {
			t.Fatal("two workbooks of one survey differ")
		}
	}
	z, err := zip.NewReader(bytes.NewReader(first), int64(len(first)))
	if err != nil {
		t.Fatal(err)
	}
	for _, part := range z.File {
		if part.ModifiedDate != 0 || part.ModifiedTime != 0 {
			t.Errorf("%s is of %v", part.Name, part.Modified)
		}
		if text := unpacked(t, part); part.Name == "docProps/core.xml" && strings.Count(text, fixture.MadeAt.Format("2006-01-02T15:04:05Z")) != 2 {
			t.Errorf("created and modified are not when the survey was made:\n%s", text)
		}
	}
}

func unpacked(t *testing.T, part *zip.File) string {
	t.Helper()
	r, err := part.Open()
	if err != nil {
		t.Fatal(err)
	}
	b, err := io.ReadAll(r)
	if err != nil {
		t.Fatal(err)
	}
	return string(b)
}

// Every part is well-formed XML with each name once, and each cell of a sheet comes once and in order: programs that are
// strict refuse a workbook otherwise.
func TestPartsAreWellFormed(t *testing.T) {
	for name, b := range map[string][]byte{"week": weekBook(), "short": shortBook()} {
		z, err := zip.NewReader(bytes.NewReader(b), int64(len(b)))
		if err != nil {
			t.Fatal(err)
		}
		seen := map[string]bool{}
		for _, part := range z.File {
			if seen[part.Name] {
				t.Errorf("%s: two parts %s", name, part.Name)
			}
			seen[part.Name] = true
			if err := inOrder(strings.NewReader(unpacked(t, part))); err != nil {
				t.Errorf("%s: %s: %v", name, part.Name, err)
			}
		}
	}
}

// inOrder reads a part to its end. Columns, rows and cells must come in ascending order.
func inOrder(r io.Reader) error {
	d := xml.NewDecoder(r)
	row, col, width := 0, 0, 0
	for {
		token, err := d.Token()
		if err == io.EOF {
			return nil
		}
		if err != nil {
			return err
		}
		start, ok := token.(xml.StartElement)
		if !ok || start.Name.Space != "http://schemas.openxmlformats.org/spreadsheetml/2006/main" {
			continue
		}
		switch start.Name.Local {
		case "col":
			if from, _ := strconv.Atoi(attribute(start, "min")); from <= width {
				return fmt.Errorf("column %d after %d", from, width)
			}
			width, _ = strconv.Atoi(attribute(start, "max"))
		case "row":
			n, _ := strconv.Atoi(attribute(start, "r"))
			if n <= row {
				return fmt.Errorf("row %d after %d", n, row)
			}
			row, col = n, 0
		case "c":
			c, r, err := excelize.CellNameToCoordinates(attribute(start, "r"))
			if err != nil || r != row || c <= col {
				return fmt.Errorf("cell %s in row %d after column %d", attribute(start, "r"), row, col)
			}
			col = c
		}
	}
}

func attribute(e xml.StartElement, name string) string {
	for _, a := range e.Attr {
		if a.Name.Local == name {
			return a.Value
		}
	}
	return ""
}

// A failing writer yields its error, wherever it fails.
func TestWriterFails(t *testing.T) {
	s := fixture.Tiny()
	n := len(written(t, s))
	for _, at := range []int{0, 1, n / 2, n - 1} {
		if err := Write(&failing{left: at}, s); !errors.Is(err, errFull) {
			t.Errorf("failing after %d of %d bytes: %v", at, n, err)
		}
	}
}

var errFull = errors.New("disk full")

type failing struct{ left int }

func (f *failing) Write(p []byte) (int, error) {
	if len(p) > f.left {
		n := f.left
		f.left = 0
		return n, errFull
	}
	f.left -= len(p)
	return len(p), nil
}

// Texts of people and files stay text, whatever they hold.
func TestHostileTexts(t *testing.T) {
	in := fixture.ShortInputs()
	in.Sheet.Site.Name = `=cmd|' /C calc'!A1`
	in.Sheet.Site.Location = "@SUM(1+1)\x00\x07\u200b <b>&amp;</b>\x1b[31m"
	in.Sheet.Site.Purpose = strings.Repeat("\U0001F600long ", 9000)
	in.Sheet.Site.SurveyedBy = "caf\xe9 \ufffe"
	in.Sheet.Supply.DemandSource = "+1+2"
	in.Header.Files[0].Name = "=HYPERLINK(\"http://example.invalid\")&.cfg"
	f := opened(t, written(t, judged(t, in, "ieee-519-2022")))
	want := map[string]string{"Site": in.Sheet.Site.Name, "Location": "@SUM(1+1)\u200b <b>&amp;</b>[31m", "Surveyed by": "caf\ufffd ", "Purpose": ""}
	for i, r := range grid(t, f, "Site") {
		if len(r) < 2 {
			continue
		}
		text, listed := want[r[0]]
		if !listed {
			continue
		}
		formula, err := f.GetCellFormula("Site", at(2, i+1))
		if err != nil || formula != "" {
			t.Errorf("%s: formula %q, %v", r[0], formula, err)
		}
		if r[0] == "Purpose" {
			if n := units(r[1]); n > longest || n < longest-3 || !utf8.ValidString(r[1]) || !strings.HasSuffix(r[1], "…") {
				t.Errorf("a long text has %d units and ends in %q", n, r[1][len(r[1])-8:])
			}
		} else if r[1] != text {
			t.Errorf("%s: %q, want %q", r[0], r[1], text)
		}
	}
	for _, name := range f.GetSheetList() {
		footer, err := f.GetHeaderFooter(name)
		if err != nil || len(footer.OddFooter) > 255 {
			t.Errorf("%s: footer of %d, %v", name, len(footer.OddFooter), err)
		}
	}
}

func units(s string) int {
	n := 0
	for _, r := range s {
		n++
		if r >= 0x10000 {
			n++
		}
	}
	return n
}

// Whatever the survey, each sheet is fit for use and for print, and no cell holds an error.
func TestSheets(t *testing.T) {
	for name, s := range map[string]*report.Survey{"short": shortSurvey(), "week": lean(weekSurvey()), "tiny": fixture.Tiny(), "read back": readBack(t), "empty": {}} {
		t.Run(name, func(t *testing.T) {
			f := opened(t, written(t, s))
			checkBook(t, f)
		})
	}
}

// readBack is a survey without what its JSON form does not hold.
func readBack(t testing.TB) *report.Survey {
	t.Helper()
	var b bytes.Buffer
	if err := report.WriteJSON(&b, shortSurvey()); err != nil {
		t.Fatal(err)
	}
	s, err := report.ReadJSON(&b)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func checkBook(t *testing.T, f *excelize.File) {
	want := []string{"Summary", "Site", "Method", "Limits", "Limits in force", "Verdicts voltage", "Verdicts current", "Statistics", "Charts", "Power", "Doubts", "Log", "Safety"}
	got := f.GetSheetList()
	for _, name := range want {
		if !slices.Contains(got, name) {
			t.Errorf("no sheet %q among %q", name, got)
		}
	}
	for _, name := range got {
		if merged, err := f.GetMergeCells(name); err != nil || len(merged) > 0 {
			t.Errorf("%s: merged cells %v, %v", name, merged, err)
		}
		page, err := f.GetPageLayout(name)
		if err != nil || *page.Orientation != "landscape" || *page.FitToWidth != 1 || *page.FitToHeight != 0 {
			t.Errorf("%s: page %+v, %v", name, page, err)
		}
		if props, err := f.GetSheetProps(name); err != nil || props.FitToPage == nil || !*props.FitToPage {
			t.Errorf("%s: pages are not fitted to the width, %v", name, err)
		}
		if footer, err := f.GetHeaderFooter(name); err != nil || !strings.Contains(footer.OddFooter, "&P of &N") {
			t.Errorf("%s: no page numbers, %v", name, err)
		}
		if panes, err := f.GetPanes(name); err != nil || !panes.Freeze {
			t.Errorf("%s: nothing frozen, %v", name, err)
		}
		for i, r := range grid(t, f, name) {
			for c, v := range r {
				if strings.HasPrefix(v, "#") || v == "NaN" || strings.Contains(v, "Inf") {
					t.Errorf("%s!%s: %q", name, at(c+1, i+1), v)
				}
			}
		}
	}
	for _, d := range f.GetDefinedName() {
		sheet, _, ok := strings.Cut(d.RefersTo, "!")
		if !ok || !slices.Contains(got, strings.Trim(sheet, "'")) {
			t.Errorf("name %s refers to %s", d.Name, d.RefersTo)
		}
	}
}

// The inputs are marked by a word and a look, and take only what fits.
func TestInputs(t *testing.T) {
	f := opened(t, shortBook())
	if w, err := f.GetColWidth("Site", "A"); err != nil || w != 44 {
		t.Errorf("the first column is %g wide, %v", w, err)
	}
	rows := grid(t, f, "Site")
	checks, err := f.GetDataValidations("Site")
	if err != nil {
		t.Fatal(err)
	}
	for name, want := range map[string]string{namePoint: "PCC", nameConnection: "wye-4wire", nameNominal: "400", nameIsc: "12500", nameIL: "410", "V1": "0.5", "I3": "0.5"} {
		sheet, cell := place(t, f, name)
		_, row, err := excelize.CellNameToCoordinates(cell)
		if err != nil || sheet != "Site" {
			t.Fatalf("%s is at %s!%s: %v", name, sheet, cell, err)
		}
		if got := cellOf(rows, row-1, 1); got != want {
			t.Errorf("%s holds %q, want %q", name, got, want)
		}
		if got := cellOf(rows, row-1, 3); got != "input" {
			t.Errorf("%s is marked %q", name, got)
		}
		if !slices.ContainsFunc(checks, func(v *excelize.DataValidation) bool { return v.Sqref == cell && v.ShowErrorMessage }) {
			t.Errorf("%s takes anything", name)
		}
	}
}

// Every number of every chart stands on the sheet that the list of charts names, beside its x.
func TestChartNumbersAreThere(t *testing.T) {
	for name, made := range map[string]struct {
		survey *report.Survey
		book   []byte
	}{"short": {shortSurvey(), shortBook()}, "week": {weekSurvey(), weekBook()}} {
		t.Run(name, func(t *testing.T) {
			s, f := made.survey, opened(t, made.book)
			where := map[string]string{}
			for _, r := range grid(t, f, "Charts") {
				if len(r) > 2 {
					where[r[0]] = r[2]
				}
			}
			for _, c := range report.Charts(s) {
				sheet := where[clean(c.Title)]
				if sheet == "" {
					t.Errorf("%s is not on the list of charts", c.Key)
					continue
				}
				checkChart(t, numbersOf(t, f, sheet), c, sheet)
			}
		})
	}
}

// numbersOf are the numbers on a sheet, rounded so that they can be found again.
func numbersOf(t *testing.T, f *excelize.File, sheet string) map[string]bool {
	t.Helper()
	out := map[string]bool{}
	for _, r := range grid(t, f, sheet) {
		for _, v := range r {
			out[six(number64(v))] = true
		}
	}
	return out
}

func six(v float64) string { return fmt.Sprintf("%.6g", v) }

func checkChart(t *testing.T, have map[string]bool, c report.Chart, sheet string) {
	t.Helper()
	var all []float64
	for _, one := range c.Series {
		all = append(all, one.Y...)
	}
	if c.Kind == report.SpectrumChart {
		for _, l := range c.Limits {
			all = append(all, l.Y...)
		}
	}
	if c.Grid != nil {
		all = append(all, slices.Concat(c.Grid.Value...)...)
	}
	missed := 0
	for _, v := range all {
		if !math.IsNaN(v) && !have[six(v)] {
			missed++
		}
	}
	if missed > 0 || len(all) == 0 {
		t.Errorf("%s: %d of %d numbers are not on sheet %q", c.Key, missed, len(all), sheet)
	}
}

// Native charts are there, and each line and bar points at the numbers of the chart it stands for.
func TestNativeCharts(t *testing.T) {
	survey, b := shortSurvey(), shortBook()
	z, err := zip.NewReader(bytes.NewReader(b), int64(len(b)))
	if err != nil {
		t.Fatal(err)
	}
	f := opened(t, b)
	natives := map[string]string{}
	for _, part := range z.File {
		if strings.HasPrefix(part.Name, "xl/charts/chart") {
			text := unpacked(t, part)
			for _, c := range report.Charts(survey) {
				if strings.Contains(text, ">"+c.Title+"<") {
					natives[c.Key] = text
				}
			}
		}
	}
	for _, key := range []string{"spectrum-V-ieee-519-2022", "spectrum-V-en-50160", "spectrum-I-ieee-519-2022", "spectrum-N", "waveform-V", "waveform-I", "trend-thd-V", "trend-tdd-I", "trend-load"} {
		if natives[key] == "" {
			t.Errorf("no native chart %s", key)
		}
	}
	for _, c := range report.Charts(survey) {
		if natives[c.Key] == "" {
			continue
		}
		drawn := map[string]bool{}
		for _, ref := range references(natives[c.Key]) {
			drawn[strings.Join(numbersAt(t, f, ref), " ")] = true
		}
		for _, one := range c.Series {
			if one.Use != report.Highest && !drawn[strings.Join(sixes(one.Y), " ")] {
				t.Errorf("%s: %s is not drawn", c.Key, one.Name)
			}
		}
		for _, l := range c.Limits {
			if len(l.Y) == 1 {
				l.Y = []float64{l.Y[0], l.Y[0]} // a line from end to end
			}
			if !drawn[strings.Join(sixes(l.Y), " ")] {
				t.Errorf("%s: %s is not drawn", c.Key, l.Name)
			}
		}
	}
}

// Limit lines of trends follow the limits and the demand current.
func TestTrendLimitsAreLive(t *testing.T) {
	survey, f := shortSurvey(), opened(t, shortBook())
	want := map[string]string{}
	for _, c := range report.Charts(survey) {
		for _, l := range c.Limits {
			if c.Kind == report.TrendChart {
				want[l.Name] = pick(c.Key == "trend-load", nameIL, "'Verdicts ")
			}
		}
	}
	if len(want) < 3 {
		t.Fatalf("trends have limits %v", want)
	}
	for i, r := range grid(t, f, "Charts") {
		if len(r) == 0 || want[r[0]] == "" {
			continue
		}
		for _, row := range []int{i + 1, i + 2} {
			if formula, err := f.GetCellFormula("Charts", at(4, row)); err != nil || !strings.HasPrefix(formula, want[r[0]]) {
				t.Errorf("%s: %q, want a reference to %s (%v)", r[0], formula, want[r[0]], err)
			}
		}
		delete(want, r[0])
	}
	if len(want) > 0 {
		t.Errorf("no lines for %v", want)
	}
}

// references are the ranges that a chart's XML points at.
func references(xml string) []string {
	var out []string
	for _, part := range strings.Split(xml, "f>") {
		if ref := strings.ReplaceAll(strings.TrimRight(part, "</c:"), "&#39;", "'"); strings.HasPrefix(ref, "'") && strings.Contains(ref, ":") {
			out = append(out, ref)
		}
	}
	return out
}

// numbersAt are the numbers of a range of one column.
func numbersAt(t *testing.T, f *excelize.File, ref string) []string {
	t.Helper()
	sheet, span, _ := strings.Cut(ref, "!")
	first, last, _ := strings.Cut(strings.ReplaceAll(span, "$", ""), ":")
	col, from, err := excelize.CellNameToCoordinates(first)
	if err != nil {
		t.Fatal(err)
	}
	_, to, err := excelize.CellNameToCoordinates(last)
	if err != nil {
		t.Fatal(err)
	}
	var out []string
	for row := from; row <= to; row++ {
		v, err := f.GetCellValue(strings.Trim(sheet, "'"), at(col, row))
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, six(number64(v)))
	}
	return out
}

func sixes(v []float64) []string {
	var out []string
	for _, x := range v {
		out = append(out, six(x))
	}
	return out
}

// Series have one row an interval, dates that are dates, units in a row, flags in words.
func TestSeries(t *testing.T) {
	s, f := weekSurvey(), opened(t, weekBook())
	rows := grid(t, f, "Series 10 min")
	top := headRow(rows)
	if top < 0 || rows[top+1][0] != "UTC" {
		t.Fatalf("no head and units: %v", rows[:min(8, len(rows))])
	}
	data := rows[top+2:]
	if len(data) != len(s.Summary.Tens) {
		t.Fatalf("%d rows of %d intervals", len(data), len(s.Summary.Tens))
	}
	column := func(name string) int { return slices.Index(rows[top], name) }
	for i, iv := range s.Summary.Tens {
		when, err := excelize.ExcelDateToTime(number64(data[i][0]), false)
		if want := s.Summary.Start.Add(seconds(iv.At)); err != nil || when.Sub(want).Abs() > time.Millisecond {
			t.Fatalf("row %d begins at %v, want %v (%v)", i, when, want, err)
		}
		// Some programs cut times off instead of rounding them: the number must not be below what 15 digits can say.
		if exact := 25569 + (float64(s.Summary.Start.Unix())+iv.At)/86400; math.Abs(number64(data[i][0])-exact) > 6e-11 {
			t.Errorf("row %d begins at %s, want %.11f", i, data[i][0], exact)
		}
		if want := yesNo(iv.Valid()); data[i][column("Counts")] != want {
			t.Errorf("row %d counts %q, want %s", i, data[i][column("Counts")], want)
		}
		if got, want := data[i][column("I2 TDD")], 100*iv.Channels[4].THC/410; !close(got, want) {
			t.Errorf("row %d: TDD of I2 %s, want %g", i, got, want)
		}
	}
	if got := slices.IndexFunc(data, func(r []string) bool { return r[column("Flags")] == "dip" }); got != slices.IndexFunc(s.Summary.Tens, func(iv harmonics.Interval) bool { return iv.Flags&harmonics.Dip != 0 }) {
		t.Errorf("the dip is in row %d", got)
	}
	orders := grid(t, f, "Orders 10 min V")
	top = headRow(orders)
	if got := orders[top+2+700][slices.Index(orders[top], "V2 h5")]; !nearly(got, s.Summary.Tens[700].Channels[1].H[5], 1e-7) {
		t.Errorf("V2 h5 of interval 700: %s, want %g", got, s.Summary.Tens[700].Channels[1].H[5])
	}
}

func headRow(rows [][]string) int {
	return slices.IndexFunc(rows, func(r []string) bool { return len(r) > 3 && r[0] == "Start" })
}

func BenchmarkWeek(b *testing.B) {
	s := weekSurvey()
	for b.Loop() {
		if err := Write(io.Discard, s); err != nil {
			b.Fatal(err)
		}
	}
}
