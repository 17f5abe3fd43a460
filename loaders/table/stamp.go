package table

import (
	"bytes"
	"strings"
	"time"
)

// An Order says how three short numbers make a date.
type Order uint8

// Orders of day and month where the year comes last. A leading four-digit year is read as year, month, day always.
const (
	DayFirst Order = iota
	MonthFirst
)

// A Stamp is a date, a time of day, or both.
type Stamp struct {
	Sec      int64   // since 1970-01-01 00:00:00 by the stamp's own clock, less Offset; without a date, since midnight
	Frac     float64 // of a second, in [0, 1)
	Digits   int     // decimals of the second as written
	HasDate  bool
	HasClock bool
	HasZone  bool // the stamp carries its offset to UTC; Sec then is UTC
	Unsure   bool // day and month could be exchanged and give another date
}

// ParseStamp reads one date, time of day, or both together, such as 2026-03-01T10:00:00.25Z, 1.3.2026 10:00:00,25,
// 03/01/2026 10:00:00 AM, 1-Mar-26 or 10:00:00.25. It reports false for anything else, plain numbers included.
func ParseStamp(b []byte, order Order) (Stamp, bool) {
	p := stampParser{b: Trim(b), order: order}
	return p.parse()
}

type stampParser struct {
	b     []byte
	order Order
	s     Stamp
}

func (p *stampParser) parse() (Stamp, bool) {
	if len(p.b) < 4 || len(p.b) > 48 {
		return Stamp{}, false
	}
	if p.date() {
		p.s.HasDate = true
		if p.skipBetween(); len(p.b) == 0 {
			return p.s, true
		}
	}
	if !p.clock() {
		return Stamp{}, false
	}
	p.zone()
	if len(p.b) > 0 {
		return Stamp{}, false
	}
	return p.s, true
}

// skipBetween drops what may stand between date and time of day.
func (p *stampParser) skipBetween() {
	for len(p.b) > 0 && (p.b[0] == ' ' || p.b[0] == 'T' || p.b[0] == 't' || p.b[0] == '_' || p.b[0] == ',' || p.b[0] == ';') {
		p.b = p.b[1:]
	}
}

// digits reads a run of digits; n is its length.
func (p *stampParser) digits() (value, n int) {
	for n < len(p.b) && n < 18 && p.b[n]-'0' <= 9 {
		value = value*10 + int(p.b[n]-'0')
		n++
	}
	p.b = p.b[n:]
	return value, n
}

func (p *stampParser) date() bool {
	saved := p.b
	if p.numericDate() {
		return true
	}
	p.b = saved
	if p.namedDate() {
		return true
	}
	p.b = saved
	return false
}

func (p *stampParser) numericDate() bool {
	a, n := p.digits()
	if n == 8 && a > 19000000 && a < 29990000 { // 20260301
		return (len(p.b) == 0 || p.b[0] == 'T' || p.b[0] == ' ' || p.b[0] == '_') && p.setDate(a/10000, a/100%100, a%100)
	}
	if n == 0 || n > 4 || n == 3 || len(p.b) == 0 {
		return false
	}
	separator := p.b[0]
	if separator != '-' && separator != '/' && separator != '.' {
		return false
	}
	p.b = p.b[1:]
	b, n2 := p.digits()
	if n2 == 0 || n2 > 2 || len(p.b) == 0 || p.b[0] != separator {
		return false
	}
	p.b = p.b[1:]
	if separator == '.' && len(p.b) > 0 && p.b[0] == ' ' { // 1.3. 2026
		p.b = p.b[1:]
	}
	c, n3 := p.digits()
	switch {
	case n == 4 && n3 >= 1 && n3 <= 2:
		return p.setDate(a, b, c)
	case n <= 2 && (n3 == 2 || n3 == 4):
		year := fullYear(c, n3)
		p.s.Unsure = a <= 12 && b <= 12 && a != b && separator == '/'
		if p.order == MonthFirst && separator != '.' {
			return p.setDate(year, a, b)
		}
		return p.setDate(year, b, a)
	}
	return false
}

// fullYear takes two-digit years to lie in 1970–2069.
func fullYear(year, digits int) int {
	switch {
	case digits > 2:
		return year
	case year >= 70:
		return 1900 + year
	}
	return 2000 + year
}

const monthNames = "janfebmaraprmayjunjulaugsepoctnovdec"

// namedDate reads 1-Mar-2026, 1 Mar 26, Mar 1, 2026.
func (p *stampParser) namedDate() bool {
	day, n := p.digits()
	if n > 2 {
		return false
	}
	p.skipAny(" -/.")
	month := p.month()
	if month == 0 {
		return false
	}
	p.skipAny(" -/.")
	if n == 0 {
		if day, n = p.digits(); n == 0 || n > 2 {
			return false
		}
		p.skipAny(" ,-")
	}
	year, n := p.digits()
	return (n == 2 || n == 4) && p.setDate(fullYear(year, n), month, day)
}

func (p *stampParser) skipAny(set string) {
	for len(p.b) > 0 && strings.IndexByte(set, p.b[0]) >= 0 {
		p.b = p.b[1:]
	}
}

// month reads an English month's name, of which the first three letters count.
func (p *stampParser) month() int {
	n := 0
	for n < len(p.b) && (p.b[n]|0x20 >= 'a' && p.b[n]|0x20 <= 'z') {
		n++
	}
	if n < 3 || n > 9 {
		return 0
	}
	at := strings.Index(monthNames, strings.ToLower(string(p.b[:3])))
	if at < 0 || at%3 != 0 {
		return 0
	}
	p.b = p.b[n:]
	return at/3 + 1
}

func (p *stampParser) setDate(year, month, day int) bool {
	if month < 1 || month > 12 || day < 1 || day > daysIn(year, month) {
		return false
	}
	p.s.Sec = daysFromCivil(year, month, day) * 86400
	return true
}

func daysIn(year, month int) int {
	switch month {
	case 2:
		if year%4 == 0 && (year%100 != 0 || year%400 == 0) {
			return 29
		}
		return 28
	case 4, 6, 9, 11:
		return 30
	}
	return 31
}

// daysFromCivil counts days from 1970-01-01 in the Gregorian calendar, with years that start in March so that the
// leap day comes last.
func daysFromCivil(year, month, day int) int64 {
	if month <= 2 {
		year--
	}
	era := year / 400
	yearOfEra := year - era*400
	dayOfYear := (153*((month+9)%12)+2)/5 + day - 1
	dayOfEra := yearOfEra*365 + yearOfEra/4 - yearOfEra/100 + dayOfYear
	return int64(era)*146097 + int64(dayOfEra) - 719468
}

// clock reads hh:mm, hh:mm:ss, hh:mm:ss.fff, hh:mm:ss:fff, hhmmss after a date, each with AM or PM behind it.
func (p *stampParser) clock() bool {
	h, n := p.digits()
	if n == 6 && p.s.HasDate {
		return p.setClock(h/10000, h/100%100, h%100) && p.fraction()
	}
	if n == 0 || n > 2 || len(p.b) == 0 || p.b[0] != ':' {
		return false
	}
	p.b = p.b[1:]
	m, n := p.digits()
	if n == 0 || n > 2 {
		return false
	}
	if len(p.b) > 0 && p.b[0] == '.' && !p.s.HasDate { // mm:ss.fff, as spreadsheets show short times
		return p.setClock(0, h, m) && p.fraction()
	}
	s := 0
	if len(p.b) > 0 && p.b[0] == ':' {
		p.b = p.b[1:]
		if s, n = p.digits(); n == 0 || n > 2 {
			return false
		}
	}
	if !p.setClock(h, m, s) || !p.fraction() {
		return false
	}
	return p.meridiem(h)
}

func (p *stampParser) setClock(h, m, s int) bool {
	if h > 24 || m > 59 || s > 60 {
		return false
	}
	p.s.HasClock = true
	p.s.Sec += int64(h)*3600 + int64(m)*60 + int64(s)
	return true
}

func (p *stampParser) fraction() bool {
	if len(p.b) == 0 || p.b[0] != '.' && p.b[0] != ',' && p.b[0] != ':' {
		return true
	}
	p.b = p.b[1:]
	value, n := p.digits()
	if n == 0 {
		return false
	}
	p.s.Digits = n
	p.s.Frac = float64(value) / pow10[n]
	return true
}

func (p *stampParser) meridiem(hour int) bool {
	rest := bytes.TrimLeft(p.b, " ")
	if len(rest) < 2 || rest[1]|0x20 != 'm' || rest[0]|0x20 != 'a' && rest[0]|0x20 != 'p' {
		return true
	}
	p.b = rest[2:]
	switch pm := rest[0]|0x20 == 'p'; {
	case hour > 12 || hour == 0:
		return false
	case pm && hour < 12:
		p.s.Sec += 12 * 3600
	case !pm && hour == 12:
		p.s.Sec -= 12 * 3600
	}
	return true
}

// zone reads Z, UTC, +02:00, +0200 or +02 behind the time of day.
func (p *stampParser) zone() {
	rest := bytes.TrimLeft(p.b, " ")
	if len(rest) == 0 {
		p.b = rest
		return
	}
	switch upper := strings.ToUpper(string(rest)); {
	case upper == "Z" || upper == "UTC" || upper == "GMT":
		p.s.HasZone, p.b = true, nil
		return
	case strings.HasPrefix(upper, "UTC+") || strings.HasPrefix(upper, "UTC-") || strings.HasPrefix(upper, "GMT+") || strings.HasPrefix(upper, "GMT-"):
		rest = rest[3:]
	}
	if rest[0] != '+' && rest[0] != '-' {
		return
	}
	q := stampParser{b: rest[1:]}
	h, n := q.digits()
	m := 0
	switch {
	case n == 4:
		h, m = h/100, h%100
	case n == 1 || n == 2:
		if len(q.b) > 0 && q.b[0] == ':' {
			q.b = q.b[1:]
			m, _ = q.digits()
		}
	default:
		return
	}
	if len(q.b) > 0 || h > 14 || m > 59 {
		return
	}
	offset := int64(h)*3600 + int64(m)*60
	if rest[0] == '-' {
		offset = -offset
	}
	p.s.Sec -= offset
	p.s.HasZone, p.b = true, nil
}

// Civil returns the Gregorian date of a day counted from 1970-01-01.
func Civil(days int64) (year, month, day int) {
	date := time.Unix(days*86400, 0).UTC()
	return date.Year(), int(date.Month()), date.Day()
}
