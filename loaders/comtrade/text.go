package comtrade

import (
	"bytes"
	"io"
	"strings"
	"unicode/utf8"

	"golang.org/x/text/encoding"
	"golang.org/x/text/encoding/charmap"
	"golang.org/x/text/encoding/ianaindex"
	"golang.org/x/text/encoding/simplifiedchinese"
	"golang.org/x/text/encoding/unicode"

	"wavetally/harmonics/wave"
)

// maxConfig bounds a configuration: 4096 analog and 65 536 status channels take less.
const maxConfig = 16 << 20

// readText reads a configuration's bytes.
func readText(r io.Reader, name string) ([]byte, error) {
	text, err := io.ReadAll(io.LimitReader(r, maxConfig+1))
	if err != nil && !ended(err) {
		return nil, readError(name, err)
	}
	if len(text) > maxConfig {
		return nil, &wave.UnsupportedError{File: name, Msg: "the configuration is larger than 16 MB; it is damaged: export the recording again"}
	}
	return text, nil
}

// decode turns a configuration into UTF-8. The format did not fix an encoding before 2013, so recorders write that of
// the country they were made for; a name declared in the site sheet settles it.
func decode(text []byte, declared string) (decoded string, name string) {
	if e, err := ianaindex.IANA.Encoding(declared); declared != "" && err == nil && e != nil {
		return decodeWith(e, text), declared
	}
	switch {
	case bytes.HasPrefix(text, []byte{0xFF, 0xFE}), bytes.HasPrefix(text, []byte{0xFE, 0xFF}):
		return decodeWith(unicode.UTF16(unicode.LittleEndian, unicode.UseBOM), text), "UTF-16"
	case utf8.Valid(text):
		return strings.TrimPrefix(string(text), "\uFEFF"), "UTF-8"
	}
	e := guessEncoding(text)
	return decodeWith(e.encoding, text), e.name
}

func decodeWith(e encoding.Encoding, text []byte) string {
	decoded, err := e.NewDecoder().Bytes(text)
	if err != nil {
		return strings.ToValidUTF8(string(text), "\uFFFD")
	}
	return string(decoded)
}

type namedEncoding struct {
	name     string
	encoding encoding.Encoding
}

// guessEncoding tells apart the encodings met in recordings by which of the bytes above 0x7F they use.
func guessEncoding(text []byte) namedEncoding {
	h := countHigh(text)
	switch {
	// Chinese text is pairs of high bytes, and what is common in it has a first byte of 0xB0 to 0xD7 (the first level
	// of GB 2312), or of 0xA1 to 0xA9 for marks.
	case h.pairs > 0 && float64(h.commonPairs) >= 0.7*float64(h.pairs) && 2*h.pairs >= h.bytes*9/10:
		return namedEncoding{"GB18030", simplifiedchinese.GB18030}
	// Russian in DOS: capitals at 0x80, small letters at 0xA0 and 0xE0, in words of several letters. Western European
	// languages have their accents there alone.
	case h.dosCyrillic >= h.bytes*95/100 && h.belowB0 >= h.bytes*3/10 && h.bytes >= 2*h.runs:
		return namedEncoding{"CP866", charmap.CodePage866}
	case h.below80to9F > h.bytes/2:
		return namedEncoding{"CP850", charmap.CodePage850}
	case h.fromC0 >= h.bytes*95/100 && h.bytes >= 3*h.runs:
		return namedEncoding{"Windows-1251", charmap.Windows1251}
	}
	return namedEncoding{"ISO 8859-1", charmap.Windows1252} // which has it in it
}

// highBytes counts the bytes above 0x7F of a text.
type highBytes struct {
	bytes, runs        int
	pairs, commonPairs int // as GB 18030 reads them
	dosCyrillic        int // letters of CP866
	belowB0            int // 0x80 to 0xAF
	below80to9F        int // 0x80 to 0x9F
	fromC0             int // 0xC0 to 0xFF
}

func countHigh(text []byte) (h highBytes) {
	for i := 0; i < len(text); {
		if text[i] < 0x80 {
			i++
			continue
		}
		start := i
		for i < len(text) && text[i] >= 0x80 {
			h.add(text[i])
			i++
		}
		h.runs++
		for j := start; j+1 < i; j += 2 {
			h.pairs++
			if a, b := text[j], text[j+1]; b >= 0xA1 && (a >= 0xB0 && a <= 0xD7 || a >= 0xA1 && a <= 0xA9) {
				h.commonPairs++
			}
		}
	}
	return h
}

func (h *highBytes) add(c byte) {
	h.bytes++
	if c <= 0xAF || c >= 0xE0 && c <= 0xF1 {
		h.dosCyrillic++
	}
	if c <= 0xAF {
		h.belowB0++
	}
	if c <= 0x9F {
		h.below80to9F++
	}
	if c >= 0xC0 {
		h.fromC0++
	}
}
