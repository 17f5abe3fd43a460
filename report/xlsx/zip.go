package xlsx

import (
	"archive/zip"
	"bytes"
	"cmp"
	"compress/flate"
	"fmt"
	"hash"
	"hash/crc32"
	"io"
	"io/fs"
	"regexp"
	"slices"
	"strings"
	"sync"
)

// A packer writes the parts of a workbook as a zip archive: compressed side by side, in the order of their names, and
// without times, so that the same parts give the same bytes. (The library hands over the sheets it streamed in the
// order of a map.)
type packer struct {
	w      io.Writer
	bodies map[string]func(io.Writer) error // rows that are written while their part is compressed, by the part's name
	parts  []*part
	work   sync.WaitGroup
}

type part struct {
	name   string
	body   func(io.Writer) error
	raw    bytes.Buffer
	packed bytes.Buffer
	size   int64
	sum    hash.Hash32
	err    error
}

func (p *packer) Create(name string) (io.Writer, error) {
	p.finish()
	p.parts = append(p.parts, &part{name: name, body: p.bodies[name], sum: crc32.NewIEEE()})
	return &p.parts[len(p.parts)-1].raw, nil
}

// finish starts to compress the part that was written last; the next one may be written meanwhile.
func (p *packer) finish() {
	if len(p.parts) == 0 {
		return
	}
	last := p.parts[len(p.parts)-1]
	p.work.Go(last.pack)
}

// defaults are the content types by file name extension.
var defaults = regexp.MustCompile(`(?:<Default [^>]*></Default>)+`)

// settle puts what the library writes in the order of a map into one order.
func (t *part) settle() {
	if t.name != contentTypes {
		return
	}
	const end = "</Default>"
	sorted := defaults.ReplaceAllFunc(t.raw.Bytes(), func(run []byte) []byte {
		each := strings.SplitAfter(string(run), end)
		slices.Sort(each)
		return []byte(strings.Join(each, ""))
	})
	t.raw = *bytes.NewBuffer(sorted)
}

// pack compresses at the fastest level: a week's series are 10 % larger than at the best, in a third of the time.
func (t *part) pack() {
	t.settle()
	z, err := flate.NewWriter(&t.packed, flate.BestSpeed)
	if err != nil {
		t.err = err
		return
	}
	t.err = cmp.Or(t.write(io.MultiWriter(z, t.sum, (*counter)(&t.size))), z.Close())
	t.raw = bytes.Buffer{}
}

// write writes the part, with its body behind the rows that it has.
func (t *part) write(w io.Writer) error {
	raw, rest := t.raw.Bytes(), []byte(nil)
	if t.body != nil {
		end := bytes.LastIndex(raw, []byte("</sheetData>"))
		if end < 0 {
			return fmt.Errorf("%s has no rows to add to", t.name)
		}
		raw, rest = raw[:end], raw[end:]
	}
	if _, err := w.Write(raw); err != nil {
		return err
	}
	if t.body != nil {
		if err := t.body(w); err != nil {
			return err
		}
	}
	_, err := w.Write(rest)
	return err
}

// A counter counts what is written to it.
type counter int64

func (c *counter) Write(p []byte) (int, error) {
	*c += counter(len(p))
	return len(p), nil
}

func (p *packer) Close() error {
	p.finish()
	p.work.Wait()
	slices.SortFunc(p.parts, func(a, b *part) int { return cmp.Compare(rank(a.name), rank(b.name)) })
	z := zip.NewWriter(p.w)
	for _, t := range p.parts {
		if t.err != nil {
			return t.err
		}
		w, err := z.CreateRaw(&zip.FileHeader{Name: t.name, Method: zip.Deflate, CRC32: t.sum.Sum32(),
			CompressedSize64: uint64(t.packed.Len()), UncompressedSize64: uint64(t.size)})
		if err != nil {
			return err
		}
		if _, err := w.Write(t.packed.Bytes()); err != nil {
			return err
		}
	}
	return z.Close()
}

const contentTypes = "[Content_Types].xml"

// rank sorts the list of types first, where programs that sniff files look for it.
func rank(name string) string {
	if name == contentTypes {
		return ""
	}
	return name
}

// AddFS is part of the library's interface, which never calls it here.
func (p *packer) AddFS(fs.FS) error { return fs.ErrInvalid }
