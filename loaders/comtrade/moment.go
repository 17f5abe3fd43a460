package comtrade

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"
	"time"
)

// A moment is a date and time as a configuration has it.
type moment struct {
	year, month, day int
	hour, minute     int
	second, nano     int

	set    bool
	nanos  bool // the fraction has more than six digits: time stamps count ns
	turned bool // day and month were not in the edition's order
	open   bool // day and month could be exchanged
}

func (m moment) in(zone *time.Location) time.Time {
	return time.Date(m.year, time.Month(m.month), m.day, m.hour, m.minute, m.second, m.nano, zone)
}

func (m moment) text() string { return m.in(time.UTC).Format("2 January 2006") }

var errNoTime = errors.New("it is empty")

// parseMoment reads "dd/mm/yyyy,hh:mm:ss.ssssss", in the 1991 edition "mm/dd/yy,hh:mm:ss.ssssss". An empty one gives
// the zero moment.
func parseMoment(f []string, edition int) (moment, error) {
	if len(f) == 0 || f[0] == "" {
		return moment{}, nil
	}
	var m moment
	if err := m.date(f[0], edition); err != nil {
		return moment{}, err
	}
	if len(f) < 2 {
		return moment{}, errNoTime
	}
	return m, m.clock(f[1])
}

func (m *moment) date(text string, edition int) error {
	parts, err := integers(text, "/-.", 3)
	if err != nil {
		return err
	}
	switch year := parts[2]; {
	case parts[0] > 31: // year first, as ISO 8601 has it
		m.year, m.month, m.day = parts[0], parts[1], parts[2]
	case edition == 1991:
		m.year, m.month, m.day = year, parts[0], parts[1]
		m.open = parts[0] <= 12 && parts[1] <= 12 && parts[0] != parts[1]
	default:
		m.year, m.month, m.day = year, parts[1], parts[0]
	}
	if m.month > 12 && m.day <= 12 {
		m.month, m.day, m.turned, m.open = m.day, m.month, true, false
	}
	switch {
	case m.year < 70:
		m.year += 2000
	case m.year < 100:
		m.year += 1900
	}
	if t := m.in(time.UTC); t.Day() != m.day || int(t.Month()) != m.month || t.Year() != m.year || m.year > 9999 {
		return fmt.Errorf("there is no date %s", text)
	}
	m.set = true
	return nil
}

func (m *moment) clock(text string) error {
	whole, fraction, _ := strings.Cut(text, ".")
	parts, err := integers(whole, ":", 3)
	if err != nil {
		return err
	}
	m.hour, m.minute, m.second = parts[0], parts[1], parts[2]
	if m.hour > 24 || m.minute > 59 || m.second > 60 {
		return fmt.Errorf("there is no time of day %s", text)
	}
	m.nanos = len(fraction) > 6
	if fraction != "" {
		part, err := strconv.ParseUint(fraction, 10, 63)
		if err != nil {
			return fmt.Errorf("%q is no fraction of a second", fraction)
		}
		m.nano = int(math.Round(float64(part) * math.Pow10(9-len(fraction))))
	}
	return nil
}

// integers splits text at any of the marks into n numbers of up to four digits.
func integers(text, marks string, n int) ([]int, error) {
	parts := strings.FieldsFunc(text, func(r rune) bool { return strings.ContainsRune(marks, r) })
	if len(parts) != n {
		return nil, fmt.Errorf("%q has not %d numbers", text, n)
	}
	numbers := make([]int, n)
	for i, p := range parts {
		v, err := strconv.ParseUint(strings.TrimSpace(p), 10, 16)
		if err != nil {
			return nil, fmt.Errorf("%q is no number", p)
		}
		numbers[i] = int(v)
	}
	return numbers, nil
}

// parseOffset reads a time code of the 2013 edition: "0", "+1", "-5h30", or "x" for unknown; "5:30" is met too.
func parseOffset(code string) (zone *time.Location, known bool, err error) {
	if strings.EqualFold(code, "x") {
		return nil, false, nil
	}
	rest, sign := strings.TrimPrefix(strings.ToLower(code), "+"), 1
	if after, west := strings.CutPrefix(rest, "-"); west {
		rest, sign = after, -1
	}
	hours, minutes, split := strings.Cut(strings.ReplaceAll(rest, ":", "h"), "h")
	h, err := strconv.ParseFloat(hours, 64) // 5.5 is met too
	if err != nil || !(h >= 0 && h <= 14) {
		return nil, false, fmt.Errorf("%q is no offset", code)
	}
	var m uint64
	if split && minutes != "" {
		if m, err = strconv.ParseUint(minutes, 10, 8); err != nil || m > 59 {
			return nil, false, fmt.Errorf("%q is no offset", code)
		}
	}
	seconds := sign * (int(h*3600) + int(m)*60)
	if seconds == 0 {
		return time.UTC, true, nil
	}
	return time.FixedZone("UTC"+time.Unix(0, 0).In(time.FixedZone("", seconds)).Format("-07:00"), seconds), true, nil
}
