package table

import (
	"bytes"
	"fmt"
	"io"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/ianaindex"
	"golang.org/x/text/encoding/unicode"
	"golang.org/x/text/encoding/unicode/utf32"
)

// An Encoding is how a file's bytes stand for characters.
type Encoding struct {
	Name string
	// Decode turns the whole file into UTF-8; nil when every byte below 0x80 is the ASCII character already, so that
	// rows of numbers need no decoding and only a header's text does.
	Decode encoding.Encoding
	// Text decodes header text when Decode is nil; nil for UTF-8.
	Text encoding.Encoding
}

// EncodingOf finds the encoding of a file that starts with head, from its byte order mark, from where its NUL bytes
// lie, and from whether it is valid UTF-8. A declared name that is not empty overrules all of that.
func EncodingOf(head []byte, declared string) (Encoding, error) {
	name := strings.ToLower(strings.TrimSpace(declared))
	switch name {
	case "":
		return sniffEncoding(head), nil
	case "utf-8", "utf8":
		return Encoding{Name: "UTF-8"}, nil
	case "utf-16", "utf16", "utf-16le", "utf-16be":
		if e := sniffEncoding(head); strings.HasPrefix(e.Name, "UTF-16") && len(name) < 8 {
			return e, nil
		}
		return utf16(strings.HasSuffix(name, "be")), nil
	case "windows-1252", "cp1252":
		return Encoding{Name: "Windows-1252", Text: charmap.Windows1252}, nil
	}
	e, err := ianaindex.IANA.Encoding(name)
	if err != nil || e == nil {
		return Encoding{}, fmt.Errorf("encoding %q is not known; use an IANA name such as utf-8, utf-16, windows-1252, iso-8859-1, gb18030", declared)
	}
	return Encoding{Name: name, Decode: e}, nil
}

func utf16(bigEndian bool) Encoding {
	if bigEndian {
		return Encoding{Name: "UTF-16 big-endian", Decode: unicode.UTF16(unicode.BigEndian, unicode.UseBOM)}
	}
	return Encoding{Name: "UTF-16 little-endian", Decode: unicode.UTF16(unicode.LittleEndian, unicode.UseBOM)}
}

func sniffEncoding(head []byte) Encoding {
	switch {
	case bytes.HasPrefix(head, []byte{0xEF, 0xBB, 0xBF}):
		return Encoding{Name: "UTF-8 with byte order mark"}
	case bytes.HasPrefix(head, []byte{0xFF, 0xFE, 0, 0}):
		return Encoding{Name: "UTF-32", Decode: utf32.UTF32(utf32.LittleEndian, utf32.ExpectBOM)}
	case bytes.HasPrefix(head, []byte{0xFF, 0xFE}):
		return utf16(false)
	case bytes.HasPrefix(head, []byte{0xFE, 0xFF}):
		return utf16(true)
	}
	if even, odd := nulShares(head); odd > 0.4 && even < 0.1 {
		return utf16(false)
	} else if even > 0.4 && odd < 0.1 {
		return utf16(true)
	}
	if validUTF8(head) {
		return Encoding{Name: "UTF-8"}
	}
	return Encoding{Name: "Windows-1252", Text: charmap.Windows1252}
}

// nulShares returns the shares of NUL among the bytes at even and at odd places: text in UTF-16 has them on one side.
func nulShares(head []byte) (even, odd float64) {
	head = head[:min(len(head), 4096)&^1]
	if len(head) == 0 {
		return 0, 0
	}
	var n [2]int
	for i, c := range head {
		if c == 0 {
			n[i&1]++
		}
	}
	half := float64(len(head) / 2)
	return float64(n[0]) / half, float64(n[1]) / half
}

// validUTF8 forgives a character that the end of head cuts through.
func validUTF8(head []byte) bool {
	for cut := 0; cut < utf8.UTFMax && cut < len(head); cut++ {
		if utf8.Valid(head[:len(head)-cut]) {
			return true
		}
	}
	return len(head) == 0
}

// Reader returns what r holds with the encoding undone as far as rows of numbers need it, and without a byte order mark.
func (e Encoding) Reader(r io.Reader) io.Reader {
	if e.Decode != nil {
		return e.Decode.NewDecoder().Reader(r)
	}
	return &bomSkipper{r: r}
}

// String decodes header text read through Reader.
func (e Encoding) String(b []byte) string {
	if e.Text == nil || validASCII(b) {
		return strings.ToValidUTF8(string(b), "\uFFFD")
	}
	s, err := e.Text.NewDecoder().Bytes(b)
	if err != nil {
		return strings.ToValidUTF8(string(b), "\uFFFD")
	}
	return string(s)
}

func validASCII(b []byte) bool {
	for _, c := range b {
		if c >= 0x80 {
			return false
		}
	}
	return true
}

// bomSkipper drops a UTF-8 byte order mark.
type bomSkipper struct {
	r     io.Reader
	begun bool
}

func (s *bomSkipper) Read(p []byte) (int, error) {
	if s.begun {
		return s.r.Read(p)
	}
	s.begun = true
	var first [3]byte
	n, err := io.ReadFull(s.r, first[:])
	switch {
	case err != nil && err != io.EOF && err != io.ErrUnexpectedEOF:
		return 0, err
	case n == 3 && first == [3]byte{0xEF, 0xBB, 0xBF}:
		return s.r.Read(p)
	}
	s.r = io.MultiReader(bytes.NewReader(first[:n]), s.r)
	return s.r.Read(p)
}
