package comtrade

import (
	"fmt"
	"math"
	"path/filepath"
	"strings"

	"wavetally/harmonics/wave"
	"wavetally/loaders/table"
)

// A channel is an analog channel that is read.
type channel struct {
	wave.Channel
	column    int     // among the analog channels
	gain, off float64 // sample = gain·x + off, in Unit on the primary side
	missing   float64 // raw value that an ASCII file has for a missing one, besides the edition's; NaN if there is none
}

// A section is a stretch of records at one rate.
type section struct {
	rate  float64 // Hz
	after int64   // record before its first; 1 for the first section, whose record 1 is at 0 s
	last  int64   // its last record
	base  float64 // s, time of record after
}

func (s section) at(record int64) float64 { return s.base + float64(record-s.after)/s.rate }

// A stampScale turns time stamps into seconds.
type stampScale struct {
	unit  float64 // s
	wraps float64 // s, after which 32 bits start again; 0: never
	runs  []stretch
}

// prepare understands the configuration and looks at the data, without reading them whole.
func (s *source) prepare() error {
	s.header.Notes = append(s.header.Notes, s.config.notes...)
	s.chooseForm()
	if err := s.chooseChannels(); err != nil {
		return err
	}
	s.makeHeader()
	if err := s.plan(); err != nil {
		return err
	}
	s.checkSkew()
	return s.compareLength()
}

// chooseForm settles the form of the data: the data themselves count more than what is said about them.
func (s *source) chooseForm() {
	c := s.config
	s.form = s.data.form
	if s.form != c.form {
		s.note("form-conflict", "", "%s:%d says that the data are %s, the line before the data %s; they are read as the latter.", c.file, c.formLine, c.form, s.form)
	}
	head := s.firstBytes()
	if s.form != ASCII && textRecords(head) {
		s.note("form-conflict", "", "%s:%d says that the data are %s, but they are text; they are read as ASCII.", c.file, c.formLine, s.form)
		s.form = ASCII
	}
	s.record = recordLength(s.form, len(c.analogs), c.statuses)
	s.fitRecord(head)
}

// recordLength is the length of a binary record in bytes, and 0 for ASCII.
func recordLength(form string, analogs, statuses int) int {
	switch form {
	case Binary:
		return 8 + 2*analogs + 2*((statuses+15)/16)
	case Binary32, Float32:
		return 8 + 4*analogs + 2*((statuses+15)/16)
	}
	return 0
}

// firstBytes returns the beginning of the data; an error will show again when they are read.
func (s *source) firstBytes() []byte {
	r, closer, err := s.openData()
	if err != nil {
		return nil
	}
	defer closer.Close()
	head := make([]byte, 65536)
	n, _ := readFull(r, head)
	return head[:n]
}

// textRecords reports whether data start with a line of numbers in text.
func textRecords(head []byte) bool {
	commas := 0
	for _, c := range head[:min(len(head), 512)] {
		switch {
		case c == '\n' || c == '\r':
			return commas >= 2
		case c == ',':
			commas++
		case c != ' ' && c != '-' && c != '+' && c != '.' && c|0x20 != 'e' && (c < '0' || c > '9'):
			return false
		}
	}
	return commas >= 2
}

// fitRecord notices recorders that write more or fewer status words than they announce: the records' numbers then do
// not count up at the announced distance, but at another that the file's size is a multiple of.
func (s *source) fitRecord(head []byte) {
	announced := s.config.rates[len(s.config.rates)-1].last
	size := s.data.bytes()
	if s.form == ASCII || announced < 4 || size < 0 || size%announced != 0 || counts(head, s.record) {
		return
	}
	length := size / announced
	shortest := recordLength(s.form, len(s.config.analogs), 0)
	if length < int64(shortest) || length > int64(shortest)+1<<16 || !counts(head, int(length)) {
		return
	}
	s.note("record-length", "", "Records are %d bytes long, where %s announces %d; they are read by their own numbers.", length, s.config.file, s.record)
	s.record = int(length)
}

// counts reports whether the numbers of the first records at the given distance count up.
func counts(head []byte, length int) bool {
	n := min(len(head)/length, 64)
	if n < 2 {
		return false
	}
	for i := 1; i < n; i++ {
		if le32(head[i*length:]) != le32(head[(i-1)*length:])+1 {
			return false
		}
	}
	return true
}

// largest bounds factors, so that no raw value becomes infinite by them.
const largest = 1e200

// chooseChannels makes channels of the analog channels of a voltage, a current or an unknown unit.
func (s *source) chooseChannels() error {
	c := s.config
	taken := map[string]bool{}
	var unknownRatio []string
	var converted ratios
	for i, a := range c.analogs {
		if table.OtherQuantity(a.unit) {
			s.note("channel-skipped", "", "Channel %d %q is not read: its unit %q is neither of voltage nor of current.", i+1, a.name, a.unit)
			continue
		}
		ch := channel{column: i}
		ch.Name = unique(taken, a.name, i+1)
		ch.Phase, ch.FileUnit = a.phase, a.unit
		base, factor, ok := wave.BaseUnit(a.unit)
		if !ok {
			factor = 1
		}
		ch.Unit = base
		if a.side == 'S' {
			if a.primary > 0 && a.secondary > 0 {
				factor *= a.primary / a.secondary
				if a.primary != a.secondary {
					converted.add(fmt.Sprintf("%g/%g", a.primary, a.secondary), ch.Name)
				}
			} else {
				unknownRatio = append(unknownRatio, ch.Name)
			}
		}
		ch.gain, ch.off = a.a*factor, a.b*factor
		if !(math.Abs(ch.gain) < largest && math.Abs(ch.off) < largest) {
			return &wave.ParseError{File: c.file, Line: a.line, Msg: fmt.Sprintf("the factors of channel %q (a = %g, b = %g, ratio %g/%g) are none of a measurement; copy the configuration again from the recorder", a.name, a.a, a.b, a.primary, a.secondary)}
		}
		ch.Skew = a.skew * 1e-6
		s.setRange(&ch, a)
		s.channels = append(s.channels, ch)
	}
	if len(s.channels) == 0 {
		return &wave.UnsupportedError{File: c.file, Msg: "no analog channel is a voltage or a current; export the waveforms"}
	}
	if len(converted.names) > 0 {
		s.note("secondary-values", "", "Values are of the secondary side of instrument transformers and are multiplied by the file's ratios: %s.", converted.text())
	}
	if len(unknownRatio) > 0 {
		s.note("ratio-missing", "", "Values are of the secondary side of instrument transformers, but the file has no ratio for %s; they are left as they are: state scale in the site sheet.", few(unknownRatio))
	}
	return nil
}

// ratios are the ratios of instrument transformers and the channels behind each, in the channels' order.
type ratios struct {
	order []string
	names map[string][]string
}

func (r *ratios) add(ratio, name string) {
	if r.names == nil {
		r.names = map[string][]string{}
	}
	if r.names[ratio] == nil {
		r.order = append(r.order, ratio)
	}
	r.names[ratio] = append(r.names[ratio], name)
}

func (r *ratios) text() string {
	var parts []string
	for _, ratio := range r.order {
		parts = append(parts, fmt.Sprintf("%s by %s", few(r.names[ratio]), ratio))
	}
	return strings.Join(parts, "; ")
}

// few lists the first names.
func few(names []string) string {
	const most = 8
	if len(names) <= most {
		return strings.Join(names, ", ")
	}
	return fmt.Sprintf("%s and %d more", strings.Join(names[:most], ", "), len(names)-most)
}

// setRange tells the size of a digitising step and the ends of the range, which min and max give as raw values.
func (s *source) setRange(ch *channel, a analog) {
	ch.missing = math.NaN()
	if s.form != Float32 {
		ch.Step = math.Abs(ch.gain)
	}
	if !(a.min < a.max) || a.max > 1e30 || a.min < -1e30 {
		ch.missing = otherMissing(s.config.edition)
		return
	}
	low, high := a.min*ch.gain+ch.off, a.max*ch.gain+ch.off
	ch.Low, ch.High = min(low, high), max(low, high)
	if m := otherMissing(s.config.edition); m > a.max {
		ch.missing = m
	}
}

// editionMissing is the raw value by which an ASCII file of an edition marks a missing sample, and otherMissing that
// of the others, which is one too where the channel's range does not reach it.
func editionMissing(edition int) float64 {
	if edition == 1991 {
		return 999999
	}
	return 99999
}

func otherMissing(edition int) float64 { return 999999 + 99999 - editionMissing(edition) }

// unique gives a channel its name, or one by its number, with a number behind a name that is taken.
func unique(taken map[string]bool, name string, number int) string {
	if name == "" {
		name = fmt.Sprintf("CH%d", number)
	}
	candidate := name
	for n := 2; taken[candidate]; n++ {
		candidate = fmt.Sprintf("%s (%d)", name, n)
	}
	taken[candidate] = true
	return candidate
}

func (s *source) makeHeader() {
	c, h := s.config, &s.header
	format := fmt.Sprintf("%s %d %s", formatName, c.edition, s.form)
	h.Files = []wave.File{{Name: filepath.Base(s.cfg), Path: s.cfg, Format: format, Reading: s.reading()}}
	if s.data.path != s.cfg {
		h.Files = append(h.Files, wave.File{Name: s.data.name(), Path: s.data.path, Format: format})
	}
	h.Nominal = c.nominal
	for _, ch := range s.channels {
		h.Channels = append(h.Channels, ch.Channel)
	}
	if c.start.set {
		zone := c.offset
		if h.HasZone = zone != nil; zone == nil {
			zone = s.opt.Location()
		}
		h.Start = c.start.in(zone)
	}
}

// reading says how the configuration was understood.
func (s *source) reading() string {
	c := s.config
	text := fmt.Sprintf("%d analog and %d status channels", len(c.analogs), c.statuses)
	if who := strings.Trim(c.station+", "+c.device, ", "); who != "" {
		text += " of " + who
	}
	if !c.stated {
		text += "; edition taken from the lines' form"
	}
	if c.encoding != "UTF-8" {
		text += "; names in " + c.encoding
	}
	return text
}

// plan makes the sections.
func (s *source) plan() error {
	c := s.config
	declared := s.opt.DeclaredRate()
	if declared < 0 || math.IsInf(declared, 0) || math.IsNaN(declared) {
		return &wave.ParseError{File: c.file, Msg: fmt.Sprintf("sampling_rate = %g in the site sheet is no rate; state samples per second", declared)}
	}
	s.header.Samples = c.rates[len(c.rates)-1].last
	s.stamps.unit = s.config.timeMult * 1e-6
	if c.start.nanos && c.edition >= 2013 {
		s.stamps.unit = s.config.timeMult * 1e-9
	}
	if s.form != ASCII {
		s.stamps.wraps = s.stamps.unit * (1 << 32)
	}
	stamped := false
	for _, r := range c.rates {
		stamped = stamped || r.hz == 0
	}
	switch {
	case declared > 0 && (stamped || len(c.rates) == 1):
		if !stamped && math.Abs(declared-c.rates[0].hz) > 1e-9*declared {
			s.note("rate-overruled", "", "%s:%d states %g samples a second; the site sheet's %g is used.", c.file, c.rates[0].line, c.rates[0].hz, declared)
		}
		s.sections = []section{{rate: declared, after: 1, last: math.MaxInt64}}
	case stamped:
		if err := s.findStretches(); err != nil {
			return err
		}
		s.header.Rate = s.stamps.runs[0].rate
		return nil
	default:
		if declared > 0 {
			s.note("rate-ignored", "", "%s has %d sampling rates; the %g Hz of the site sheet are not used.", c.file, len(c.rates), declared)
		}
		s.sections = sectionsOf(c.rates)
	}
	s.header.Rate = s.sections[0].rate
	return nil
}

// sectionsOf lays the rates out in time. Neighbours of one rate are one section, and the last goes on to the end of
// the data, however long they are.
func sectionsOf(rates []rate) []section {
	sections := []section{{rate: rates[0].hz, after: 1, last: rates[0].last}}
	for _, r := range rates[1:] {
		end := &sections[len(sections)-1]
		switch {
		case r.last <= end.last:
		case r.hz == end.rate:
			end.last = r.last
		case end.last < 1: // the sections before are empty
			sections[0] = section{rate: r.hz, after: 1, last: r.last}
		default:
			sections = append(sections, section{rate: r.hz, after: end.last, last: r.last, base: end.at(end.last)})
		}
	}
	sections[len(sections)-1].last = math.MaxInt64
	return sections
}

// checkSkew leaves out skews that are longer than a sampling interval, which no converter has.
func (s *source) checkSkew() {
	for i := range s.channels {
		ch := &s.channels[i]
		if math.Abs(ch.Skew)*s.header.Rate > 1 {
			s.note("skew-ignored", ch.Name, "The file has the channel sampled %g µs after the first, which is more than a sampling interval of %.6g µs; the skew is not used.", ch.Skew*1e6, 1e6/s.header.Rate)
			ch.Skew = 0
			s.header.Channels[i].Skew = 0
		}
	}
}

// compareLength compares the length of the data with what is announced, where the file's size tells it.
func (s *source) compareLength() error {
	size := s.data.bytes()
	switch {
	case size >= 0 && size < int64(max(1, s.record)):
		return s.noRecord()
	case s.form == ASCII || size < 0:
		return nil
	}
	announced, there := s.header.Samples, size/int64(s.record)
	s.header.Samples = there
	if text := lengthNote(s.config.file, s.data.name(), announced, there, size%int64(s.record)); text != "" {
		s.note(lengthCode(announced, there, size%int64(s.record)), "", "%s", text)
	}
	return nil
}

// lengthNote says how data of a number of records, and some bytes of another, differ from what is announced; it is
// empty when they do not.
func lengthNote(cfg, dat string, announced, there, rest int64) string {
	cut := ""
	if rest > 0 {
		cut = fmt.Sprintf(" The last %d bytes are no whole record and are left out.", rest)
	}
	switch {
	case announced > there:
		return fmt.Sprintf("%s holds %d records of the %d that %s announces: it is cut short; what is there is used.%s", dat, there, announced, cfg, cut)
	case announced > 0 && announced < there:
		return fmt.Sprintf("%s holds %d records, more than the %d that %s announces; all are used.%s", dat, there, announced, cfg, cut)
	case rest > 0:
		return dat + ":" + cut
	}
	return ""
}

func lengthCode(announced, there, rest int64) string {
	if announced > 0 && announced < there && rest == 0 {
		return "length-differs"
	}
	return "truncated"
}
