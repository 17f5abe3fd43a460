package limits

import (
	"wavetally/harmonics"
)

const (
	tenMinuteSeconds = 600
	slack            = 1.0 // s by which windows make an interval begin before or after its clock mark
)

// Shares of a period's intervals that must be valid: from firmShare on a verdict stands as it is, from weakShare on it
// stands with a warning, below there is none (usual practice; IEC 61000-4-30 leaves it to the contract).
const (
	firmShare = 0.95
	weakShare = 0.80
)

// A period is a week or a day of 10 min intervals.
type period struct {
	from, to    float64 // s from the start of the recording
	first, last int     // intervals first to last-1 begin in it
	want        int     // in a whole period
}

// share is the share of a whole period's intervals that n are.
func (p period) share(n int) float64 { return float64(n) / float64(p.want) }

// periods cuts a recording's 10 min intervals into consecutive whole periods of the given length in s, and adds the last
// such length of the recording where it is no whole number of them. A recording shorter than one period gives none.
//
// A recording rarely begins on a clock mark: the part of an interval that it begins with does not count, and the
// recording may lack its last interval as well.
func periods(tens []harmonics.Interval, length float64) []period {
	if len(tens) == 0 {
		return nil
	}
	first := 0
	if len(tens) > 1 && tens[1].At-tens[0].At < tenMinuteSeconds-slack {
		first = 1
	}
	start := tens[first].At
	end := tens[len(tens)-1].At
	if span := tens[len(tens)-1].Span; span > tenMinuteSeconds-slack {
		end += span // else the recording's end cuts it short
	}
	const edges = 2*tenMinuteSeconds + slack
	whole := int((end - start + edges) / length)
	if whole == 0 {
		return nil
	}
	var out []period
	for i := range whole {
		from := start + float64(i)*length
		out = append(out, cutPeriod(tens, from, length))
	}
	// The last period must add at least one interval to what the others hold.
	if last := end - length; last > out[whole-1].from+tenMinuteSeconds-slack {
		out = append(out, cutPeriod(tens, last, length))
	}
	return out
}

func cutPeriod(tens []harmonics.Interval, from, length float64) period {
	p := period{from: from, to: from + length, first: len(tens), last: len(tens), want: int(length) / tenMinuteSeconds}
	for i, v := range tens {
		switch {
		case v.At < from-slack:
			continue
		case v.At >= p.to-slack:
			p.last = min(p.last, i)
			continue
		}
		p.first = min(p.first, i)
	}
	return p
}
