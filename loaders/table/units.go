package table

import (
	"strings"

	"wavetally/harmonics/wave"
)

// timeUnits gives the seconds of each unit of time, by its names in lower case.
var timeUnits = map[string]struct {
	name    string
	seconds float64
}{
	"s": {"s", 1}, "sec": {"s", 1}, "secs": {"s", 1}, "second": {"s", 1}, "seconds": {"s", 1}, "sek": {"s", 1},
	"sekunden": {"s", 1}, "secondes": {"s", 1}, "segundos": {"s", 1},
	"ms": {"ms", 1e-3}, "msec": {"ms", 1e-3}, "msecs": {"ms", 1e-3}, "millisecond": {"ms", 1e-3},
	"milliseconds": {"ms", 1e-3}, "millis": {"ms", 1e-3},
	"us": {"us", 1e-6}, "µs": {"us", 1e-6}, "μs": {"us", 1e-6}, "usec": {"us", 1e-6}, "microsecond": {"us", 1e-6},
	"microseconds": {"us", 1e-6}, "micros": {"us", 1e-6},
	"ns": {"ns", 1e-9}, "nsec": {"ns", 1e-9}, "nanosecond": {"ns", 1e-9}, "nanoseconds": {"ns", 1e-9},
	"min": {"min", 60}, "mins": {"min", 60}, "minute": {"min", 60}, "minutes": {"min", 60},
	"h": {"h", 3600}, "hr": {"h", 3600}, "hrs": {"h", 3600}, "hour": {"h", 3600}, "hours": {"h", 3600},
	"d": {"d", 86400}, "day": {"d", 86400}, "days": {"d", 86400},
}

// otherUnits are units that are neither of time nor of voltage or current, in lower case.
var otherUnits = map[string]bool{"w": true, "kw": true, "mw": true, "va": true, "kva": true, "mva": true, "var": true,
	"kvar": true, "mvar": true, "vars": true, "hz": true, "khz": true, "mhz": true, "°c": true, "degc": true, "°f": true, "c": true,
	"k": true, "%": true, "rpm": true, "1/min": true, "bar": true, "pa": true, "kpa": true, "nm": true, "n": true, "kn": true,
	"deg": true, "°": true, "rad": true, "ohm": true, "ω": true, "kwh": true, "wh": true, "kvarh": true, "db": true,
	"g": true, "m/s": true, "m/s2": true, "m/s²": true, "mm": true, "mm/s": true, "lux": true, "pf": true, "pu": true, "p.u.": true}

// OtherQuantity reports whether unit is one that no voltage or current is given in.
func OtherQuantity(unit string) bool {
	_, _, electric := wave.BaseUnit(unit)
	lower := strings.ToLower(unit)
	_, ofTime := timeUnits[lower]
	return !electric && (ofTime || otherUnits[lower] && lower != "pu" && lower != "p.u.")
}

func knownUnit(unit string) bool {
	if _, _, ok := wave.BaseUnit(unit); ok {
		return true
	}
	lower := strings.ToLower(unit)
	_, ofTime := timeUnits[lower]
	return ofTime || otherUnits[lower]
}

// splitUnit takes the unit off a column's heading: "V1 (kV)", "V1 [kV]", "V1 / kV", "V1, kV", "V1 kV", "time_ms".
// A lone A or V behind a blank or a low line may be a phase ("Current A", "I_V"); it counts as a unit only where the
// rest says so.
func splitUnit(heading string) (name, unit string) {
	heading = strings.TrimSpace(heading)
	if n := len(heading); n > 2 {
		if open := strings.IndexByte("([{<", opening(heading[n-1])); open >= 0 {
			at := strings.LastIndexByte(heading, "([{<"[open])
			if at >= 0 {
				if u := strings.TrimSpace(heading[at+1 : n-1]); knownUnit(u) {
					return strings.TrimSpace(heading[:at]), u
				}
			}
		}
	}
	at := strings.LastIndexAny(heading, "/,_; ")
	if at <= 0 {
		return heading, ""
	}
	rest, u := strings.TrimRight(heading[:at], "/,_; "), heading[at+1:]
	before := strings.TrimSpace(heading[:at])
	bare, in := strings.CutSuffix(before, " in") // "U1 in kV"
	sure := in || heading[at] == '/' || heading[at] == ',' || strings.HasSuffix(before, ",") || strings.HasSuffix(before, "/")
	if in {
		rest = bare
	}
	switch _, _, electric := wave.BaseUnit(u); {
	case rest == "" || !knownUnit(u):
		return heading, ""
	case electric && (len(u) > 1 || sure || impliedBy(rest, u)):
		return rest, u
	case !electric && (sure || isTimeWord(rest)) && len(u) > 0:
		return rest, u
	}
	return heading, ""
}

// opening returns the bracket that opens what closing closes, and NUL for anything else.
func opening(closing byte) byte {
	switch closing {
	case ')':
		return '('
	case ']':
		return '['
	case '}':
		return '{'
	case '>':
		return '<'
	}
	return 0
}

// impliedBy reports whether a channel's name with a number in it is of the kind that unit says, as in "u1_V".
func impliedBy(name, unit string) bool {
	lower := strings.ToLower(name)
	if !strings.ContainsAny(lower, "0123456789") {
		return false
	}
	if strings.EqualFold(unit, "A") {
		return lower[0] == 'i' || strings.Contains(lower, "curr")
	}
	return lower[0] == 'u' || lower[0] == 'v' || strings.Contains(lower, "volt")
}

// bareUnit takes the brackets off a cell of a row of units.
func bareUnit(cell string) string {
	cell = strings.TrimSpace(cell)
	if n := len(cell); n > 2 && opening(cell[n-1]) == cell[0] {
		return strings.TrimSpace(cell[1 : n-1])
	}
	return cell
}

// timeWords are headings of time columns, in lower case, without units and punctuation.
var timeWords = map[string]bool{"time": true, "t": true, "zeit": true, "uhrzeit": true, "zeitstempel": true, "temps": true,
	"heure": true, "tiempo": true, "hora": true, "tempo": true, "ora": true, "tijd": true, "tid": true, "czas": true, "čas": true,
	"aika": true, "время": true, "时间": true, "時間": true, "timestamp": true, "time stamp": true, "datetime": true,
	"date time": true, "date and time": true, "date": true, "datum": true, "fecha": true, "data": true, "datum zeit": true,
	"x axis": true, "x": true, "abscissa": true, "elapsed": true, "elapsed time": true, "relative time": true, "rel time": true,
	"utc": true, "utc time": true, "local time": true, "sec": true, "second": true, "seconds": true, "secs": true,
	"epoch": true, "unix": true, "unix time": true, "interval start": true, "interval end": true, "start time": true,
	"end time": true, "start": true, "end": true, "clock": true, "ms": true, "us": true, "µs": true, "time ms": true, "time s": true}

// indexWords are headings of columns that number the samples.
var indexWords = map[string]bool{"index": true, "idx": true, "sample": true, "samples": true, "sample no": true,
	"sample number": true, "n": true, "no": true, "nr": true, "num": true, "number": true, "point": true, "points": true,
	"pt": true, "scan": true, "row": true, "record": true, "rec": true, "": true, "count": true, "counter": true, "id": true,
	"seq": true, "sequence": true}

// word is a heading as the word lists have it.
func word(name string) string {
	name = strings.ToLower(strings.Map(func(r rune) rune {
		switch r {
		case '_', '-', '.', '/', '&', ':', '#', '"', '\'', '(', ')', '[', ']':
			return ' '
		}
		return r
	}, name))
	return strings.Join(strings.Fields(name), " ")
}

func isTimeWord(name string) bool {
	w := word(name)
	return timeWords[w] || strings.HasSuffix(w, " time") || strings.HasPrefix(w, "time ") || strings.HasSuffix(w, " timestamp")
}
