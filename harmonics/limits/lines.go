package limits

import (
	"fmt"
	"strings"
)

// lines tells the line, from 1, of each key and list element of a TOML text, by its path: "table[1].rows[0].limits[2]".
// The TOML library keeps positions to itself, so they are found again here, in a text that it has already accepted.
type lines map[string]int

type lineScanner struct {
	text   string
	i      int
	line   int
	at     lines
	counts map[string]int // entries of each [[table]] seen
}

func indexLines(text string) lines {
	s := &lineScanner{text: text, line: 1, at: lines{}, counts: map[string]int{}}
	prefix := ""
	for s.blank(); s.more(); s.blank() {
		if s.peek() == '[' {
			prefix = s.heading()
			continue
		}
		s.pair(prefix)
	}
	return s.at
}

// of returns the line of a path, or of the nearest path around it that has one.
func (l lines) of(path string) int {
	for path != "" {
		if line := l[path]; line > 0 {
			return line
		}
		path = path[:max(0, strings.LastIndexAny(path, ".["))]
	}
	return 0
}

func (s *lineScanner) more() bool { return s.i < len(s.text) }

func (s *lineScanner) peek() byte {
	if !s.more() {
		return 0
	}
	return s.text[s.i]
}

func (s *lineScanner) next() {
	if s.peek() == '\n' {
		s.line++
	}
	s.i++
}

// blank passes over spaces, line ends, commas and comments.
func (s *lineScanner) blank() {
	for s.more() {
		switch s.peek() {
		case ' ', '\t', '\r', '\n', ',':
			s.next()
		case '#':
			for s.more() && s.peek() != '\n' {
				s.next()
			}
		default:
			return
		}
	}
}

// heading reads [a.b] or [[a.b]] and returns the path that the keys below it have.
func (s *lineScanner) heading() string {
	list := strings.HasPrefix(s.text[s.i:], "[[")
	line := s.line
	for s.peek() == '[' {
		s.next()
	}
	parts := s.key(']')
	for s.peek() == ']' {
		s.next()
	}
	path := ""
	for i, part := range parts {
		path = join(path, part)
		if n := s.counts[path]; n > 0 && i < len(parts)-1 {
			path = fmt.Sprintf("%s[%d]", path, n-1)
		}
	}
	if list {
		s.counts[path]++
		path = fmt.Sprintf("%s[%d]", path, s.counts[path]-1)
	}
	s.mark(path, line)
	return path
}

// pair reads key = value.
func (s *lineScanner) pair(prefix string) {
	line := s.line
	path := prefix
	for _, part := range s.key('=') {
		path = join(path, part)
	}
	s.next() // the =
	s.mark(path, line)
	s.value(path)
}

// key reads a dotted key up to the given mark.
func (s *lineScanner) key(end byte) []string {
	var parts []string
	var part strings.Builder
	for s.more() && s.peek() != end && s.peek() != '\n' {
		switch c := s.peek(); c {
		case '.':
			parts = append(parts, strings.TrimSpace(part.String()))
			part.Reset()
			s.next()
		case '"', '\'':
			from := s.i
			s.quoted()
			part.WriteString(strings.Trim(s.text[from:s.i], `"'`))
		default:
			part.WriteByte(c)
			s.next()
		}
	}
	return append(parts, strings.TrimSpace(part.String()))
}

// value passes over a value and marks what is in it.
func (s *lineScanner) value(path string) {
	for s.peek() == ' ' || s.peek() == '\t' {
		s.next()
	}
	switch s.peek() {
	case '"', '\'':
		s.quoted()
	case '[':
		s.next()
		for n := 0; ; n++ {
			if s.blank(); !s.more() || s.peek() == ']' {
				break
			}
			at := s.i
			element := fmt.Sprintf("%s[%d]", path, n)
			s.mark(element, s.line)
			if s.value(element); s.i == at {
				s.next()
			}
		}
		s.next()
	case '{':
		s.next()
		for {
			if s.blank(); !s.more() || s.peek() == '}' {
				break
			}
			s.pair(path)
		}
		s.next()
	default:
		for s.more() && !strings.ContainsRune(",]}\n#", rune(s.peek())) {
			s.next()
		}
	}
}

// quoted passes over a text in any of TOML's four forms.
func (s *lineScanner) quoted() {
	mark := s.text[s.i : s.i+1]
	if three := strings.Repeat(mark, 3); strings.HasPrefix(s.text[s.i:], three) {
		mark = three
	}
	s.i += len(mark)
	for s.more() && !strings.HasPrefix(s.text[s.i:], mark) {
		if s.peek() == '\\' && mark[0] == '"' {
			s.next()
		}
		if s.more() {
			s.next()
		}
	}
	s.i = min(len(s.text), s.i+len(mark))
}

func (s *lineScanner) mark(path string, line int) {
	if _, twice := s.at[path]; !twice {
		s.at[path] = line
	}
}

func join(path, part string) string {
	if path == "" {
		return part
	}
	return path + "." + part
}
