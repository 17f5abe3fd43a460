// Package comtrade reads and writes COMTRADE recordings: IEEE C37.111-1991, -1999 and -2013, of which IEC 60255-24
// editions 1 and 2 have the text of the last two.
//
// A recording is a configuration (.cfg, text) and data (.dat), or both in one file (.cff):
//
//	station,recorder,2013              rec.cfg: names and edition
//	3,2A,1D                            channels in all, analog, status
//	1,UL1,A,,V,0.0125,0,0,-32767,32767,1,1,P
//	2,IL1,A,,A,0.01,0,0,-32767,32767,1,1,P
//	1,breaker,,,0
//	50                                 nominal frequency
//	1                                  number of sampling rates
//	12800,25600                        samples per second, and the last sample taken at that rate
//	01/03/2026,00:00:00.000000         of the first sample: day/month/year, in 1991 month/day/year
//	01/03/2026,00:00:01.000000         of the trigger
//	BINARY                             ASCII, BINARY, BINARY32 or FLOAT32
//	1                                  factor of the time stamps in the data
//	0,0                                offset of these times to UTC, and of local time
//	0,0                                quality of the clock, leap second
//
// Each record of the data is a sample number, a time stamp in µs, the analog values x and the status bits. A sample is
// a·x+b in the channel's unit, brought to the primary side of the instrument transformers and to V or A. Status
// channels are skipped, and so are analog channels of another unit.
//
// Record n of section i, which ends with record e(i) and has the rate r(i), is at
// t(n) = t(e(i-1)) + (n - e(i-1))/r(i), t(1) = 0: the step into a section takes that section's interval. Each section
// is a segment of the recording. A recording without rates is timed by its stamps.
package comtrade

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"path/filepath"
	"strings"
	"time"

	"wavetally/harmonics/wave"
	"wavetally/loaders/input"
)

// formatName is what errors and headers call the format.
const formatName = "COMTRADE"

// The forms of the data.
const (
	ASCII    = "ASCII"
	Binary   = "BINARY"
	Binary32 = "BINARY32"
	Float32  = "FLOAT32"
)

// Open reads a recording, named by its .cfg, .dat or .cff file. The error is a [*wave.NotThisFormatError] when the file
// is none of these, else a [*wave.ParseError] or [*wave.UnsupportedError] that says what to do.
func Open(path string, opt input.Options) (wave.Source, error) {
	s := &source{opt: opt}
	if err := s.locate(path); err != nil {
		return nil, err
	}
	if err := s.prepare(); err != nil {
		return nil, err
	}
	return s, nil
}

// A source is an opened recording. Everything but notes is fixed by Open.
type source struct {
	opt    input.Options
	config *config
	cfg    string   // path of the configuration, which is the .cff where there is one
	data   dataFile // where the records are

	form     string
	record   int // bytes of a binary record
	channels []channel
	sections []section
	stamps   stampScale
	header   wave.Header
	notes    []wave.Note
}

// A dataFile tells where the records lie.
type dataFile struct {
	path    string
	offset  int64
	line    int   // of the .cff, before the first record; 0 in a .dat
	length  int64 // bytes; -1: to the end of the file
	form    string
	size    int64 // of the file; -1 when it is packed
	changed time.Time
}

func (d dataFile) name() string { return filepath.Base(d.path) }

// bytes is the length of the records, and -1 when only reading would tell.
func (d dataFile) bytes() int64 {
	switch {
	case d.size < 0:
		return d.length
	case d.length >= 0 && d.length < d.size-d.offset:
		return d.length
	}
	return max(0, d.size-d.offset)
}

func (s *source) Header() wave.Header { return s.header }

func (s *source) Notes() []wave.Note { return s.notes }

func (s *source) note(code, channel, text string, args ...any) {
	s.header.Notes = append(s.header.Notes, wave.Note{Code: code, Channel: channel, Text: fmt.Sprintf(text, args...)})
}

// locate finds the configuration and the data that belong to path.
func (s *source) locate(path string) error {
	head, err := s.peek(path)
	if err != nil {
		return err
	}
	name := filepath.Base(path)
	notThis := func(why string) error {
		return &wave.NotThisFormatError{File: name, Format: formatName, Msg: why}
	}
	switch {
	case combined(head):
		return s.readCombined(path)
	case looksLikeConfig(head):
		return s.readPair(path)
	case !strings.EqualFold(filepath.Ext(path), ".dat"):
		if strings.EqualFold(filepath.Ext(path), ".cfg") {
			return notThis("its second line does not tell the number of channels, as in 4,4A,0D")
		}
		return notThis("it is neither a configuration (.cfg, .cff) nor the data beside one (.dat)")
	}
	cfg, ok := s.companion(path, ".cfg")
	if !ok {
		return notThis("no .cfg of the same name is beside it")
	}
	if head, err = s.peek(cfg); err != nil {
		return err
	}
	if !looksLikeConfig(head) {
		return notThis("the .cfg beside it is none of COMTRADE")
	}
	return s.readPair(cfg)
}

// peek returns the first bytes of a file.
func (s *source) peek(path string) ([]byte, error) {
	f, err := s.opt.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return nil, &wave.NotThisFormatError{File: filepath.Base(path), Format: formatName, Msg: "it is a folder"}
	}
	head := make([]byte, 8192)
	n, err := io.ReadFull(f, head)
	if err != nil && !ended(err) {
		return nil, readError(filepath.Base(path), err)
	}
	return head[:n], nil
}

// ended reports whether err says that a file is at its end, packed files cut short included.
func ended(err error) bool {
	return err == io.EOF || err == io.ErrUnexpectedEOF || errors.Is(err, input.ErrCut)
}

func readError(name string, err error) error {
	var p *fs.PathError
	if errors.As(err, &p) {
		err = p.Err
	}
	return fmt.Errorf("%s: it cannot be read: %w", name, err)
}

// readPair reads a configuration, and finds the data beside it.
func (s *source) readPair(cfg string) error {
	s.cfg = cfg
	f, err := s.opt.Open(cfg)
	if err != nil {
		return err
	}
	defer f.Close()
	text, err := readText(f, filepath.Base(cfg))
	if err != nil {
		return err
	}
	if s.config, err = parseConfig(text, filepath.Base(cfg), 1, s.opt); err != nil {
		return err
	}
	dat, ok := s.companion(cfg, ".dat")
	if !ok {
		stem := strings.TrimSuffix(filepath.Base(cfg), filepath.Ext(cfg))
		return &wave.ParseError{File: filepath.Base(cfg), Msg: fmt.Sprintf("its data file %s.dat is not beside it; copy both into one folder", stem)}
	}
	s.data = dataFile{path: dat, length: -1, form: s.config.form}
	return s.statData()
}

// statData learns the data's size, so that a file that changes while it is read is noticed.
func (s *source) statData() error {
	f, err := s.opt.Open(s.data.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	if info.IsDir() {
		return &wave.ParseError{File: s.data.name(), Msg: "the data file is a folder; copy the recording again"}
	}
	s.data.size, s.data.changed = info.Size(), info.ModTime()
	return nil
}

// unchanged makes sure that the data are still those that were opened.
func (s *source) unchanged() error {
	f, err := s.opt.Open(s.data.path)
	if err != nil {
		return err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return err
	}
	if info.Size() != s.data.size || !info.ModTime().Equal(s.data.changed) {
		return &wave.ParseError{File: s.data.name(), Msg: "the file changed while it was read; wait until it is complete, or copy it, and run again"}
	}
	return nil
}

// companion finds the file beside path that has the same stem and the extension ext, in any letter case. The same case
// is preferred.
func (s *source) companion(path, ext string) (string, bool) {
	base := filepath.Base(path)
	stem, own := strings.TrimSuffix(base, filepath.Ext(base)), filepath.Ext(base)
	if own == strings.ToUpper(own) {
		ext = strings.ToUpper(ext)
	}
	entries, err := s.opt.ReadDir(filepath.Dir(path))
	if err != nil {
		return "", false
	}
	found, best := "", -1
	for _, e := range entries {
		name := e.Name()
		if !strings.EqualFold(name, stem+ext) || name == base {
			continue
		}
		rank := 0
		if strings.HasPrefix(name, stem) {
			rank += 2
		}
		if strings.HasSuffix(name, ext) {
			rank++
		}
		if rank > best {
			found, best = name, rank
		}
	}
	return path[:len(path)-len(base)] + found, found != ""
}
