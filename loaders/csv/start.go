package csv

import (
	"math"
	"time"

	"wavetally/loaders/table"
)

// setStart finds the instant of the first row.
func (s *source) setStart(first instant) {
	k := s.layout.Clock
	switch {
	case k.Kind == table.StampClock && k.Date >= 0 && first.set:
		s.header.Start, s.header.HasZone = s.instantTime(first), first.zoned
	case k.Kind == table.NumberClock && k.Epoch && first.set:
		whole := float64(first.whole) * k.Seconds
		sec := math.Floor(whole)
		nanos := (float64(first.whole)-sec/k.Seconds+first.part)*k.Seconds*1e9 + 0.5
		s.header.Start, s.header.HasZone = time.Unix(int64(sec), int64(nanos)).UTC(), true
	case s.layout.Facts.HasStart:
		f := s.layout.Facts.Start
		s.header.Start = s.instantTime(instant{whole: f.Sec, part: f.Frac, zoned: f.HasZone})
		s.header.HasZone = f.HasZone
	}
	if k.Kind == table.StampClock && k.Date >= 0 && !k.OrderSaid && first.set {
		order, other := "d/m/y", "m/d/y"
		if k.Order == table.MonthFirst {
			order, other = other, order
		}
		s.note("date-order-assumed", "", "Day and month in the time stamps could be exchanged; they are read as %s, so the recording starts on %s. If it is %s, state time_format under [file] in the site sheet.",
			order, s.header.Start.Format("2 January 2006"), other)
	}
}

// instantTime is the instant of a stamp; one without an offset is read in the declared zone.
func (s *source) instantTime(t instant) time.Time {
	utc := time.Unix(t.whole, int64(math.Round(t.part*1e9))).UTC()
	if t.zoned {
		return utc
	}
	y, m, d := utc.Date()
	return time.Date(y, m, d, utc.Hour(), utc.Minute(), utc.Second(), utc.Nanosecond(), s.opt.Location())
}
