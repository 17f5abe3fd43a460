package table

import (
	"regexp"
	"strings"
)

// Facts are what the lines above a table say about the recording.
type Facts struct {
	Rate     float64 // samples per second; 0 when not stated
	RateLine int     // where it is stated
	Start    Stamp   // of the recording or of its trigger; no date when not stated
	HasStart bool
}

var (
	rateKey = regexp.MustCompile(`(?i)(sampl\w*[ _./-]*(rate|freq\w*|clock)|rate[ _]*of[ _]*sampling|scan[ _]*rate|abtastrate|abtastfrequenz|fr[eé]quence d.[eé]chantillonnage|\bfs\b|\bf_s\b|\brate\b|\bfrecuencia de muestreo)`)
	stepKey = regexp.MustCompile(`(?i)(sampl\w*[ _./-]*(interval|period|time|step)|time[ _]*(step|increment|interval|resolution)|\bdelta[ _]*t\b|\bdt\b|x[ _]*incr\w*|\bincrement\b|\binterval\b|abtastintervall)`)
	dayKey  = regexp.MustCompile(`(?i)(start|trigger|trig|begin|date|datum|fecha|recorded|acquired|time)`)
	amount  = regexp.MustCompile(`([-+]?[0-9]+(?:[.,][0-9]+)?(?:[eE][-+]?[0-9]+)?)\s*["']?\s*[,;\t]?\s*["'(\[]?\s*([kMG]?Hz|[kMG]?S/s|[kMG]?Sa/s|[kMG]?sps|[kMG]?SPS|samples/s\w*|samples per second|ms|us|µs|μs|ns|s|sec|seconds)?\b`)
)

// readFacts looks for a sampling rate or interval and for a start in the lines above the table.
func readFacts(lines []line, e Encoding, order Order) Facts {
	var f Facts
	for _, l := range lines {
		text := e.String(l.text)
		if len(text) > 400 {
			continue
		}
		if f.Rate == 0 {
			if rate := statedRate(text); rate > 0 {
				f.Rate, f.RateLine = rate, l.number
				continue
			}
		}
		if !f.HasStart && dayKey.MatchString(text) {
			f.Start, f.HasStart = statedDay(text, order)
		}
	}
	return f
}

// statedRate reads "Sample rate: 12.8 kHz" or "Sample interval;7.8125E-05;s".
func statedRate(text string) float64 {
	if at := rateKey.FindStringIndex(text); at != nil {
		value, unit, ok := firstAmount(text[at[1]:])
		if _, ofTime := timeUnits[strings.ToLower(unit)]; ok && !ofTime && value > 0 {
			return value * ratePrefix(unit)
		}
	}
	if at := stepKey.FindStringIndex(text); at != nil {
		if value, unit, ok := firstAmount(text[at[1]:]); ok && value > 0 && !strings.Contains(unit, "/") && !strings.HasSuffix(unit, "Hz") {
			seconds := 1.0
			if u, known := timeUnits[strings.ToLower(unit)]; known {
				seconds = u.seconds
			}
			return 1 / (value * seconds)
		}
	}
	return 0
}

func firstAmount(text string) (value float64, unit string, ok bool) {
	m := amount.FindStringSubmatch(text)
	if m == nil {
		return 0, "", false
	}
	value, kind := Cell([]byte(m[1]), 0, 0)
	return value, m[2], kind == Number
}

func ratePrefix(unit string) float64 {
	if unit == "" {
		return 1
	}
	switch unit[0] {
	case 'k':
		return 1e3
	case 'M':
		return 1e6
	case 'G':
		return 1e9
	}
	return 1
}

// statedDay finds a date with a time of day in a line of text, be they in one cell or in two.
func statedDay(text string, order Order) (Stamp, bool) {
	for i := range len(text) {
		if text[i]-'0' > 9 || i > 0 && (text[i-1]-'0' <= 9 || text[i-1] == '.' || text[i-1] == '-') {
			continue
		}
		for end := min(len(text), i+40); end > i+7; end-- {
			if s, ok := ParseStamp([]byte(strings.TrimRight(text[i:end], ",; \t")), order); ok && s.HasDate && s.HasClock {
				return s, true
			}
		}
	}
	return Stamp{}, false
}
