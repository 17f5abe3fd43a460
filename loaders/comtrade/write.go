package comtrade

import (
	"bufio"
	"cmp"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"time"

	"wavetally/harmonics/wave"
)

// Write writes a recording by the 2013 edition as stem.cfg and stem.dat, or as one file when stem ends in .cff. form is
// one of [ASCII], [Binary], [Binary32] and [Float32]. The source is read twice, and a complete recording appears or
// none.
//
// Samples are rounded to a 65 534th of a channel's span (ASCII: 199 980th, BINARY32: 4·10⁹th, FLOAT32: 24 bits), or to
// the channel's own step where its values fit. A recording with gaps is written without a sampling rate, timed by stamps
// of a ns, or a 4·10⁹th of its length where that is more.
func Write(stem string, src wave.Source, form string) error {
	w := &writer{src: src, header: src.Header(), form: form}
	if _, err := formOf(form); err != nil {
		return fmt.Errorf("comtrade: %w", err)
	}
	if err := w.survey(); err != nil {
		return err
	}
	w.schedule()
	w.scale()
	if strings.EqualFold(filepath.Ext(stem), ".cff") {
		return replace(stem, w.combined)
	}
	if err := replace(stem+".dat", w.data); err != nil {
		return err
	}
	return replace(stem+".cfg", w.config)
}

// replace writes a file beside its place, and moves it there when it is complete.
func replace(path string, write func(io.Writer) error) error {
	f, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		return err
	}
	defer os.Remove(f.Name())
	b := bufio.NewWriterSize(f, readBytes)
	err = write(b)
	if err == nil {
		err = b.Flush()
	}
	if err == nil {
		err = f.Chmod(0o644)
	}
	if err = cmp.Or(err, f.Close()); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}

// A writer writes one recording.
type writer struct {
	src    wave.Source
	header wave.Header
	form   string

	segments []segment
	lows     []float64 // of each channel's samples
	highs    []float64
	scales   []scaling
	rates    []rate
	stamped  bool // the records' stamps tell the time
	nanos    bool
	mult     float64 // of the stamps
	rows     int64
}

// A segment is one of the source's.
type segment struct {
	at, rate float64
	rows     int64
}

func (g segment) end() float64 { return g.at + float64(g.rows)/g.rate }

// A scaling tells raw values from samples: sample = a·x + b.
type scaling struct {
	a, b     float64
	min, max float64 // of x, as the range tells
	most     float64 // of x, either sign
}

// limit is the largest raw value of a form.
func limit(form string) float64 {
	switch form {
	case ASCII:
		return 99990
	case Binary:
		return 32767
	}
	return math.MaxInt32
}

// survey reads the source for its segments and spans.
func (w *writer) survey() error {
	n := len(w.header.Channels)
	w.lows, w.highs = make([]float64, n), make([]float64, n)
	for c := range n {
		w.lows[c], w.highs[c] = math.Inf(1), math.Inf(-1)
	}
	id := -1
	for b, err := range w.src.Blocks() {
		if err != nil {
			return err
		}
		if b.Segment != id {
			id = b.Segment
			w.segments = append(w.segments, segment{at: b.At, rate: b.Rate})
			if len(w.segments) > maxStretches {
				return fmt.Errorf("comtrade: the recording has more than %d gaps", maxStretches)
			}
		}
		w.segments[len(w.segments)-1].rows += int64(b.Len())
		w.rows += int64(b.Len())
		for c, row := range b.Data {
			for _, v := range row {
				if v < w.lows[c] && v >= -math.MaxFloat64 {
					w.lows[c] = v
				}
				if v > w.highs[c] && v <= math.MaxFloat64 {
					w.highs[c] = v
				}
			}
		}
	}
	if w.rows == 0 {
		return errors.New("comtrade: the recording has no samples")
	}
	return nil
}

// schedule chooses between sampling rates and time stamps.
func (w *writer) schedule() {
	first := w.segments[0]
	w.rates = []rate{{hz: first.rate, last: first.rows}}
	now := section{rate: first.rate, after: 1, base: first.at}
	for _, g := range w.segments[1:] {
		last := w.rates[len(w.rates)-1].last
		if g.rate != now.rate {
			now = section{rate: g.rate, after: last, base: now.at(last)}
			w.rates = append(w.rates, rate{hz: g.rate})
		}
		w.stamped = w.stamped || math.Abs(now.at(last+1)-g.at)*g.rate > 1e-3
		w.rates[len(w.rates)-1].last = last + g.rows
	}
	if w.stamped {
		w.rates = []rate{{last: w.rows}}
	}
	w.chooseStamps()
}

// chooseStamps makes the stamps' unit as fine as 32 bits allow.
func (w *writer) chooseStamps() {
	length := w.segments[len(w.segments)-1].end() - w.segments[0].at
	unit := 1e-6
	if w.nanos = w.stamped || w.header.Start.Nanosecond()%1000 != 0; w.nanos {
		unit = 1e-9
	}
	w.mult = max(1, math.Ceil(length/unit/4e9))
}

func (w *writer) unit() float64 {
	if w.nanos {
		return w.mult * 1e-9
	}
	return w.mult * 1e-6
}

// scale chooses each channel's raw values.
func (w *writer) scale() {
	most := limit(w.form)
	for c, ch := range w.header.Channels {
		low, high := w.lows[c], w.highs[c]
		s := scaling{a: 1, min: -most, max: most, most: most}
		switch {
		case w.form == Float32:
			s.min, s.max = -math.MaxFloat32, math.MaxFloat32
		case !(low <= high): // no sample is known
		case ch.Step > 0 && low >= -most*ch.Step && high <= most*ch.Step:
			s.a = ch.Step
		case low == high:
			s.b = low
		default:
			s.a, s.b = high/(2*most)-low/(2*most), high/2+low/2
		}
		if s.a == 0 { // the span is too small for a number
			s.a = 1
		}
		if w.form != Float32 && ch.Low < ch.High {
			s.min, s.max = max(-most, math.Round((ch.Low-s.b)/s.a)), min(most, math.Round((ch.High-s.b)/s.a))
		}
		w.scales = append(w.scales, s)
	}
}

// clean takes out of a name what would break the line.
func clean(name string) string {
	return strings.TrimSpace(strings.Map(func(r rune) rune {
		switch {
		case r == ',':
			return ';'
		case r < ' ':
			return ' '
		}
		return r
	}, name))
}

// config writes the configuration.
func (w *writer) config(out io.Writer) error {
	h := w.header
	device := ""
	if len(h.Files) > 0 {
		device = clean(h.Files[0].Name)
	}
	lines := []string{device + ",wavetally,2013", fmt.Sprintf("%d,%dA,0D", len(h.Channels), len(h.Channels))}
	for c, ch := range h.Channels {
		s := w.scales[c]
		lines = append(lines, fmt.Sprintf("%d,%s,%s,,%s,%s,%s,%s,%s,%s,1,1,P", c+1, clean(ch.Name), clean(ch.Phase), clean(ch.Unit),
			number(s.a), number(s.b), number(ch.Skew*1e6), number(s.min), number(s.max)))
	}
	lines = append(lines, number(h.Nominal))
	if w.stamped {
		lines = append(lines, "0")
	} else {
		lines = append(lines, strconv.Itoa(len(w.rates)))
	}
	for _, r := range w.rates {
		lines = append(lines, fmt.Sprintf("%s,%d", number(r.hz), r.last))
	}
	start := w.instant()
	code := "x,x"
	if h.HasZone {
		code = offsetCode(h.Start) + "," + offsetCode(h.Start)
	}
	lines = append(lines, start, start, w.form, number(w.mult), code, "F,3", "")
	_, err := io.WriteString(out, strings.Join(lines, "\r\n"))
	return err
}

func number(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// instant is the time of the first sample, empty when it is not known.
func (w *writer) instant() string {
	start := w.header.Start
	switch {
	case start.IsZero():
		return ","
	case w.nanos:
		return start.Format("02/01/2006,15:04:05.000000000")
	}
	return start.Format("02/01/2006,15:04:05.000000")
}

// offsetCode writes the offset to UTC as "-5h30".
func offsetCode(t time.Time) string {
	_, seconds := t.Zone()
	sign := ""
	if seconds < 0 {
		sign, seconds = "-", -seconds
	} else if seconds > 0 {
		sign = "+"
	}
	if minutes := seconds % 3600 / 60; minutes > 0 {
		return fmt.Sprintf("%s%dh%02d", sign, seconds/3600, minutes)
	}
	return fmt.Sprintf("%s%d", sign, seconds/3600)
}

// combined writes the configuration and the data in one.
func (w *writer) combined(out io.Writer) error {
	if _, err := io.WriteString(out, "--- file type: CFG ---\r\n"); err != nil {
		return err
	}
	if err := w.config(out); err != nil {
		return err
	}
	part := "ASCII"
	if w.form != ASCII {
		part = fmt.Sprintf("%s: %d", w.form, w.rows*int64(recordLength(w.form, len(w.scales), 0)))
	}
	if _, err := fmt.Fprintf(out, "--- file type: INF ---\r\n\r\n--- file type: HDR ---\r\n\r\n--- file type: DAT %s ---\r\n", part); err != nil {
		return err
	}
	return w.data(out)
}

// data writes the records.
func (w *writer) data(out io.Writer) error {
	id, at := -1, -1         // the block's segment, and its place among w.segments
	var number, inside int64 // of the record, in the recording and in the segment
	var buf []byte
	for b, err := range w.src.Blocks() {
		if err != nil {
			return err
		}
		if b.Segment != id {
			id, inside = b.Segment, 0
			at++
		}
		g := w.segments[at]
		for i := range b.Len() {
			number++
			seconds := g.at - w.segments[0].at + float64(inside)/g.rate
			inside++
			buf = w.record(buf[:0], number, uint64(math.Round(seconds/w.unit())), b, i)
			if _, err := out.Write(buf); err != nil {
				return err
			}
		}
	}
	return nil
}

func (w *writer) record(buf []byte, number int64, stamp uint64, b wave.Block, i int) []byte {
	if w.form == ASCII {
		buf = strconv.AppendUint(append(strconv.AppendInt(buf, number, 10), ','), stamp, 10)
		for c, s := range w.scales {
			buf = append(buf, ',')
			if x := s.raw(b.Data[c][i]); !math.IsNaN(x) {
				buf = strconv.AppendInt(buf, int64(x), 10)
			}
		}
		return append(buf, "\r\n"...)
	}
	buf = binary.LittleEndian.AppendUint32(binary.LittleEndian.AppendUint32(buf, uint32(number)), uint32(stamp))
	for c, s := range w.scales {
		buf = w.value(buf, s, b.Data[c][i])
	}
	return buf
}

func (w *writer) value(buf []byte, s scaling, v float64) []byte {
	if w.form == Float32 {
		x := float32(v)
		if !(x > -math.MaxFloat32 && x <= math.MaxFloat32) {
			x = -math.MaxFloat32
		}
		return binary.LittleEndian.AppendUint32(buf, math.Float32bits(x))
	}
	x := s.raw(v)
	switch missing := math.IsNaN(x); {
	case w.form == Binary && missing:
		return binary.LittleEndian.AppendUint16(buf, 0x8000)
	case w.form == Binary:
		return binary.LittleEndian.AppendUint16(buf, uint16(int16(x)))
	case missing:
		return binary.LittleEndian.AppendUint32(buf, 0x80000000)
	}
	return binary.LittleEndian.AppendUint32(buf, uint32(int32(x)))
}

// raw rounds a sample to the nearest raw value. One that the form cannot hold is missing.
func (s scaling) raw(v float64) float64 {
	x := math.Round((v - s.b) / s.a)
	if !(math.Abs(x) <= s.most) {
		return math.NaN()
	}
	return x
}
