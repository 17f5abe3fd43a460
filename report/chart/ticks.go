package chart

import (
	"math"
	"strconv"
	"strings"
	"time"
)

// A tick is a mark on an axis; one without a label is a minor one.
type tick struct {
	at    float64
	label string
}

// niceTicks marks an axis at multiples of 1, 2 or 5 times a power of ten, at most most of them.
func niceTicks(low, high float64, most int) []tick {
	if !(high > low) || most < 1 {
		return nil
	}
	step := niceStep((high - low) / float64(most))
	var out []tick
	for i := math.Ceil(low/step - 1e-9); i*step <= high+1e-9*step; i++ {
		out = append(out, tick{i * step, fixed(i*step, decimals(step))})
	}
	return out
}

// niceStep is the smallest of 1, 2 or 5 times a power of ten that is at least least.
func niceStep(least float64) float64 {
	power := math.Pow(10, math.Floor(math.Log10(least)))
	for _, m := range []float64{1, 2, 5} {
		if m*power >= least*(1-1e-9) {
			return m * power
		}
	}
	return 10 * power
}

// decimals is how many digits after the point tell multiples of step apart.
func decimals(step float64) int {
	return max(0, int(-math.Floor(math.Log10(step)+1e-9)))
}

// fixed formats a number with a real minus sign.
func fixed(v float64, digits int) string {
	s := strconv.FormatFloat(v, 'f', digits, 64)
	if strings.Trim(s, "-0.") == "" {
		s = strings.TrimPrefix(s, "-")
	}
	return strings.Replace(s, "-", "−", 1)
}

// logTicks labels the powers of ten within an axis.
func logTicks(low, high float64) []tick {
	var out []tick
	for e := math.Ceil(math.Log10(low) - 1e-9); e <= math.Log10(high)+1e-9; e++ {
		out = append(out, tick{math.Pow(10, e), strconv.FormatFloat(math.Pow(10, e), 'g', 4, 64)})
	}
	return out
}

// orderTicks marks every harmonic order and labels odd ones, as many as have room.
func orderTicks(low, high, room float64) []tick {
	step := 2
	for float64(step) < (high-low)/room {
		step += 2
	}
	var out []tick
	for h := int(math.Ceil(low)); h <= int(high); h++ {
		t := tick{at: float64(h)}
		if h%2 == 1 && (h-1)%step == 0 {
			t.label = strconv.Itoa(h)
		}
		out = append(out, t)
	}
	return out
}

// clockTicks marks a time axis in seconds from start in the site's clock time. Steps are whole parts of an hour or a
// day, taken from the clock on the wall; days carry their date. Without a start the axis counts from zero.
func clockTicks(low, high float64, at Place, most int) []tick {
	if at.Start.IsZero() {
		return elapsedTicks(low, high, most)
	}
	zone := at.Zone
	if zone == nil {
		zone = time.UTC
	}
	first := at.Start.Add(seconds(low)).In(zone)
	step := clockStep((high - low) / float64(most))
	if step >= 24*time.Hour {
		return dayTicks(first, low, high, at.Start, int(step/(24*time.Hour)))
	}
	midnight := time.Date(first.Year(), first.Month(), first.Day(), 0, 0, 0, 0, zone)
	var out []tick
	previous := ""
	for t := midnight; ; t = t.Add(step) {
		s := t.Sub(at.Start).Seconds()
		if s > high {
			return out
		}
		if s >= low {
			out = append(out, tick{s, clockLabel(t, step, previous)})
			previous = t.Format(time.DateOnly)
		}
	}
}

func clockLabel(t time.Time, step time.Duration, previousDay string) string {
	label := t.Format("15:04")
	if step < time.Minute {
		label = t.Format("15:04:05")
	}
	if day := t.Format(time.DateOnly); day != previousDay {
		label += "\n" + t.Format("2 Jan")
	}
	return label
}

// dayTicks marks midnights, which are not always 24 h apart.
func dayTicks(first time.Time, low, high float64, start time.Time, days int) []tick {
	var out []tick
	for i := 0; ; i++ {
		t := time.Date(first.Year(), first.Month(), first.Day()+i, 0, 0, 0, 0, first.Location())
		s := t.Sub(start).Seconds()
		if s > high {
			return out
		}
		if s < low {
			continue
		}
		mark := tick{at: s}
		if i%days == 0 {
			mark.label = t.Format("Mon\n2 Jan")
		}
		out = append(out, mark)
	}
}

// clockStep is the smallest step of the clock that is at least least seconds.
func clockStep(least float64) time.Duration {
	for _, s := range []float64{1, 2, 5, 10, 15, 30, 60, 120, 300, 600, 900, 1800, 3600, 7200, 10800, 21600, 43200} {
		if s >= least {
			return seconds(s)
		}
	}
	return time.Duration(math.Ceil(least/86400)) * 24 * time.Hour
}

// elapsedTicks counts from the start of a recording that does not say when that was.
func elapsedTicks(low, high float64, most int) []tick {
	unit, name := 1.0, "s"
	switch span := high - low; {
	case span > 3*86400:
		unit, name = 86400, "d"
	case span > 3*3600:
		unit, name = 3600, "h"
	case span > 300:
		unit, name = 60, "min"
	}
	out := niceTicks(low/unit, high/unit, most)
	for i := range out {
		out[i].at *= unit
		out[i].label += " " + name
	}
	return out
}

func seconds(s float64) time.Duration { return time.Duration(s * float64(time.Second)) }
