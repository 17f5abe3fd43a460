package loaders

import (
	"fmt"
	"iter"
	"math"

	"wavetally/harmonics/wave"
)

// A beside is a recording whose channels are in several files, read in step.
type beside struct {
	parts  []part
	header wave.Header
	notes  []wave.Note
}

const maxBeside = 64

func sideBySide(parts []part) (wave.Source, error) {
	if len(parts) > maxBeside {
		return nil, fmt.Errorf("%s: %d files begin at the same time, more than the %d that are put side by side; name those of one capture", parts[0].name, len(parts), maxBeside)
	}
	b := &beside{parts: parts, header: parts[0].header}
	b.header.Files, b.header.Channels, b.header.Notes = nil, nil, nil
	taken := map[string]bool{}
	for _, p := range parts {
		b.header.Files = append(b.header.Files, p.header.Files...)
		b.header.Notes = append(b.header.Notes, p.header.Notes...)
		for _, c := range p.header.Channels {
			c.Name = b.name(taken, p, c.Name)
			b.header.Channels = append(b.header.Channels, c)
		}
		if b.header.Samples > 0 && p.header.Samples > 0 {
			b.header.Samples = min(b.header.Samples, p.header.Samples)
		}
	}
	return b, nil
}

// name tells channels of the same name apart by what tells their files apart.
func (b *beside) name(taken map[string]bool, p part, name string) string {
	same := 0
	for _, q := range b.parts {
		for _, c := range q.header.Channels {
			if c.Name == name {
				same++
			}
		}
	}
	if same > 1 && p.marker != "" {
		if len(p.header.Channels) == 1 {
			name = p.marker
		} else {
			name = p.marker + " " + name
		}
	}
	unique := name
	for n := 2; taken[unique]; n++ {
		unique = fmt.Sprintf("%s (%d)", name, n)
	}
	taken[unique] = true
	return unique
}

func (b *beside) Header() wave.Header { return b.header }

func (b *beside) Notes() []wave.Note { return b.notes }

// A reader is one of the files, with the rest of its block at hand.
type reader struct {
	next  func() (wave.Block, error, bool)
	block wave.Block
}

// ensure gets the next block when the one at hand is used up. It reports false at the end.
func (r *reader) ensure() (bool, error) {
	if r.block.Len() > 0 {
		return true, nil
	}
	b, err, ok := r.next()
	if !ok || err != nil {
		return false, err
	}
	r.block = wave.Block{Segment: b.Segment, At: b.At, Rate: b.Rate, Data: append(r.block.Data[:0], b.Data...)}
	return true, nil
}

// use takes n samples off the block at hand.
func (r *reader) use(n int) {
	for c := range r.block.Data {
		r.block.Data[c] = r.block.Data[c][n:]
	}
	r.block.At += float64(n) / r.block.Rate
}

// Blocks reads all files in step. Samples that another file has no partner for are left out.
func (b *beside) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		b.notes = nil
		readers := make([]*reader, len(b.parts))
		for i, p := range b.parts {
			next, stop := iter.Pull2(p.Blocks())
			defer stop()
			readers[i] = &reader{next: next}
		}
		s := stepper{beside: b, readers: readers, yield: yield, out: wave.Block{Segment: -1}}
		for s.step() {
		}
	}
}

// A stepper is one reading.
type stepper struct {
	*beside
	readers []*reader
	yield   func(wave.Block, error) bool
	out     wave.Block
	end     float64 // of what has been handed over, s
	skipped int64   // samples without a partner
}

// step hands over the samples that all blocks at hand have.
func (s *stepper) step() bool {
	for i, r := range s.readers {
		ok, err := r.ensure()
		if err != nil {
			s.yield(wave.Block{}, err)
			return false
		}
		if !ok {
			s.finish(i)
			return false
		}
	}
	if s.align() {
		return true
	}
	n := math.MaxInt
	for _, r := range s.readers {
		n = min(n, r.block.Len())
	}
	first := s.readers[0].block
	if s.out.Segment < 0 || first.Rate != s.out.Rate || math.Abs(first.At-s.end) > 0.25/first.Rate {
		s.out.Segment++
	}
	s.out.At, s.out.Rate, s.out.Data = first.At, first.Rate, s.out.Data[:0]
	for _, r := range s.readers {
		for _, d := range r.block.Data {
			s.out.Data = append(s.out.Data, d[:n])
		}
	}
	s.end = first.At + float64(n)/first.Rate
	if !s.yield(s.out, nil) {
		return false
	}
	for _, r := range s.readers {
		r.use(n)
	}
	return true
}

// align drops what lies before the latest of the blocks at hand. It reports whether anything was dropped.
func (s *stepper) align() bool {
	latest := s.readers[0].block.At
	for _, r := range s.readers {
		latest = max(latest, r.block.At)
	}
	dropped := false
	for _, r := range s.readers {
		n := min(int(math.Round((latest-r.block.At)*r.block.Rate)), r.block.Len())
		if n > 0 {
			r.use(n)
			s.skipped += int64(n)
			dropped = true
		}
	}
	return dropped
}

// finish gathers the notes once the shortest file, number ended, is read to its end.
func (s *stepper) finish(ended int) {
	longer := 0
	for i, r := range s.readers {
		for i != ended { // read on, so that each file's notes are complete
			ok, err := r.ensure()
			if err != nil {
				s.yield(wave.Block{}, err)
				return
			}
			if !ok {
				break
			}
			longer = max(longer, r.block.Len())
			r.use(r.block.Len())
		}
	}
	for _, p := range s.parts {
		s.notes = append(s.notes, inFile(p)...)
	}
	if longer > 1 {
		s.notes = append(s.notes, wave.Note{Code: "different-lengths", Text: fmt.Sprintf("The files of one capture differ in length; all are read as far as the shortest, %s.", s.parts[ended].name)})
	}
	if s.skipped > 0 {
		s.notes = append(s.notes, wave.Note{Code: "samples-without-partner", Text: fmt.Sprintf("%d samples of single files are left out because another file of the capture has none at their time.", s.skipped)})
	}
}

// inFile names the file in a part's notes.
func inFile(p part) []wave.Note {
	var notes []wave.Note
	for _, n := range p.Notes() {
		n.Text = p.name + ": " + n.Text
		notes = append(notes, n)
	}
	return notes
}
