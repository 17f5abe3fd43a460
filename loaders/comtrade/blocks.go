package comtrade

import (
	"io"
	"iter"
	"math"

	"wavetally/harmonics/wave"
)

// openData opens the data at their first record.
func (s *source) openData() (io.Reader, io.Closer, error) {
	f, err := s.opt.Open(s.data.path)
	if err != nil {
		return nil, nil, err
	}
	if s.data.offset > 0 {
		if err := skip(f, s.data.offset); err != nil {
			f.Close()
			return nil, nil, readError(s.data.name(), err)
		}
	}
	if s.data.length >= 0 {
		return io.LimitReader(f, s.data.length), f, nil
	}
	return f, f, nil
}

func skip(r io.Reader, n int64) error {
	if seeker, ok := r.(io.Seeker); ok {
		_, err := seeker.Seek(n, io.SeekStart)
		return err
	}
	_, err := io.CopyN(io.Discard, r, n)
	return err
}

// records opens the data for reading records.
func (s *source) records() (recordReader, io.Closer, error) {
	r, closer, err := s.openData()
	if err != nil {
		return nil, nil, err
	}
	if s.form == ASCII {
		return newASCIIReader(r, s, s.data.line+1), closer, nil
	}
	return newBinaryReader(r, s), closer, nil
}

// blockLen is the number of rows of a block, fewer for very many channels so that memory stays bounded.
func (s *source) blockLen() int {
	return max(64, min(wave.BlockLen, (1<<22)/len(s.channels)))
}

// Blocks reads the records.
func (s *source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		s.notes = nil
		r, closer, err := s.records()
		if err != nil {
			yield(wave.Block{}, err)
			return
		}
		defer closer.Close()
		run := newRun(s, yield)
		for {
			err := r.next(run.batch)
			if err == nil {
				if !run.take() {
					return
				}
				continue
			}
			if err != io.EOF && !cut(err) {
				yield(wave.Block{}, wrap(s.data.name(), err))
				return
			}
			run.end(r, err)
			return
		}
	}
}

// wrap names the file in errors of reading.
func wrap(name string, err error) error {
	if _, ok := err.(*wave.ParseError); ok {
		return err
	}
	return readError(name, err)
}

// A run is one reading of the records.
type run struct {
	*source
	yield func(wave.Block, error) bool
	batch *batch
	block wave.Block

	rows     int64   // records handed over
	before   int64   // records read before the batch
	position int64   // in the recording, lost records counted, of the last record handed over
	missing  int64   // records lost before the next
	section  int     // or stretch
	number   int64   // of the last record; -1: none
	stamp    float64 // of the last record
	streak   int     // records in a row whose numbers count up
	begun    bool
	jumps    jumps
}

func newRun(s *source, yield func(wave.Block, error) bool) *run {
	r := &run{source: s, yield: yield, batch: newBatch(len(s.channels), s.blockLen())}
	r.block = wave.Block{Rate: s.header.Rate, Data: make([][]float64, len(s.channels))}
	return r
}

// take hands over the batch, in pieces that end where records do not follow on or a section does.
func (r *run) take() bool {
	if len(r.stamps.runs) > 0 {
		return r.takeStamped()
	}
	b := r.batch
	r.before = r.rows
	if r.missing = 0; r.begun {
		r.missing = r.lost(0, r.number, r.stamp)
	}
	for from := 0; from < b.rows; {
		lost := r.missing
		r.position += 1 + lost
		if changed := r.enter(); r.begun && (changed || lost > 0) {
			r.block.Segment++
		}
		r.begun = true
		at := r.sections[r.section].at(r.position)
		to := r.follow(from)
		if !r.emit(from, to, at) {
			return false
		}
		from = to
	}
	r.number, r.stamp = b.numbers[b.rows-1], b.stamps[b.rows-1]
	return true
}

// enter goes to the section that the position is in.
func (r *run) enter() (changed bool) {
	for r.position > r.sections[r.section].last {
		r.section++
		changed = true
	}
	r.block.Rate = r.sections[r.section].rate
	return changed
}

// follow moves the position on from row from, to the last row that follows on in the same section, and returns the row
// behind that.
func (r *run) follow(from int) int {
	b := r.batch
	to := b.rows
	if room := r.sections[r.section].last - r.position; room < int64(to-from-1) {
		to = from + 1 + int(room)
	}
	r.missing = 0
	start := r.position - int64(from)
	if b.steady {
		r.streak += to - from
		r.position = start + int64(to-1)
		return to
	}
	numbers := b.numbers[:to]
	for i := from + 1; i < len(numbers); i++ {
		r.streak++
		if numbers[i] == numbers[i-1]+1 {
			continue
		}
		r.position = start + int64(i-1)
		if r.missing = r.lost(i, numbers[i-1], b.stamps[i-1]); r.missing > 0 {
			return i
		}
	}
	r.position = start + int64(to-1)
	if to < b.rows {
		r.streak++
		r.missing = r.lost(to, b.numbers[to-1], b.stamps[to-1])
	}
	return to
}

// lost tells how many records are missing before row i, given the number and stamp of the record before. A sample
// number that jumps says so when the numbers have counted up before, and the stamps agree as far as they tell anything.
func (r *run) lost(i int, number int64, stamp float64) int64 {
	next := r.batch.numbers[i]
	if next == number+1 || next < 0 || number < 0 || next == 0 && number == math.MaxUint32 {
		return 0
	}
	counting := r.streak > 2
	r.streak = 0
	jump := next - number - 1
	seconds := (r.batch.stamps[i] - stamp) * r.stamps.unit
	if r.stamps.wraps > 0 && seconds < 0 {
		seconds += r.stamps.wraps
	}
	here, interval := r.time(r.position), 1/r.sections[r.section].rate
	expected := r.time(r.position+1+max(jump, 0)) - here
	agree := math.IsNaN(seconds) || seconds == 0 || math.Abs(seconds-expected) < 1.5*interval+0.01*expected // they are rounded
	if jump < 0 || !counting || !agree || expected > 366*86400 {
		if r.jumps.off++; r.jumps.off == 1 {
			r.jumps.offAt = r.before + int64(i) + 1
		}
		return 0
	}
	lost := expected - interval
	if r.jumps.gaps++; r.jumps.gaps == 1 {
		r.jumps.gapLength, r.jumps.gapAt = lost, here+interval
	}
	r.jumps.lost += lost
	return jump
}

// time is that of a position at or behind the section at hand.
func (r *run) time(position int64) float64 {
	i := r.section
	for position > r.sections[i].last {
		i++
	}
	return r.sections[i].at(position)
}

// takeStamped hands over the batch of a recording that its stamps time.
func (r *run) takeStamped() bool {
	runs := r.stamps.runs
	for from := 0; from < r.batch.rows; {
		record := r.rows + 1
		for r.section+1 < len(runs) && record >= runs[r.section+1].first {
			r.section++
		}
		to := r.batch.rows
		if r.section+1 < len(runs) {
			to = int(min(int64(to), int64(from)+runs[r.section+1].first-record))
		}
		here := runs[r.section]
		r.block.Segment, r.block.Rate = r.section, here.rate
		if !r.emit(from, to, here.at+float64(record-here.first)/here.rate) {
			return false
		}
		from = to
	}
	return true
}

func (r *run) emit(from, to int, at float64) bool {
	for c, row := range r.batch.data {
		r.block.Data[c] = row[from:to:to]
	}
	r.block.At = at
	r.rows += int64(to - from)
	return r.yield(r.block, nil)
}

// end closes a complete reading: it says what was odd.
func (r *run) end(records recordReader, err error) {
	s := r.source
	if e := s.unchanged(); e != nil {
		r.yield(wave.Block{}, e)
		return
	}
	if r.rows == 0 {
		r.yield(wave.Block{}, s.noRecord())
		return
	}
	s.noteEnd(records, err, r.rows)
	s.noteJumps(&r.jumps)
	s.noteOddities(&r.batch.odd, r.rows)
}

func (s *source) noRecord() error {
	return &wave.ParseError{File: s.data.name(), Line: s.data.line, Msg: "it holds no complete record; copy the recording again from the recorder"}
}

// noteEnd compares the number of records with what is announced, where the file's size did not tell it before.
func (s *source) noteEnd(records recordReader, err error, rows int64) {
	announced := s.config.rates[len(s.config.rates)-1].last
	if cut(err) {
		s.addNote("truncated", "", "The packed file is cut short in record %d; what comes before is used.", rows+1)
		return
	}
	var rest int64
	switch r := records.(type) {
	case *binaryReader:
		if s.data.bytes() >= 0 {
			return
		}
		rest = r.rest
	case *asciiReader:
		if r.incomplete {
			s.addNote("truncated", "", "%s:%d: the last line ends within a record; it is left out.", s.data.name(), r.line)
		}
	}
	if text := lengthNote(s.config.file, s.data.name(), announced, rows, rest); text != "" {
		s.addNote(lengthCode(announced, rows, rest), "", "%s", text)
	}
}
