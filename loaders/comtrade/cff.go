package comtrade

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"

	"wavetally/harmonics/wave"
)

// separator is the line before each part of a .cff file; blanks may be missing.
var separator = regexp.MustCompile(`(?i)^\s*-{2,}\s*file\s*type\s*:\s*(CFG|INF|HDR|DAT)\s*(ASCII|BINARY32|BINARY|FLOAT32)?\s*(?::\s*(\d+))?\s*-{2,}\s*$`)

// combined reports whether a file starts as a .cff.
func combined(head []byte) bool {
	for line := range strings.Lines(string(head)) {
		if line = strings.TrimSpace(strings.TrimPrefix(line, "\uFEFF")); line != "" {
			return separator.MatchString(line)
		}
	}
	return false
}

// readCombined finds the parts of a .cff file.
func (s *source) readCombined(path string) error {
	s.cfg = path
	f, err := s.opt.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	p := &parts{source: s, r: bufio.NewReaderSize(f, 1<<16), name: filepath.Base(path)}
	if err := p.find(); err != nil {
		return err
	}
	switch {
	case p.cfgLine == 0:
		return &wave.ParseError{File: p.name, Msg: `it has no part "--- file type: CFG ---"; export the recording again`}
	case s.data.path == "":
		return &wave.ParseError{File: p.name, Msg: `it has no part "--- file type: DAT … ---"; export the recording again`}
	}
	if s.config, err = parseConfig(p.cfg, p.name, p.cfgLine, s.opt); err != nil {
		return err
	}
	if s.data.form == "" {
		s.data.form = s.config.form
	}
	return s.statData()
}

// parts goes through a .cff file.
type parts struct {
	*source
	r      *bufio.Reader
	name   string
	offset int64
	line   int

	part    string
	cfg     []byte
	cfgLine int // number of the configuration's first line
}

// find goes on until both parts are found, or the file ends.
func (p *parts) find() error {
	for p.cfgLine == 0 || p.data.path == "" || p.part == "CFG" {
		line, err := p.next()
		if err != nil && line == "" {
			if ended(err) {
				return nil
			}
			return err
		}
		if err := p.take(line); err != nil {
			return err
		}
	}
	return nil
}

var errEndlessLine = errors.New("the line is longer than 64 KiB")

// next reads a line, with its end.
func (p *parts) next() (string, error) {
	line, err := p.r.ReadSlice('\n')
	p.offset += int64(len(line))
	p.line++
	if errors.Is(err, bufio.ErrBufferFull) {
		return "", &wave.ParseError{File: p.name, Line: p.line, Err: errEndlessLine,
			Msg: "the line is longer than 64 KiB; the file is damaged, or its data come before their length is told: export it again"}
	}
	if err != nil && !ended(err) {
		return "", readError(p.name, err)
	}
	return string(line), err
}

func (p *parts) take(line string) error {
	m := separator.FindStringSubmatch(strings.TrimPrefix(strings.TrimRight(line, "\r\n"), "\uFEFF"))
	if m == nil {
		if p.part == "CFG" {
			if p.cfg = append(p.cfg, line...); len(p.cfg) > maxConfig {
				return &wave.UnsupportedError{File: p.name, Line: p.line, Msg: "the configuration is larger than 16 MB; it is damaged: export the recording again"}
			}
		}
		return nil
	}
	p.part = strings.ToUpper(m[1])
	switch {
	case p.part == "CFG" && p.cfgLine == 0:
		p.cfgLine = p.line + 1
	case p.part == "DAT" && p.data.path == "":
		return p.takeData(strings.ToUpper(m[2]), m[3])
	}
	return nil
}

// takeData notes where the data are, and skips binary data where the configuration is still to come.
func (p *parts) takeData(form, length string) error {
	p.data = dataFile{path: p.source.cfg, offset: p.offset, line: p.line, length: -1, form: form}
	if length != "" {
		n, err := strconv.ParseInt(length, 10, 64)
		if err != nil {
			return &wave.ParseError{File: p.name, Line: p.line, Msg: fmt.Sprintf("%s is no number of bytes; export the recording again", length)}
		}
		if p.data.length = n; n == 0 {
			p.data.length = -1 // recorders exist that leave it at 0
		}
	}
	if p.cfgLine > 0 || form == ASCII {
		return nil
	}
	if p.data.length < 0 {
		return &wave.ParseError{File: p.name, Line: p.line, Msg: "binary data of untold length come before the configuration; export the recording again, or as .cfg and .dat"}
	}
	n, err := io.CopyN(io.Discard, p.r, p.data.length)
	p.offset += n
	if err != nil && !ended(err) {
		return readError(p.name, err)
	}
	return nil
}
