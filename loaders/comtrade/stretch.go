package comtrade

import (
	"fmt"
	"io"
	"math"
	"slices"

	"wavetally/harmonics/wave"
	"wavetally/loaders/timebase"
)

// A recording without sampling rates is timed by its records' stamps alone. They are read once in advance and cut into
// stretches in which they keep a rhythm.

// A stretch is a run of records with even steps.
type stretch struct {
	first int64   // its first record, from 1
	at    float64 // s, time of that record
	rate  float64 // Hz
}

const (
	ahead        = 4096   // stamps that are looked at to find a rhythm
	maxStretches = 10_000 // more are no recording of a waveform
	fastest      = 5e6    // Hz, above which stamps in ns are rather in µs
)

// findStretches reads all stamps.
func (s *source) findStretches() error {
	p, err := s.pace()
	// A fraction of nine digits should say that stamps count ns, but recorders write it that count µs.
	if err == nil && p.runs[0].rate > fastest && s.stamps.unit < s.config.timeMult*1e-7 {
		s.note("stamp-unit-assumed", "", "Time stamps in ns, as the nine digits of the times say, would give %.4g samples a second; they are read as µs.", p.runs[0].rate)
		s.stamps.unit *= 1000
		s.stamps.wraps *= 1000
		p, err = s.pace()
	}
	if err != nil {
		return err
	}
	s.stamps.runs = p.runs
	s.notePace(p)
	return nil
}

// pace cuts the recording's stamps into stretches.
func (s *source) pace() (*pacer, error) {
	p := &pacer{scale: s.stamps}
	r, closer, err := s.records()
	if err != nil {
		return nil, err
	}
	defer closer.Close()
	for b := newBatch(len(s.channels), s.blockLen()); ; {
		end := r.next(b)
		if end != nil && end != io.EOF && !cut(end) {
			return nil, wrap(s.data.name(), end)
		}
		if end == nil {
			p.add(b.stamps[:b.rows])
		}
		if err := p.pace(end != nil); err != nil {
			return nil, s.stampError(err)
		}
		if end != nil {
			break
		}
	}
	if p.total == 0 {
		return nil, s.noRecord()
	}
	return p, nil
}

func (s *source) stampError(err error) error {
	line := s.config.rates[0].line
	return &wave.ParseError{File: s.config.file, Line: line, Err: err,
		Msg: fmt.Sprintf("the configuration states no sampling rate, and the time stamps give none: %v; state sampling_rate under [file] in the site sheet", err)}
}

func (s *source) notePace(p *pacer) {
	fit := p.fits[0]
	switch rate := fit.Rate(); {
	case fit.Jitter > 0.5*fit.Interval:
		s.note("time-stamps-jitter", "", "Time stamps stray by up to %.3g ms from even steps; records are taken as evenly spaced at %.7g samples a second (± %.2g %%).", fit.Jitter*1e3, rate, fit.Uncertainty()*100)
	case fit.Uncertainty() > 2e-5:
		s.note("rate-inferred", "", "The sampling rate is inferred from time stamps, which allow %.6g to %.6g Hz; %.7g is used. State sampling_rate under [file] in the site sheet if it is known.", 1/fit.Top, 1/fit.Low, rate)
	default:
		s.note("rate-inferred", "", "The configuration states no sampling rate; the time stamps give %.7g samples a second.", rate)
	}
	j := jumps{breaks: int64(len(p.runs) - 1), backs: p.backs, backAt: p.backAt}
	if len(p.runs) > 1 {
		j.breakAt = p.runs[1].at
	}
	kept := s.notes
	s.notes = nil
	s.noteJumps(&j)
	s.header.Notes = append(s.header.Notes, s.notes...)
	s.notes = kept
}

// A pacer cuts stamps into stretches.
type pacer struct {
	scale   stampScale
	pending []float64 // s, of records from total-len(pending)+1 on
	total   int64     // records seen
	turns   float64   // s, to add for the wraps so far
	last    float64   // s, of the last stamp added

	fits []timebase.Fit // of the rhythms met, the first the main one
	runs []stretch
	fit  timebase.Fit // of the stretch at hand
	n    int64        // records of it so far
	// s, what to add to a stamp for the recording's axis; how far stamps have slowly drifted from even steps
	shift, drift float64
	prev         float64 // s, time of the record before
	backs        int64
	backAt       int64
}

// add takes raw stamps.
func (p *pacer) add(stamps []float64) {
	for _, raw := range stamps {
		t := raw*p.scale.unit + p.turns
		if wraps := p.scale.wraps; wraps > 0 && t < p.last-wraps/2 {
			p.turns += wraps
			t += wraps
		}
		if !math.IsNaN(t) {
			p.last = t
		}
		p.pending = append(p.pending, t)
	}
	p.total += int64(len(stamps))
}

// pace places the pending records, but keeps some back to look ahead at, unless they are the last.
func (p *pacer) pace(last bool) error {
	keep := ahead
	if last {
		keep = 0
	}
	if len(p.runs) == 0 {
		if len(p.pending) < ahead && !last || p.total == 0 {
			return nil
		}
		if err := p.begin(); err != nil {
			return err
		}
	}
	i := 0
	for ; i < len(p.pending)-keep; i++ {
		if err := p.place(i); err != nil {
			return err
		}
	}
	p.pending = p.pending[:copy(p.pending, p.pending[i:])]
	return nil
}

// begin finds the main rhythm.
func (p *pacer) begin() error {
	fit, err := timebase.From(p.points(0, len(p.pending)), 0)
	if err != nil { // too many changes; the first stretch has a rhythm of its own
		var ok bool
		if fit, ok = p.local(0); !ok {
			return err
		}
	}
	p.fits = append(p.fits, fit)
	start := p.pending[0]
	if math.IsNaN(start) {
		start = 0
	}
	p.shift = -start
	p.open(0, 0)
	return nil
}

func (p *pacer) points(from, to int) []timebase.Point {
	points := make([]timebase.Point, 0, to-from)
	for i := from; i < to; i++ {
		if t := p.pending[i]; !math.IsNaN(t) {
			points = append(points, timebase.Point{Row: int64(i), T: t, Step: p.scale.unit})
		}
	}
	return points
}

// record is the number of pending record i.
func (p *pacer) record(i int) int64 { return p.total - int64(len(p.pending)) + int64(i) + 1 }

// open begins a stretch with pending record i, at time at.
func (p *pacer) open(i int, at float64) {
	p.fit = p.rhythm(i)
	p.runs = append(p.runs, stretch{first: p.record(i), at: at, rate: p.fit.Rate()})
	p.n, p.drift, p.prev = 0, 0, at
}

// rhythm finds the steps of the stamps from pending record i on: a rhythm met before, or a new one. Too few stamps say
// nothing, and what went before holds on.
func (p *pacer) rhythm(i int) timebase.Fit {
	before := p.fit
	if len(p.runs) == 0 {
		before = p.fits[0]
	}
	step, ok := p.step(i)
	if !ok {
		return before
	}
	for _, known := range append([]timebase.Fit{before}, p.fits...) {
		if math.Abs(step-known.Interval) <= 0.02*known.Interval+p.scale.unit {
			return known
		}
	}
	fit, ok := p.local(i)
	if !ok {
		return before
	}
	if len(p.fits) < 64 {
		p.fits = append(p.fits, fit)
	}
	return fit
}

// step is the usual step of the stamps from pending record i on. Fewer than four say nothing.
func (p *pacer) step(i int) (float64, bool) {
	end := i + 1
	for end < len(p.pending) && end-i < 64 && p.pending[end] > p.pending[end-1]-p.scale.unit {
		end++
	}
	if end-i < 4 {
		return 0, false
	}
	return medianStep(p.pending[i:end]), true
}

// local fits the run of even steps that begins with pending record i.
func (p *pacer) local(i int) (timebase.Fit, bool) {
	step, ok := p.step(i)
	if !ok {
		return timebase.Fit{}, false
	}
	tolerance := 0.5*step + p.scale.unit
	end := i + 1
	for end < len(p.pending) && math.Abs(p.pending[end]-p.pending[end-1]-step) <= tolerance {
		end++
	}
	fit, err := timebase.From(p.points(i, end), 0)
	return fit, err == nil
}

func medianStep(stamps []float64) float64 {
	steps := make([]float64, 0, len(stamps))
	for i := 1; i < len(stamps); i++ {
		steps = append(steps, stamps[i]-stamps[i-1])
	}
	slices.Sort(steps)
	return steps[len(steps)/2]
}

// place puts pending record i behind the one before it, or begins a stretch with it.
func (p *pacer) place(i int) error {
	rate := p.fit.Rate()
	expected := p.runs[len(p.runs)-1].at + float64(p.n)/rate
	t := p.pending[i] + p.shift
	off := t - expected - p.drift
	if tolerance := 0.5/rate + p.scale.unit + 1.5*p.fit.Jitter; math.IsNaN(t) || math.Abs(off) <= tolerance {
		if !math.IsNaN(t) {
			p.drift += off / 4096
		}
		p.n++
		p.prev = expected
		return nil
	}
	if len(p.runs) == maxStretches {
		return fmt.Errorf("they are irregular in more than %d places, first at %.6g s", maxStretches, p.runs[1].at)
	}
	if t <= p.prev {
		if p.backs++; p.backs == 1 {
			p.backAt = p.record(i)
		}
		p.shift += expected - t
		t = expected
	} else if rows := math.Round(off * rate); rows > 0 && rows < 1e6 && math.Abs(off-rows/rate) <= p.scale.unit+p.fit.Jitter {
		t = expected + rows/rate // records lost from a steady stream keep its grid, which is finer than the stamps
	}
	p.open(i, t)
	p.n = 1
	return nil
}
