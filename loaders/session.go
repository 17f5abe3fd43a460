package loaders

import (
	"fmt"
	"math"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"time"

	"wavetally/harmonics/wave"
)

// A part is one file of a session.
type part struct {
	wave.Source
	header wave.Header
	name   string  // of its first file, for messages
	series string  // the file's name with what tells its channel apart replaced by "*"; "" when nothing does
	marker string  // what tells its channel apart, such as "CH2"
	stamp  float64 // of the first row, s from an origin of its own
	stamps bool    // there is a stamp
}

// together makes one recording of several: files that hold other channels of the same capture are put side by side,
// then what begins later is joined behind what begins earlier.
func together(sources []wave.Source) (wave.Source, error) {
	var captures [][]part
	for _, src := range sources {
		p := newPart(src)
		at := slices.IndexFunc(captures, func(c []part) bool { return belongs(c, p) })
		if at < 0 {
			captures = append(captures, []part{p})
			continue
		}
		captures[at] = append(captures[at], p)
	}
	var rows []part
	for _, c := range captures {
		if len(c) == 1 {
			rows = append(rows, c[0])
			continue
		}
		side, err := sideBySide(c)
		if err != nil {
			return nil, err
		}
		p := newPart(side)
		p.stamp, p.stamps = c[0].stamp, c[0].stamps
		rows = append(rows, p)
	}
	if len(rows) == 1 {
		return rows[0].Source, nil
	}
	return join(rows)
}

// stamped is a recording whose rows have times but whose start is not known.
type stamped interface {
	FirstStamp() (seconds float64, ok bool)
}

func newPart(src wave.Source) part {
	p := part{Source: src, header: src.Header()}
	p.name = p.header.Files[0].Name
	stem := strings.TrimSuffix(p.name, ".gz")
	stem = strings.TrimSuffix(stem, filepath.Ext(stem))
	p.series, p.marker = channelMark(stem)
	for src != nil {
		if s, ok := src.(stamped); ok {
			p.stamp, p.stamps = s.FirstStamp()
			break
		}
		outer, ok := src.(interface{ Unwrap() wave.Source })
		if !ok {
			break
		}
		src = outer.Unwrap()
	}
	return p
}

// Marks in file names by which instruments tell the channels of one capture apart: a numbered channel, or a conductor.
var channelMarks = []*regexp.Regexp{
	regexp.MustCompile(`(?i)()((?:ch|chan|channel|kanal|voie|canal)[ _-]?\d+)`),
	regexp.MustCompile(`(?i)(^|[ _.-])(c\d|[uvi](?:l?[123n]|[abc]n?|12|23|31))$`),
	regexp.MustCompile(`(?i)(^|[ _.-])([uvi](?:l?[123n]|[abc]n?|12|23|31))(?:[ _.-])`),
}

func channelMark(stem string) (series, marker string) {
	for _, mark := range channelMarks {
		if at := mark.FindStringSubmatchIndex(stem); at != nil {
			return stem[:at[4]] + "*" + stem[at[5]:], stem[at[4]:at[5]]
		}
	}
	return "", ""
}

// belongs reports whether p is another channel of the capture that the parts of c are of: it begins with them at the
// same rate, and its channels are others.
func belongs(c []part, p part) bool {
	first := c[0]
	if math.Abs(first.header.Rate-p.header.Rate) > 1e-6*p.header.Rate || !beginsWith(first, p) {
		return false
	}
	siblings := first.series != "" && first.series == p.series
	for _, q := range c {
		if siblings && q.marker == p.marker {
			return false
		}
		if !siblings && (len(p.header.Channels) > 1 && p.header.Start.IsZero() || sharesName(q.header.Channels, p.header.Channels)) {
			return false
		}
	}
	return true
}

// beginsWith reports whether a and b begin at the same sample, as far as they say.
func beginsWith(a, b part) bool {
	half := 0.5 / a.header.Rate
	switch {
	case a.header.Start.IsZero() != b.header.Start.IsZero():
		return false
	case !a.header.Start.IsZero():
		return math.Abs(b.header.Start.Sub(a.header.Start).Seconds()) < half
	case a.stamps && b.stamps:
		return math.Abs(a.stamp-b.stamp) < half
	}
	return a.stamps == b.stamps
}

func sharesName(a, b []wave.Channel) bool {
	for _, x := range a {
		for _, y := range b {
			if x.Name == y.Name {
				return true
			}
		}
	}
	return false
}

// join puts parts in the order of time, or of their names where they do not tell it.
func join(parts []part) (wave.Source, error) {
	j := &joined{}
	dated := 0
	for _, p := range parts {
		if !p.header.Start.IsZero() {
			dated++
		}
	}
	if dated > 0 && dated < len(parts) {
		with, without := oneOfEach(parts)
		return nil, fmt.Errorf("%s: it does not say when it starts, but %s does; name them apart, or give the recorder's files only", without, with)
	}
	switch {
	case dated > 0:
		slices.SortStableFunc(parts, func(a, b part) int { return a.header.Start.Compare(b.header.Start) })
	case !rising(parts):
		slices.SortStableFunc(parts, func(a, b part) int { return Natural(a.name, b.name) })
		j.unknown = !rising(parts)
	}
	for i, p := range parts {
		if err := j.add(p); err != nil {
			return nil, err
		}
		j.offsets = append(j.offsets, offset(parts[0], p, i, j.unknown))
	}
	j.finish()
	return j, nil
}

func oneOfEach(parts []part) (with, without string) {
	for _, p := range parts {
		if p.header.Start.IsZero() {
			without = p.name
		} else {
			with = p.name
		}
	}
	return with, without
}

// rising sorts parts by their first stamps and reports whether these tell them apart.
func rising(parts []part) bool {
	for _, p := range parts {
		if !p.stamps {
			return false
		}
	}
	byStamp := slices.Clone(parts)
	slices.SortStableFunc(byStamp, func(a, b part) int {
		switch {
		case a.stamp < b.stamp:
			return -1
		case a.stamp > b.stamp:
			return 1
		}
		return 0
	})
	for i := 1; i < len(byStamp); i++ {
		if byStamp[i].stamp-byStamp[i-1].stamp < 1/byStamp[i].header.Rate {
			return false
		}
	}
	copy(parts, byStamp)
	return true
}

// offset is how much later than the first part p begins, in s; NaN when nothing tells.
func offset(first, p part, i int, unknown bool) float64 {
	switch {
	case i == 0:
		return 0
	case !p.header.Start.IsZero():
		return seconds(p.header.Start.Sub(first.header.Start))
	case unknown:
		return math.NaN()
	}
	return p.stamp - first.stamp
}

// seconds keeps whole seconds and the rest apart, so that a long span loses nothing to rounding.
func seconds(d time.Duration) float64 {
	return float64(d/time.Second) + float64(d%time.Second)/1e9
}
