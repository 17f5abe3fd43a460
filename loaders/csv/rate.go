package csv

import (
	"bytes"
	"errors"
	"fmt"
	"math"

	"wavetally/harmonics/wave"
	"wavetally/loaders/table"
	"wavetally/loaders/timebase"
)

// findRate reads the first rows' times and takes the rate from them, from the site sheet or from the lines above the
// table, in this order: the declared rate wins over the stamps, these win over the lines above.
func (s *source) findRate(rows []byte, whole bool) error {
	declared, stated := s.opt.DeclaredRate(), s.layout.Facts.Rate
	if declared < 0 || math.IsInf(declared, 0) || math.IsNaN(declared) {
		return &wave.ParseError{File: s.name, Msg: fmt.Sprintf("sampling_rate = %g in the site sheet is no rate; state samples per second", declared)}
	}
	points := s.firstPoints(rows, whole)
	s.setStart(s.first)
	if s.layout.Clock.Kind == table.NumberClock || s.layout.Clock.Kind == table.StampClock {
		rate, err := s.rateFromStamps(points, whole)
		switch {
		case declared > 0 && err != nil:
			s.header.Rate = declared
			s.plan.hasTime = false
			s.note("time-column-unusable", "", "The time column gives no sampling rate (%v); the declared %g Hz is used, and lost rows do not show.", err, declared)
		case declared > 0:
			s.header.Rate = declared
			s.compare(rate, declared, "the site sheet states")
		case err == nil:
			s.header.Rate = rate
			if stated > 0 {
				s.compare(rate, stated, fmt.Sprintf("line %d states", s.layout.Facts.RateLine))
			}
		case stated > 0:
			s.header.Rate = stated
			s.plan.hasTime = false
			s.note("time-column-unusable", "", "The time column gives no sampling rate (%v); the %g Hz of line %d are used, and lost rows do not show.", err, stated, s.layout.Facts.RateLine)
		default:
			return &wave.ParseError{File: s.name, Line: s.layout.Line, Err: err,
				Msg: fmt.Sprintf("the time column gives no sampling rate: %v; state sampling_rate under [file] in the site sheet", err)}
		}
		return nil
	}
	switch {
	case declared > 0:
		s.header.Rate = declared
	case stated > 0:
		s.header.Rate = stated
	case s.layout.Unread() != "":
		return &wave.ParseError{File: s.name, Line: s.layout.Line, Msg: s.layout.Unread()}
	default:
		return &wave.UnsupportedError{File: s.name, Line: s.layout.Line,
			Msg: "no column tells the time and no line above states the sampling rate; state it with --sampling-rate, or sampling_rate under [file] in the site sheet"}
	}
	return nil
}

// compare notes two rates that contradict each other by more than rounding.
func (s *source) compare(fromStamps, other float64, who string) {
	if fromStamps <= 0 || math.Abs(fromStamps-other) <= 1e-3*other {
		return
	}
	s.note("time-base-conflict", "", "The time column advances as at %.6g samples a second, but %s %.6g; %.6g is used.",
		fromStamps, who, other, s.header.Rate)
}

// firstPoints parses the rows of head for their times.
func (s *source) firstPoints(rows []byte, whole bool) []timebase.Point {
	if !s.plan.hasTime {
		return nil
	}
	k := &cutter{r: bytes.NewReader(rows), size: chunkSize(128)}
	c := newTimes(s.plan)
	for k.fill(c.chunk) {
		if !whole && k.done { // the last line may be cut
			break
		}
		c.read()
	}
	s.plan.origin, s.first, s.stamped = c.origin, c.first, c.row
	return c.points
}

// rateFromStamps fits the rate to the head's stamps, and to the whole file's when those leave it open.
func (s *source) rateFromStamps(points []timebase.Point, whole bool) (float64, error) {
	if k := s.layout.Clock; k.Kind == table.StampClock && k.Date == k.Column && !s.anyClock(points) {
		return 0, errors.New("it holds dates without a time of day")
	}
	fit, err := timebase.From(points, s.originSeconds())
	if !whole && (err != nil || fit.Uncertainty() > 5e-6) {
		all, scanErr := s.scanTimes()
		if scanErr != nil {
			return 0, scanErr
		}
		fit, err = timebase.From(all, s.originSeconds())
	}
	if errors.Is(err, timebase.ErrTooFew) && s.stamped > 2 {
		if err = timebase.ErrStanding; len(points) > 1 {
			err = timebase.ErrCoarse
		}
	}
	if err != nil {
		return 0, err
	}
	s.fit = fit
	rate := fit.Rate()
	switch {
	case fit.Jitter > 0.5*fit.Interval:
		s.note("time-stamps-jitter", "", "Time stamps stray by up to %.3g ms from even steps; rows are taken as evenly spaced at %.7g samples a second (± %.2g %%).",
			fit.Jitter*1e3, rate, fit.Uncertainty()*100)
	case !fit.Sure():
		s.note("rate-inferred", "", "Time stamps are too coarse to tell the sampling rate better than %.6g to %.6g Hz; %.7g is used. State sampling_rate under [file] in the site sheet if it is known.",
			1/fit.Top, 1/fit.Low, rate)
	}
	if k := s.layout.Clock; k.Kind == table.NumberClock && !k.UnitStated && rate < 1000 {
		s.note("time-unit-assumed", "", "The time column does not say its unit; read as seconds it gives %.6g samples a second. If it is another unit, state time_format under [file] in the site sheet.", rate)
	}
	return rate, nil
}

func (s *source) anyClock(points []timebase.Point) bool {
	return len(points) > 1 && points[len(points)-1].T != points[0].T
}

func (s *source) originSeconds() float64 {
	if s.layout.Clock.Kind == table.NumberClock {
		return float64(s.plan.origin) * s.layout.Clock.Seconds
	}
	return 0 // stamps are decimal text, never single-precision numbers
}
