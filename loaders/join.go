package loaders

import (
	"fmt"
	"iter"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics/wave"
)

// A joined recording is in several files, one after the other.
type joined struct {
	parts   []part
	offsets []float64 // [part] s after the first part; NaN: not known
	order   [][]int   // [part][channel] its place in the part's own blocks
	unknown bool      // the parts do not say when they begin
	header  wave.Header
	notes   []wave.Note
}

// add appends a part, which must have the channels of the first.
func (j *joined) add(p part) error {
	if len(j.parts) == 0 {
		j.header = p.header
		j.header.Files, j.header.Notes = nil, nil
	}
	order, err := j.match(p)
	if err != nil {
		return err
	}
	j.parts = append(j.parts, p)
	j.order = append(j.order, order)
	j.header.Files = append(j.header.Files, p.header.Files...)
	for _, n := range p.header.Notes {
		n.Text = p.name + ": " + n.Text
		j.header.Notes = append(j.header.Notes, n)
	}
	j.header.HasZone = j.header.HasZone && p.header.HasZone
	return nil
}

// match finds the first part's channels in p, by their names.
func (j *joined) match(p part) ([]int, error) {
	want := j.header.Channels
	order := make([]int, len(want))
	for i, c := range want {
		order[i] = slices.IndexFunc(p.header.Channels, func(d wave.Channel) bool { return d.Name == c.Name })
		if order[i] < 0 || len(p.header.Channels) != len(want) {
			return nil, fmt.Errorf("%s: its channels are %s, those of %s are %s; name files of one recorder setting together",
				p.name, channelNames(p.header), j.parts[0].name, channelNames(j.header))
		}
		if d := p.header.Channels[order[i]]; d.Unit != c.Unit {
			return nil, fmt.Errorf("%s: channel %q is in %q, in %s it is in %q; name files of one recorder setting together",
				p.name, c.Name, d.FileUnit, j.parts[0].name, c.FileUnit)
		}
	}
	return order, nil
}

func channelNames(h wave.Header) string {
	var names []string
	for i, c := range h.Channels {
		if i == 12 {
			return strings.Join(names, ", ") + ", …"
		}
		names = append(names, c.Name)
	}
	return strings.Join(names, ", ")
}

// finish completes the header once all parts are there.
func (j *joined) finish() {
	j.header.Samples = 0
	total := int64(0)
	for _, p := range j.parts {
		if p.header.Samples == 0 {
			total = -1
			break
		}
		total += p.header.Samples
	}
	j.header.Samples = max(0, total)
	if j.unknown {
		j.header.Notes = append(j.header.Notes, wave.Note{Code: "order-assumed", Text: fmt.Sprintf(
			"The %d files do not say when they begin; they are taken one after the other in the order of their names, from %s to %s.",
			len(j.parts), j.parts[0].name, j.parts[len(j.parts)-1].name)})
	}
}

func (j *joined) Header() wave.Header { return j.header }

func (j *joined) Notes() []wave.Note { return j.notes }

// Blocks reads one part after the other.
func (j *joined) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		s := seam{joined: j, yield: yield}
		s.out.Segment = -1
		s.notes = nil
		for i := range j.parts {
			if !s.part(i) {
				return
			}
		}
		s.tell()
	}
}

// A seam is one reading of a joined recording.
type seam struct {
	*joined
	yield func(wave.Block, error) bool
	out   wave.Block
	end   float64 // of what has been handed over, s

	gaps, overlaps  int
	lost, twice     float64 // s
	gapAt, overlap1 string  // file before which the first was found
	longest         float64 // s, of a part
}

func (s *seam) part(i int) bool {
	p, shift := s.parts[i], s.offsets[i]
	if math.IsNaN(shift) {
		shift = s.end
	}
	segment, begin := -1, s.end
	for b, err := range p.Blocks() {
		if err != nil {
			s.yield(wave.Block{}, err)
			return false
		}
		if segment < 0 {
			shift = s.meet(i, shift, b)
			begin = b.At + shift
		} else if b.Segment != segment {
			s.out.Segment++
		}
		at := b.At + shift
		segment = b.Segment
		if !s.hand(i, b, at) {
			return false
		}
	}
	s.longest = max(s.longest, s.end-begin)
	s.notes = append(s.notes, inFile(p)...)
	return true
}

// meet decides whether a part's first block follows on the part before, and returns the part's shift, corrected by
// less than a sample where it does.
func (s *seam) meet(i int, shift float64, b wave.Block) float64 {
	off := b.At + shift - s.end
	switch {
	case i == 0:
	case math.Abs(off) <= 0.5/b.Rate && b.Rate == s.out.Rate && !math.IsNaN(s.offsets[i]):
		return shift - off
	case math.IsNaN(s.offsets[i]):
	case off > 0:
		if s.gaps == 0 {
			s.gapAt = s.parts[i].name
		}
		s.gaps++
		s.lost += off
	default:
		if s.overlaps == 0 {
			s.overlap1 = s.parts[i].name
		}
		s.overlaps++
		s.twice -= off
	}
	s.out.Segment++
	return shift
}

// hand hands a block over, less the samples whose time has been handed over already.
func (s *seam) hand(i int, b wave.Block, at float64) bool {
	skip := 0
	if before := (s.end - at) * b.Rate; before > 0.5 {
		skip = min(int(math.Ceil(before-0.01)), b.Len())
	}
	if skip == b.Len() {
		return true
	}
	s.out.At, s.out.Rate, s.out.Data = at+float64(skip)/b.Rate, b.Rate, s.out.Data[:0]
	for _, c := range s.order[i] {
		s.out.Data = append(s.out.Data, b.Data[c][skip:])
	}
	s.end = s.out.At + float64(s.out.Len())/b.Rate
	return s.yield(s.out, nil)
}

// tell notes how the parts fitted.
func (s *seam) tell() {
	add := func(code, text string, args ...any) {
		s.notes = append(s.notes, wave.Note{Code: code, Text: fmt.Sprintf(text, args...)})
	}
	const short = 3 // s; a recorder's snapshots are of a few cycles up to a few seconds
	if s.gaps > 0 && s.longest <= short && s.lost > s.longest*float64(s.gaps) {
		add("snapshot-series", "The files are %d snapshots of at most %.3g s each over %.6g s; what happened between them is not known.", len(s.parts), s.longest, s.end)
	} else if s.gaps > 0 {
		add("gap", "Between files %d %s missing, %.6g s in all, the first before %s.", s.gaps, plural(s.gaps, "stretch is", "stretches are"), s.lost, s.gapAt)
	}
	if s.overlaps > 0 {
		add("overlap", "%d %s before the one ahead of it ends, by %.6g s in all, the first being %s; what is there twice is used once.", s.overlaps, plural(s.overlaps, "file begins", "files begin"), s.twice, s.overlap1)
	}
}

func plural(n int, one, many string) string {
	if n == 1 {
		return one
	}
	return many
}
