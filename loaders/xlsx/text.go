package xlsx

import (
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"strconv"
	"strings"

	"github.com/xuri/excelize/v2"

	"wavetally/loaders/table"
)

// sheetFS shows a workbook as the text of one of its worksheets: a line a row, cells separated by tabs, numbers as
// they are stored, dates as stamps.
type sheetFS struct{ sheet string }

func (s sheetFS) Open(path string) (fs.File, error) {
	info, err := os.Stat(path)
	if err != nil {
		return nil, err
	}
	f, err := open(path)
	if err != nil {
		return nil, err
	}
	dates, err := dateColumns(f, s.sheet)
	if err != nil {
		f.Close()
		return nil, err
	}
	rows, err := f.Rows(s.sheet)
	if err != nil {
		f.Close()
		return nil, err
	}
	return &sheetText{book: f, rows: rows, dates: dates, info: info}, nil
}

// sheetText is a worksheet being read as text.
type sheetText struct {
	book  *excelize.File
	rows  *excelize.Rows
	dates dates
	info  fs.FileInfo
	line  []byte // still to be handed over
	end   bool
}

func (t *sheetText) Stat() (fs.FileInfo, error) { return t.info, nil }

func (t *sheetText) Close() error {
	t.rows.Close()
	return t.book.Close()
}

func (t *sheetText) Read(p []byte) (int, error) {
	n := 0
	for n < len(p) {
		if len(t.line) == 0 {
			if t.end {
				break
			}
			if err := t.next(); err != nil {
				return n, err
			}
		}
		m := copy(p[n:], t.line)
		t.line = t.line[m:]
		n += m
	}
	if n == 0 && len(p) > 0 {
		return 0, io.EOF
	}
	return n, nil
}

// next makes the next row's line.
func (t *sheetText) next() error {
	if !t.rows.Next() {
		t.end = true
		return t.rows.Error()
	}
	cells, err := t.rows.Columns()
	if err != nil {
		return err
	}
	line := t.line[:0]
	for i, cell := range cells {
		if i > 0 {
			line = append(line, '\t')
		}
		line = append(line, t.dates.text(i, clean(cell))...)
	}
	t.line = append(line, '\n')
	return nil
}

// clean keeps a cell on its line and in its column.
func clean(cell string) string {
	if !strings.ContainsAny(cell, "\t\r\n\"") {
		return cell
	}
	return strings.NewReplacer("\t", " ", "\r", " ", "\n", " ", `"`, "'").Replace(cell)
}

// dates says which columns hold dates and times, which a workbook stores as days since an epoch.
type dates struct {
	columns map[int]bool
	from    float64 // days from 1970-01-01 to day 0 of the workbook
}

// dateColumns finds columns whose cells are stored as numbers but shown as a date or a time of day.
func dateColumns(f *excelize.File, sheet string) (dates, error) {
	d := dates{columns: map[int]bool{}, from: -25569} // day 0 is 1899-12-30 (ECMA-376 part 1, 18.17.4.1)
	if props, err := f.GetWorkbookProps(); err == nil && props.Date1904 != nil && *props.Date1904 {
		d.from = -24107 // 1904-01-01
	}
	raw, err := f.Rows(sheet)
	if err != nil {
		return d, err
	}
	defer raw.Close()
	shown, err := f.Rows(sheet)
	if err != nil {
		return d, err
	}
	defer shown.Close()
	for range 200 {
		if !raw.Next() || !shown.Next() {
			break
		}
		a, errA := raw.Columns()
		b, errB := shown.Columns(excelize.Options{RawCellValue: false})
		if errA != nil || errB != nil {
			break
		}
		for i := range min(len(a), len(b)) {
			if _, err := strconv.ParseFloat(a[i], 64); err == nil && a[i] != b[i] && isStamp(b[i]) {
				d.columns[i] = true
			}
		}
	}
	return d, nil
}

func isStamp(text string) bool {
	_, day := table.ParseStamp([]byte(text), table.DayFirst)
	_, month := table.ParseStamp([]byte(text), table.MonthFirst)
	return day || month
}

// text writes a stored date as a stamp, and anything else as it is. Day numbers arrive with fifteen digits, which
// resolve nine microseconds, so a stamp has five decimals.
func (d dates) text(column int, cell string) string {
	if !d.columns[column] {
		return cell
	}
	days, err := strconv.ParseFloat(cell, 64)
	if err != nil || days < 0 || days > 2958466 { // the year 10000
		return cell
	}
	whole := math.Floor(days)
	n := int64(math.Round((days - whole) * 86400e5)) // ten microseconds each
	if n == 86400e5 {
		whole, n = whole+1, 0
	}
	clock := fmt.Sprintf("%02d:%02d:%02d.%05d", n/3600e5, n/60e5%60, n/1e5%60, n%1e5)
	if whole == 0 {
		return clock
	}
	year, month, day := table.Civil(int64(whole + d.from))
	return fmt.Sprintf("%04d-%02d-%02d %s", year, month, day, clock)
}
