package wav

import (
	"encoding/binary"
	"fmt"
	"io"
	"math"
	"strings"
	"time"

	"wavetally/harmonics/wave"
)

// Codes of formats, from the registry of WAVE form codes (RFC 2361) and Microsoft's mmreg.h, from memory.
const (
	codePCM        = 1
	codeFloat      = 3
	codeExtensible = 0xFFFE
)

// codeNames are formats that are met in files of sound and are no plain samples.
var codeNames = map[uint16]string{2: "ADPCM", 6: "A-law", 7: "µ-law", 0x11: "IMA ADPCM", 0x31: "GSM", 0x50: "MPEG", 0x55: "MP3", 0x161: "WMA", 0xF1AC: "FLAC"}

// A format is how samples are stored.
type format struct {
	channels int
	rate     uint32 // frames per second
	frame    int    // bytes
	width    int    // bytes of a sample
	bits     int    // that count, from the top
	float    bool
}

// chunks is what a file holds besides the samples.
type chunks struct {
	format   format
	formatAt int64
	dataAt   int64
	length   int64 // bytes of samples; -1: to the end of the file
	start    time.Time
}

// A chunkReader goes through a file's chunks.
type chunkReader struct {
	r      io.Reader
	name   string
	offset int64
	large  bool  // RF64 or BW64
	data64 int64 // length of the samples from ds64; -1: none
	chunks
}

func readChunks(r io.Reader, name string) (chunks, error) {
	c := &chunkReader{r: r, name: name, data64: -1}
	if err := c.opening(); err != nil {
		return chunks{}, err
	}
	for {
		done, err := c.chunk()
		if err != nil {
			return chunks{}, err
		}
		if done {
			return c.chunks, nil
		}
	}
}

func (c *chunkReader) wrong(at int64, msg string, args ...any) error {
	return &wave.ParseError{File: c.name, HasOff: true, Offset: at, Msg: fmt.Sprintf(msg, args...)}
}

func (c *chunkReader) opening() error {
	var head [12]byte
	n, err := io.ReadFull(c.r, head[:])
	if err != nil && !ended(err) {
		return readError(c.name, err)
	}
	id := string(head[:min(n, 4)])
	c.large = id == "RF64" || id == "BW64"
	switch {
	case id == "RIFX":
		return &wave.UnsupportedError{File: c.name, Msg: "it is a big-endian WAVE file (RIFX); convert it to RIFF"}
	case id != "RIFF" && !c.large || n == 12 && string(head[8:]) != "WAVE":
		return &wave.NotThisFormatError{File: c.name, Format: formatName, Msg: "it does not start with RIFF or RF64, and WAVE"}
	case n < 12:
		return c.wrong(int64(n), "the file ends within its opening; copy it again")
	}
	c.offset = 12
	return nil
}

// chunk reads one chunk. It reports true when it is at the samples.
func (c *chunkReader) chunk() (bool, error) {
	at := c.offset
	var head [8]byte
	n, err := io.ReadFull(c.r, head[:])
	c.offset += int64(n)
	switch {
	case err != nil && !ended(err):
		return false, readError(c.name, err)
	case err != nil && c.format.frame == 0:
		return false, c.wrong(c.offset, `the file ends before its "fmt " chunk; copy it again`)
	case err != nil:
		return false, c.wrong(c.offset, `the file ends before its "data" chunk; copy it again`)
	}
	length := int64(binary.LittleEndian.Uint32(head[4:]))
	switch id := string(head[:4]); {
	case id == "data":
		return true, c.samples(at, length)
	case id == "fmt " && c.format.frame == 0:
		return false, c.readFormat(at, length)
	case id == "ds64" && c.large:
		return false, c.readSizes(at, length)
	case id == "bext":
		return false, c.readStart(at, length)
	default:
		return false, c.pass(length)
	}
}

// samples is at the first sample.
func (c *chunkReader) samples(at, length int64) error {
	if c.format.frame == 0 {
		return c.wrong(at, `samples come before the "fmt " chunk that tells their form; convert the file`)
	}
	c.dataAt, c.length = c.offset, length
	switch {
	case length == math.MaxUint32 && c.data64 > 0:
		c.length = c.data64
	case length == math.MaxUint32 || length == 0:
		c.length = -1 // recorders that lose power leave it so
	}
	return nil
}

// body reads the first bytes of a chunk, at most len(p), and passes over the rest.
func (c *chunkReader) body(at, length int64, p []byte) (int, error) {
	p = p[:min(int64(len(p)), length)]
	n, err := io.ReadFull(c.r, p)
	c.offset += int64(n)
	if err != nil {
		if ended(err) {
			return n, c.wrong(at, "the file ends within this chunk; copy it again")
		}
		return n, readError(c.name, err)
	}
	return n, c.pass(length - int64(n))
}

// pass passes over the rest of a chunk and the byte that pads it. The length is not trusted: a chunk that is longer than
// the file ends it.
func (c *chunkReader) pass(length int64) error {
	if (c.offset+length)%2 == 1 {
		length++
	}
	n, err := io.CopyN(io.Discard, c.r, length)
	c.offset += n
	if err != nil && !ended(err) {
		return readError(c.name, err)
	}
	return nil
}

func (c *chunkReader) readFormat(at, length int64) error {
	var p [40]byte
	n, err := c.body(at, length, p[:])
	if err != nil {
		return err
	}
	if n < 16 {
		return c.wrong(at, `the "fmt " chunk has %d bytes, not 16 or more; convert the file`, n)
	}
	le := binary.LittleEndian
	code, bits := le.Uint16(p[:]), int(le.Uint16(p[14:]))
	f := format{channels: int(le.Uint16(p[2:])), rate: le.Uint32(p[4:]), frame: int(le.Uint16(p[12:]))}
	if code == codeExtensible && n >= 26 {
		code = le.Uint16(p[24:])
		if valid := int(le.Uint16(p[18:])); valid > 0 && valid <= bits {
			f.bits = valid
		}
	}
	f.float = code == codeFloat
	if code != codePCM && code != codeFloat {
		return &wave.UnsupportedError{File: c.name, Msg: fmt.Sprintf("its samples are stored as %s, not as PCM or floating point; convert it to PCM of 16 or 24 bits", codeName(code))}
	}
	if f.channels == 0 {
		return c.wrong(at, "the file has no channels; export it again")
	}
	if f.frame%f.channels != 0 || f.frame == 0 {
		f.frame = (bits + 7) / 8 * f.channels
	}
	f.width = f.frame / f.channels
	if f.bits == 0 {
		f.bits = bits
	}
	c.format, c.formatAt = f, at
	return c.check(at, bits)
}

func codeName(code uint16) string {
	if name := codeNames[code]; name != "" {
		return name
	}
	return fmt.Sprintf("format %#x", code)
}

// check accepts the widths that samples are read in.
func (c *chunkReader) check(at int64, bits int) error {
	f := c.format
	switch {
	case bits == 0 || bits > 64 || f.width == 0 || 8*f.width < bits:
		return c.wrong(at, "samples of %d bits cannot be stored in %d bytes; convert the file", bits, f.width)
	case f.float && f.width != 4 && f.width != 8, !f.float && f.width > 4:
		return &wave.UnsupportedError{File: c.name, Msg: fmt.Sprintf("samples of %d bytes are not read; convert the file to PCM of 16 or 24 bits", f.width)}
	}
	return nil
}

// readSizes reads the true lengths of a large file.
func (c *chunkReader) readSizes(at, length int64) error {
	var p [24]byte
	n, err := c.body(at, length, p[:])
	if err != nil {
		return err
	}
	if n >= 16 {
		if v := binary.LittleEndian.Uint64(p[8:]); v > 0 && v < math.MaxInt64 {
			c.data64 = int64(v)
		}
	}
	return nil
}

// readStart reads the date and time of a recorder's own chunk: description, originator and its reference take 256 + 32 +
// 32 bytes, the date 10 and the time 8. Times are local; what cannot be read is as good as absent.
func (c *chunkReader) readStart(at, length int64) error {
	var p [338]byte
	n, err := c.body(at, length, p[:])
	if err != nil {
		return err
	}
	if n < 338 {
		return nil
	}
	digits := strings.Map(func(r rune) rune {
		if r < '0' || r > '9' {
			return ' ' // the marks between the numbers are free
		}
		return r
	}, string(p[320:338]))
	if t, err := time.Parse("2006 01 0215 04 05", digits); err == nil && t.Year() > 1970 {
		c.start = t
	}
	return nil
}
