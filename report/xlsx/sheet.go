package xlsx

import (
	"cmp"
	"io"
	"strconv"
	"strings"
	"unicode/utf8"

	"github.com/xuri/excelize/v2"
)

// A sheet holds its rows until all are known, since column widths must be written first. Long series are not held: body
// writes them, after the rows.
type sheet struct {
	book  *book
	name  string
	about string
	rows  [][]cell
	body  func(io.Writer) error // writes more rows behind them
	long  int                   // how many of body's rows are printed

	widths     map[int]float64 // set by hand
	heights    map[int]float64 // of rows, in points; else as high as the letters
	frozen     int             // rows
	frozenCols int
	repeat     int // header rows repeated on every printed page, up to this one
	repeatFrom int
	printed    int    // columns printed; 0 for all
	filter     string // range with an automatic filter
	conditions []condition
	shades     []shade
	links      []link
	breaks     []int // rows that begin a page
	charts     []placedChart
	tight      bool // columns are alike, and long words run over to the right
	stream     *excelize.StreamWriter
}

// A condition is a look that cells take on when a formula holds.
type condition struct {
	where, formula string
	look           int
}

// A shade is a range shaded by its numbers: white at low, dark at high.
type shade struct {
	where             string
	low, middle, high float64
}

// A placedChart is a native chart, with those drawn into the same frame, at a cell.
type placedChart struct {
	at    string
	chart []*excelize.Chart
}

// A link leads to another sheet.
type link struct{ from, to string }

// add appends a row and returns its number.
func (s *sheet) add(cells ...cell) int {
	s.rows = append(s.rows, cells)
	return len(s.rows)
}

// next is the number of the row to come.
func (s *sheet) next() int { return len(s.rows) + 1 }

func (s *sheet) gap() { s.add() }

func (s *sheet) title(words string) { s.height(s.add(text(words).as(titleLook)), 21) }
func (s *sheet) part(words string)  { s.height(s.add(text(words).as(partLook)), 17) }

// note writes a sentence over several rows where it is long.
func (s *sheet) note(words string, width int) {
	for _, line := range fold(clean(words), width) {
		s.add(text(line).as(noteLook))
	}
}

// A column heads numbers or words.
type column struct {
	head, unit string
	width      float64 // 0: as wide as what it holds
}

// header writes a row of heads and, where there are any, a row of units. It returns the last of the two.
func (s *sheet) header(columns []column) int {
	heads, below := make([]cell, len(columns)), make([]cell, len(columns))
	units := false
	for i, c := range columns {
		heads[i], below[i] = text(c.head).as(headLook), text(c.unit).as(unitLook)
		units = units || c.unit != ""
		if c.width > 0 {
			s.width(i+1, c.width)
		}
	}
	if !units {
		for i := range heads {
			heads[i].style.line = true
		}
		return s.add(heads...)
	}
	s.add(heads...)
	return s.add(below...)
}

func (s *sheet) width(column int, w float64) {
	if s.widths == nil {
		s.widths = map[int]float64{}
	}
	s.widths[column] = w
}

// freeze keeps the rows up to the given one, and columns, in sight, and repeats header rows on every printed page.
func (s *sheet) freeze(rows, columns, headFrom int) {
	s.frozen, s.frozenCols, s.repeatFrom, s.repeat = rows, columns, headFrom, rows
}

// ref is the address of a cell for formulas on other sheets.
func (s *sheet) ref(column, row int) string { return s.quoted() + "!" + fixed(column, row) }

// span is the address of a range for formulas on other sheets.
func (s *sheet) span(column1, row1, column2, row2 int) string {
	return s.ref(column1, row1) + ":" + fixed(column2, row2)
}

func (s *sheet) quoted() string { return "'" + strings.ReplaceAll(s.name, "'", "''") + "'" }

// columns is how many the held rows have.
func (s *sheet) columns() int {
	n := 1
	for _, r := range s.rows {
		n = max(n, len(r))
	}
	return n
}

// open sets what the library wants to know before the first row, and resolves styles, which only one may do at a time.
func (s *sheet) open() {
	f, b := s.book.file, s.book
	s.align()
	s.indent()
	s.setHeights()
	for _, r := range s.rows {
		for _, c := range r {
			b.id(c.style)
		}
	}
	if s.filter != "" {
		b.keep(f.AutoFilter(s.name, s.filter, nil)) // before the sheet's properties, which it clears
	}
	fit := true
	b.keep(f.SetSheetProps(s.name, &excelize.SheetPropsOptions{FitToPage: &fit}))
	s.page()
	s.setWidths() // before charts, whose places are reckoned from them
	s.decorate()
	stream, err := f.NewStreamWriter(s.name)
	b.keep(err)
	if err != nil {
		return
	}
	s.stream = stream
	if s.frozen > 0 {
		corner := at(s.frozenCols+1, s.frozen+1)
		b.keep(stream.SetPanes(&excelize.Panes{Freeze: true, XSplit: s.frozenCols, YSplit: s.frozen, TopLeftCell: corner,
			ActivePane: pick(s.frozenCols > 0, "bottomRight", "bottomLeft")}))
	}
}

func decimal(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

// setWidths sets the columns' widths from the last to the first, since the library puts what is set later first; alike
// ones at once, since it copies all for each call.
func (s *sheet) setWidths() {
	widths := s.fit()
	for to := len(widths); to > 0; {
		from := to
		for from > 1 && widths[from-2] == widths[to-1] {
			from--
		}
		first, last := column1(from), column1(to)
		s.book.keep(s.book.file.SetColWidth(s.name, first, last, widths[to-1]))
		to = from - 1
	}
}

// decorate adds what stands beside the cells.
func (s *sheet) decorate() {
	f, b := s.book.file, s.book
	for _, c := range s.conditions {
		b.keep(f.SetConditionalFormat(s.name, c.where, []excelize.ConditionalFormatOptions{{Type: "formula", Criteria: c.formula, Format: &c.look}}))
	}
	for _, r := range s.shades {
		b.keep(f.SetConditionalFormat(s.name, r.where, []excelize.ConditionalFormatOptions{{Type: "3_color_scale", Criteria: "=",
			MinType: "num", MidType: "num", MaxType: "num", MinValue: decimal(r.low), MidValue: decimal(r.middle), MaxValue: decimal(r.high),
			MinColor: "#FFFFFF", MidColor: "#C5D6EA", MaxColor: "#7FA8D1"}}))
	}
	for _, l := range s.links {
		b.keep(f.SetCellHyperLink(s.name, l.from, l.to, "Location"))
	}
	for _, c := range s.charts {
		b.keep(f.AddChart(s.name, c.at, c.chart[0], c.chart[1:]...))
	}
	for _, row := range s.breaks {
		b.keep(f.InsertPageBreak(s.name, at(1, row)))
	}
}

// indent gives words room to a number on their left.
func (s *sheet) indent() {
	for _, r := range s.rows {
		for i := 1; i < len(r); i++ {
			if _, words := r[i].value.(string); words && !r[i].style.right {
				r[i].style.indent = true
			}
		}
	}
}

// Heights of rows, in points.
const (
	rowHeight  = 15.0
	lineHeight = 12.75
)

// setHeights makes rows with wrapped words high enough for them: not every program does so by itself.
func (s *sheet) setHeights() {
	widths := s.fit()
	for i, r := range s.rows {
		lines := 1
		for c := range r {
			if words, ok := r[c].value.(string); ok && r[c].style.wrap {
				lines = max(lines, len(fold(words, r[c].lineLength(widths[c]))))
			}
		}
		if lines > 1 {
			s.height(i+1, min(float64(lines)*lineHeight+2.25, excelize.MaxRowHeight))
		}
	}
}

// lineLength is how many letters of a wrapped cell go on a line.
func (c cell) lineLength(width float64) int {
	perDigit := 1.22 // letters are narrower than digits, on the whole
	if c.style.bold {
		perDigit = 1.08
	}
	return max(4, int((width-1.5)*perDigit))
}

func (s *sheet) height(row int, points float64) {
	if s.heights == nil {
		s.heights = map[int]float64{}
	}
	s.heights[row] = points
}

// align sets the heads of columns of numbers to the right, where their numbers stand.
func (s *sheet) align() {
	for i, r := range s.rows {
		if !isHead(r) {
			continue
		}
		below := i + 1
		for below < len(s.rows) && isHead(s.rows[below]) {
			below++
		}
		for c := range r {
			if s.numbersUnder(below, c) {
				r[c].style.right = true
			}
		}
	}
}

func isHead(r []cell) bool { return len(r) > 0 && r[0].style.fill == headFill }

// numbersUnder reports whether the first cell that holds anything in a column, from a row on, holds a number.
func (s *sheet) numbersUnder(row, column int) bool {
	for ; row < len(s.rows) && len(s.rows[row]) > 1; row++ {
		if column >= len(s.rows[row]) {
			continue
		}
		switch v := s.rows[row][column].value.(type) {
		case float64:
			return true
		case string:
			if v != "" {
				return false
			}
		}
	}
	return row == len(s.rows) && s.body != nil && column > 1
}

// write lays the rows down.
func (s *sheet) write() error {
	row := make([]any, 0, s.columns())
	for i, cells := range s.rows {
		row = row[:0]
		for _, c := range cells {
			if c.value == nil && c.formula == "" && c.style.bare() {
				row = append(row, nil)
				continue
			}
			row = append(row, excelize.Cell{StyleID: s.book.styles[c.style], Formula: c.formula, Value: c.value})
		}
		if err := s.stream.SetRow(at(1, i+1), row, excelize.RowOpts{Height: s.heights[i+1]}); err != nil {
			return err
		}
	}
	return s.stream.Flush()
}

const (
	narrowest = 6
	widest    = 48
)

// fit returns the widths of the columns: of what stands in them, but for titles and notes, which run over to the right.
func (s *sheet) fit() []float64 {
	out := make([]float64, s.columns())
	for i := range out {
		out[i] = narrowest
	}
	for _, r := range s.rows {
		for i, c := range r {
			if _, words := c.value.(string); len(r) > 1 && !(s.tight && words && i == len(r)-1) {
				out[i] = max(out[i], min(c.width(), widest))
			}
		}
	}
	for i, w := range s.widths {
		for len(out) < i {
			out = append(out, narrowest)
		}
		out[i-1] = w
	}
	return out
}

// width is how much room a cell takes, in digits.
func (c cell) width() float64 {
	switch v := c.value.(type) {
	case string:
		if c.style.wrap {
			return longestWord(v) + 1.5
		}
		return float64(utf8.RuneCountInString(v))*1.02 + 1.5
	case float64:
		return numberWidth(v, c.style.format) + 1.5
	}
	return 0
}

func longestWord(s string) float64 {
	n := 0
	for _, w := range strings.Fields(s) {
		n = max(n, utf8.RuneCountInString(w))
	}
	return float64(n) * 1.1
}

func numberWidth(v float64, format string) float64 {
	if strings.HasPrefix(format, dateLook.format) {
		return 18
	}
	whole := 1.0
	for a := max(v, -v); a >= 10; a /= 10 {
		whole++
	}
	if v < 0 {
		whole++
	}
	after := strings.LastIndexByte(format, '.')
	if after < 0 {
		return whole
	}
	return whole + float64(len(format)-after)
}

// page sets up printing: landscape, as wide as the paper, pages numbered.
func (s *sheet) page() {
	f, b := s.book.file, s.book
	paper, wide, tall, turned := 9, 1, 0, "landscape" // 9 is A4; programs scale to the paper there is
	b.keep(f.SetPageLayout(s.name, &excelize.PageLayoutOptions{Size: &paper, Orientation: &turned, FitToWidth: &wide, FitToHeight: &tall}))
	edge, head := 0.5, 0.3
	bottom := 0.7
	b.keep(f.SetPageMargins(s.name, &excelize.PageLayoutMarginsOptions{Left: &edge, Right: &edge, Top: &edge, Bottom: &bottom, Header: &head, Footer: &head}))
	left := cut(strings.ReplaceAll(strings.Join(strings.Fields(s.book.title()), " "), "&", "&&"), 90)
	b.keep(f.SetHeaderFooter(s.name, &excelize.HeaderFooterOptions{OddFooter: "&L" + guard(left) + "&C&A&R&P of &N"}))
	if s.repeat > 0 {
		b.keep(f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Titles", Scope: s.name,
			RefersTo: s.quoted() + "!$" + itoa(cmp.Or(s.repeatFrom, s.repeat)) + ":$" + itoa(s.repeat)}))
	}
	if s.printed > 0 {
		b.keep(f.SetDefinedName(&excelize.DefinedName{Name: "_xlnm.Print_Area", Scope: s.name,
			RefersTo: s.span(1, 1, s.printed, max(1, len(s.rows)+s.long))}))
	}
}

// guard keeps a text that begins with a digit from being read as the size of the letters before it.
func guard(s string) string {
	if s != "" && s[0] >= '0' && s[0] <= '9' {
		return " " + s
	}
	return s
}
