package xlsx

import (
	"io"
	"math"
	"strconv"
)

// A rowWriter writes rows of numbers as a sheet's XML. The library would hold a week's orders in memory, or in files
// beside, several times over; here they go straight into the compressor.
type rowWriter struct {
	w       io.Writer
	buf     []byte
	letters []string // of the columns
	column  int
	number  []byte // the row's
	err     error
}

func newRowWriter(w io.Writer, columns int) *rowWriter {
	r := &rowWriter{w: w, letters: make([]string, columns)}
	for i := range r.letters {
		r.letters[i] = column1(i + 1)
	}
	return r
}

func (r *rowWriter) begin(row int) {
	r.column = 0
	r.number = strconv.AppendInt(r.number[:0], int64(row), 10)
	r.buf = append(append(append(r.buf, `<row r="`...), r.number...), `">`...)
}

func (r *rowWriter) end() {
	r.buf = append(r.buf, "</row>"...)
	if len(r.buf) > 1<<15 {
		r.flush()
	}
}

func (r *rowWriter) flush() {
	if r.err == nil {
		_, r.err = r.w.Write(r.buf)
	}
	r.buf = r.buf[:0]
}

// open begins the next cell.
func (r *rowWriter) open(look int) {
	r.buf = append(append(append(r.buf, `<c r="`...), r.letters[r.column]...), r.number...)
	r.buf = strconv.AppendInt(append(r.buf, `" s="`...), int64(look), 10)
	r.column++
}

// value writes a number; nothing where it was not measured.
func (r *rowWriter) value(v float64, look int) {
	if math.IsNaN(v) || math.IsInf(v, 0) {
		r.column++
		return
	}
	r.open(look)
	r.buf = append(r.buf, `"><v>`...)
	r.buf = strconv.AppendFloat(r.buf, v, 'g', -1, 64)
	r.buf = append(r.buf, "</v></c>"...)
}

// word writes a text without characters that XML would have to escape.
func (r *rowWriter) word(s string, look int) {
	r.open(look)
	r.buf = append(append(append(r.buf, `" t="inlineStr"><is><t>`...), s...), "</t></is></c>"...)
}
