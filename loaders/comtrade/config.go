package comtrade

import (
	"bytes"
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

// maxAnalog bounds the analog channels of a recording, and with them the memory of a block.
const maxAnalog = 4096

// A config is a parsed configuration.
type config struct {
	file     string // base name, for messages
	encoding string
	edition  int // 1991, 1999 or 2013
	stated   bool
	station  string
	device   string

	analogs  []analog
	statuses int
	nominal  float64
	rates    []rate
	start    moment
	form     string
	timeMult float64
	formLine int
	offset   *time.Location // of the times to UTC; nil when not told
	notes    []wave.Note
}

// An analog is one analog channel's line.
type analog struct {
	line               int
	name, phase, unit  string
	a, b               float64
	skew               float64 // µs
	min, max           float64 // of the raw value
	primary, secondary float64
	side               byte // 'P', 'S' or 0
}

// A rate is one sampling rate and the last sample taken at it.
type rate struct {
	line int
	hz   float64
	last int64
}

// looksLikeConfig reports whether a file starts as a configuration: the second line holds numbers of channels.
func looksLikeConfig(head []byte) bool {
	text, _ := decode(head, "")
	lines := strings.SplitN(text, "\n", 3)
	if len(lines) == 1 {
		lines = strings.SplitN(text, "\r", 3)
	}
	if len(lines) < 2 || bytes.IndexByte(head, 0) >= 0 && !bytes.HasPrefix(head, []byte{0xFF, 0xFE}) && !bytes.HasPrefix(head, []byte{0xFE, 0xFF}) {
		return false
	}
	_, _, ok := channelCounts(fields(lines[1]))
	return ok
}

// channelCounts reads the second line: "6,4A,2D", letters in either case.
func channelCounts(f []string) (analogs, statuses int, ok bool) {
	if len(f) < 2 {
		return 0, 0, false
	}
	for _, field := range f[1:] {
		if field == "" {
			continue
		}
		letter := field[len(field)-1] | 0x20
		n, err := strconv.Atoi(strings.TrimSpace(field[:len(field)-1]))
		switch {
		case err != nil || n < 0 || n > 999999:
			return 0, 0, false
		case letter == 'a':
			analogs, ok = n, true
		case letter == 'd':
			statuses = n
		default:
			return 0, 0, false
		}
	}
	_, err := strconv.Atoi(f[0])
	return analogs, statuses, ok && err == nil
}

// fields splits a line at its commas and trims the blanks that recorders pad with.
func fields(line string) []string {
	f := strings.Split(line, ",")
	for i := range f {
		f[i] = strings.Trim(f[i], " \t\r\x00")
	}
	return f
}

// A configReader goes through a configuration's lines.
type configReader struct {
	*config
	lines []string
	next  int // index of the next line
	first int // number of lines[0] in its file
}

// parseConfig reads a configuration whose first line is line number first of the file.
func parseConfig(text []byte, file string, first int, opt input.Options) (*config, error) {
	if end := bytes.IndexByte(text, 0x1A); end >= 0 { // DOS ends a text so
		text = text[:end]
	}
	c := &config{file: file, edition: 1991, timeMult: 1}
	var decoded string
	decoded, c.encoding = decode(text, opt.File.Encoding)
	if !strings.Contains(decoded, "\n") {
		decoded = strings.ReplaceAll(decoded, "\r", "\n")
	}
	r := &configReader{config: c, lines: strings.Split(decoded, "\n"), first: first}
	for _, step := range []func() error{r.names, r.channels, r.sampling, r.times, r.data} {
		if err := step(); err != nil {
			return nil, err
		}
	}
	r.clock()
	return c, nil
}

// line takes the next line's fields; what names the line where it is missing.
func (r *configReader) line(what string) ([]string, error) {
	if r.next >= len(r.lines) || r.next == len(r.lines)-1 && strings.TrimSpace(r.lines[r.next]) == "" {
		return nil, r.wrong("the configuration ends before the line with %s; copy it again from the recorder", what)
	}
	f := fields(r.lines[r.next])
	r.next++
	return f, nil
}

// number is the number of the line taken last.
func (r *configReader) number() int { return r.first + max(0, r.next-1) }

func (r *configReader) wrong(msg string, args ...any) error {
	return &wave.ParseError{File: r.file, Line: r.number(), Msg: fmt.Sprintf(msg, args...)}
}

func (r *configReader) note(code, msg string, args ...any) {
	r.notes = append(r.notes, wave.Note{Code: code, Text: fmt.Sprintf(msg, args...)})
}

// names reads the first line. Station names may hold commas, so the fields count from the end.
func (r *configReader) names() error {
	f, err := r.line("the station's name")
	if err != nil {
		return err
	}
	if n := len(f); n >= 3 {
		switch year, err := strconv.Atoi(f[n-1]); {
		case err != nil:
		case year >= 2013:
			r.edition, r.stated = 2013, true
		case year >= 1999:
			r.edition, r.stated = 1999, true
		case year == 1991:
			r.stated = true
		}
		if r.stated || f[n-1] == "" {
			f = f[:n-1]
		}
	}
	r.station = f[0]
	if n := len(f); n > 1 {
		r.station, r.device = strings.Join(f[:n-1], ", "), f[n-1]
	}
	return nil
}

func (r *configReader) channels() error {
	f, err := r.line("the number of channels")
	if err != nil {
		return err
	}
	analogs, statuses, ok := channelCounts(f)
	switch {
	case !ok:
		return r.wrong("%q does not tell the number of channels, as in 6,4A,2D", strings.Join(f, ","))
	case analogs == 0:
		return &wave.UnsupportedError{File: r.file, Line: r.number(), Msg: "the recording has no analog channel; export one with the waveforms"}
	case analogs > maxAnalog:
		return &wave.UnsupportedError{File: r.file, Line: r.number(), Msg: fmt.Sprintf("%d analog channels are more than the %d that are read; export fewer", analogs, maxAnalog)}
	}
	for n := range analogs {
		f, err := r.line(fmt.Sprintf("analog channel %d of %d", n+1, analogs))
		if err != nil {
			return err
		}
		a, err := r.analog(f)
		if err != nil {
			return err
		}
		r.analogs = append(r.analogs, a)
	}
	for n := range statuses {
		if _, err := r.line(fmt.Sprintf("status channel %d of %d", n+1, statuses)); err != nil {
			return err
		}
	}
	r.statuses = statuses
	return nil
}

// analog reads the line of an analog channel: number, name, phase, circuit, unit, a, b, skew, min, max, and from 1999
// on primary, secondary, P or S.
func (r *configReader) analog(f []string) (analog, error) {
	for len(f) > 13 && f[len(f)-1] == "" {
		f = f[:len(f)-1]
	}
	if extra := len(f) - 13; extra > 0 { // the name holds commas
		f = append([]string{f[0], strings.Join(f[1:2+extra], ",")}, f[2+extra:]...)
	}
	if len(f) < 7 {
		return analog{}, r.wrong("the line of an analog channel has %d fields, not 10 or 13; see that the second line tells the right number of channels", len(f))
	}
	if len(f) == 13 && !r.stated {
		r.edition = 1999
	}
	a := analog{line: r.number(), name: f[1], phase: f[2], unit: f[4]}
	for i, to := range map[int]*float64{5: &a.a, 6: &a.b, 7: &a.skew, 8: &a.min, 9: &a.max, 10: &a.primary, 11: &a.secondary} {
		if i >= len(f) || f[i] == "" && i != 5 {
			continue
		}
		v, err := decimal(f[i])
		if err != nil {
			if i > 7 { // limits and ratios can be done without
				continue
			}
			return analog{}, r.wrong("%s of channel %q is %q, which is no number; copy the configuration again from the recorder", []string{"the factor a", "the offset b", "the skew"}[i-5], a.name, f[i])
		}
		*to = v
	}
	if len(f) > 12 && f[12] != "" {
		if side := f[12][0] &^ 0x20; side == 'P' || side == 'S' {
			a.side = side
		}
	}
	return a, nil
}

// decimal reads a finite number; recorders of some countries write a decimal comma, but never here, where it separates
// the fields.
func decimal(s string) (float64, error) {
	v, err := strconv.ParseFloat(s, 64)
	if err == nil && (math.IsInf(v, 0) || math.IsNaN(v)) {
		err = strconv.ErrRange
	}
	return v, err
}

// sampling reads the nominal frequency and the sampling rates.
func (r *configReader) sampling() error {
	f, err := r.line("the nominal frequency")
	if err != nil {
		return err
	}
	if len(f) >= 3 {
		return r.wrong("the line has %d fields where the nominal frequency should stand; see that the second line tells the right number of channels", len(f))
	}
	if f[0] != "" {
		if r.nominal, err = decimal(f[0]); err != nil {
			return r.wrong("the nominal frequency is %q; see that the second line tells the right number of channels", f[0])
		}
	}
	if f, err = r.line("the number of sampling rates"); err != nil {
		return err
	}
	n := 0
	if f[0] != "" {
		if n, err = strconv.Atoi(f[0]); err != nil || n < 0 || n > 999999 {
			return r.wrong("%q is no number of sampling rates; copy the configuration again from the recorder", f[0])
		}
	}
	for i := range max(n, 1) {
		f, err := r.line(fmt.Sprintf("sampling rate %d of %d", i+1, max(n, 1)))
		if err != nil {
			return err
		}
		if err := r.addRate(f); err != nil {
			return err
		}
	}
	return nil
}

func (r *configReader) addRate(f []string) error {
	entry := rate{line: r.number()}
	var err error
	if f[0] != "" {
		if entry.hz, err = decimal(f[0]); err != nil || entry.hz != 0 && !(entry.hz >= 1e-3 && entry.hz <= 1e9) {
			return r.wrong("%q is no sampling rate; write samples per second, or 0 where time stamps tell", f[0])
		}
	}
	if len(f) > 1 && f[1] != "" {
		last, err := decimal(f[1])
		if err != nil || last < 0 || last > 1<<53 {
			return r.wrong("%q is no sample number; copy the configuration again from the recorder", f[1])
		}
		entry.last = int64(last)
	}
	if n := len(r.rates); n > 0 && entry.last < r.rates[n-1].last {
		return r.wrong("this rate ends at sample %d, before the one above it, which ends at %d; put the rates in order", entry.last, r.rates[n-1].last)
	}
	r.rates = append(r.rates, entry)
	return nil
}

// times reads the instants of the first sample and of the trigger.
func (r *configReader) times() error {
	f, err := r.line("the time of the first sample")
	if err != nil {
		return err
	}
	r.start, err = parseMoment(f, r.edition)
	if err != nil {
		r.note("start-unknown", "%s:%d: the time of the first sample, %q, cannot be read (%v): the recording has no date.", r.file, r.number(), strings.Join(f, ","), err)
		r.start = moment{}
	}
	if r.start.turned {
		r.note("date-order-assumed", "%s:%d: the date %q is not in the order of the %d edition; it is read as %s.", r.file, r.number(), f[0], r.edition, r.start.text())
	} else if r.edition == 1991 && r.start.open {
		r.note("date-order-assumed", "%s:%d: the date %q is read as %s, month first as the 1991 edition has it; recorders exist that write the day first.", r.file, r.number(), f[0], r.start.text())
	}
	trigger, err := r.line("the time of the trigger")
	if err != nil {
		return err
	}
	if t, err := parseMoment(trigger, r.edition); err == nil && t.nanos {
		r.start.nanos = true
	}
	return nil
}

// data reads the form of the data and the factor of the time stamps.
func (r *configReader) data() error {
	f, err := r.line("the form of the data, ASCII or BINARY")
	if err != nil {
		return err
	}
	r.formLine = r.number()
	if r.form, err = formOf(f[0]); err != nil {
		return r.wrong("%v", err)
	}
	if f, err = r.line("the time multiplier"); err != nil || f[0] == "" {
		return nil // the 1991 edition has none
	}
	m, err := decimal(f[0])
	if err != nil || !(m >= 1e-9 && m <= 1e9) {
		r.note("time-multiplier", "%s:%d: %q is no factor of time stamps; they are taken to be in µs.", r.file, r.number(), f[0])
		return nil
	}
	r.timeMult = m
	return nil
}

func formOf(word string) (string, error) {
	switch w := strings.ToUpper(strings.ReplaceAll(word, " ", "")); w {
	case ASCII, Binary, Binary32, Float32:
		return w, nil
	case "BINARY16":
		return Binary, nil
	}
	return "", fmt.Errorf("%q is no form of the data; it is ASCII, BINARY, BINARY32 or FLOAT32: see that the number of channels and of rates is right", word)
}

// clock reads the offset to UTC that the 2013 edition tells.
func (r *configReader) clock() {
	if r.edition < 2013 {
		return
	}
	f, err := r.line("the time codes")
	if err != nil || f[0] == "" {
		return
	}
	offset, known, err := parseOffset(f[0])
	if err != nil {
		r.note("offset-unknown", "%s:%d: the time code %q is no offset to UTC such as -5h30; the times are taken to be in the site's time zone.", r.file, r.number(), f[0])
		return
	}
	if known {
		r.offset = offset
	}
}
