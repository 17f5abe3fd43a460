package table

import (
	"fmt"
	"math"
	"slices"
	"strings"
)

// clock finds the column that tells the time and how.
func (g *guesser) clock(l *Layout) error {
	l.Clock = Clock{Column: -1, Date: -1, Fraction: -1}
	switch called := strings.TrimSpace(g.declared.TimeColumn); {
	case strings.EqualFold(called, "none"):
		l.Clock.Kind = NoClockAsked
	case called != "":
		c, err := columnCalled(l.Columns, called)
		if err != nil {
			return err
		}
		if err := g.useColumn(l, c); err != nil {
			return err
		}
		g.retireOtherTimes(l)
	default:
		g.findClock(l)
	}
	return g.declaredFormat(l)
}

// useColumn makes c the clock, by what it holds.
func (g *guesser) useColumn(l *Layout, c int) error {
	switch {
	case g.kinds[c] == stampKind:
		g.stampClock(l, []int{c})
	case g.kinds[c] == Number:
		if g.declared.TimeFormat == "index" {
			g.indexClock(l, c)
		} else {
			g.numberClock(l, c)
		}
	default:
		return &FormatError{Line: l.Line, Msg: fmt.Sprintf("time_column = %q holds neither numbers nor time stamps; name another, or \"none\"", g.declared.TimeColumn)}
	}
	return nil
}

// findClock tries, in this order, stamps, a column of numbers that is called a time, one that runs as a time does.
func (g *guesser) findClock(l *Layout) {
	var stamps []int
	for c, kind := range g.kinds {
		if kind == stampKind {
			stamps = append(stamps, c)
		}
	}
	number, index := g.numberColumns(l)
	switch {
	case len(stamps) > 0 && g.stampClock(l, stamps):
	case number >= 0:
		g.numberClock(l, number)
	case index >= 0:
		g.indexClock(l, index)
	}
	g.retireOtherTimes(l)
}

// numberColumns finds the first column of numbers that tells the time and the first that numbers the samples, or -1.
func (g *guesser) numberColumns(l *Layout) (number, index int) {
	number, index = -1, -1
	leading := slices.Index(g.kinds, Number)
	for c, col := range l.Columns {
		_, ofTime := timeUnits[strings.ToLower(col.Unit)]
		w := word(col.Name)
		switch electric := col.Unit != "" && !ofTime; {
		case g.kinds[c] != Number || electric:
		case ofTime || len(w) > 1 && isTimeWord(col.Name) || col.Name == "t" && !falls(g.values[c]):
			if number < 0 {
				number = c
			}
		case indexWords[w] && (w != "" || c == leading) && whole(g.values[c]):
			if index < 0 {
				index = c
			}
		case c != leading || len(g.kinds) == 1 || !evenSteps(g.values[c]):
		case whole(g.values[c]):
			index = max(index, c)
		case number < 0:
			number = c
		}
	}
	return number, index
}

func (g *guesser) indexClock(l *Layout, c int) {
	l.Clock.Kind, l.Clock.Column = IndexClock, c
	l.Columns[c].Use = Time
}

func (g *guesser) numberClock(l *Layout, c int) {
	k := &l.Clock
	k.Kind, k.Column, k.Unit, k.Seconds = NumberClock, c, "s", 1
	l.Columns[c].Use = Time
	if u, ok := timeUnits[strings.ToLower(l.Columns[c].Unit)]; ok {
		k.Unit, k.Seconds, k.UnitStated = u.name, u.seconds, true
	} else if u, ok := timeUnits[word(l.Columns[c].Name)]; ok && l.Columns[c].Name != "h" {
		k.Unit, k.Seconds, k.UnitStated = u.name, u.seconds, true
	}
	k.epoch(first(g.values[c]))
}

// epoch recognises numbers that count from 1970: those that fall into the years 2000 to 2069 as seconds, milliseconds,
// microseconds or nanoseconds.
func (k *Clock) epoch(value float64) {
	const from, to = 946684800.0, 3155760000.0
	for _, u := range []struct {
		name    string
		seconds float64
	}{{"s", 1}, {"ms", 1e-3}, {"us", 1e-6}, {"ns", 1e-9}} {
		if s := value * u.seconds; s >= from && s < to && (!k.UnitStated || k.Unit == u.name) {
			k.Unit, k.Seconds, k.UnitStated, k.Epoch = u.name, u.seconds, true, true
			return
		}
	}
}

func first(values []float64) float64 {
	for _, v := range values {
		if !math.IsNaN(v) {
			return v
		}
	}
	return math.NaN()
}

// stampClock puts date, time of day and milliseconds together from the columns of stamps.
func (g *guesser) stampClock(l *Layout, stamps []int) bool {
	k := &l.Clock
	k.Order, k.OrderSaid = g.order(stamps)
	for _, c := range stamps {
		s, ok := ParseStamp([]byte(firstText(g.texts[c])), k.Order)
		switch {
		case !ok:
		case s.HasDate && s.HasClock && k.Column < 0:
			k.Column, k.Date = c, c
		case s.HasDate && !s.HasClock && k.Date < 0:
			k.Date = c
		case s.HasClock && !s.HasDate && k.Column < 0:
			k.Column = c
		}
	}
	if k.Column < 0 {
		if k.Date < 0 {
			return false
		}
		k.Column = k.Date // dates alone: as good as no clock within a day
	}
	k.Kind = StampClock
	l.Columns[k.Column].Use = Time
	if k.Date >= 0 {
		l.Columns[k.Date].Use = Time
	}
	if next := k.Column + 1; next < len(l.Columns) && g.isFraction(l.Columns[next], next) {
		k.Fraction = next
		l.Columns[next].Use = Time
	}
	return true
}

func firstText(texts []string) string {
	for _, t := range texts {
		if t != "" {
			return t
		}
	}
	return ""
}

// isFraction recognises the milliseconds beside a time of day in whole seconds.
func (g *guesser) isFraction(col Column, c int) bool {
	u, ok := timeUnits[word(col.Name)]
	if !ok {
		u, ok = timeUnits[strings.ToLower(col.Unit)]
	}
	if !ok || u.name != "ms" || g.kinds[c] != Number {
		return false
	}
	for _, v := range g.values[c] {
		if v < 0 || v >= 1000 {
			return false
		}
	}
	return true
}

// order tells day-first from month-first dates: by a number above 12, by AM and PM, by the site sheet.
func (g *guesser) order(stamps []int) (order Order, said bool) {
	switch strings.ToLower(g.declared.TimeFormat) {
	case "d/m/y":
		return DayFirst, true
	case "m/d/y":
		return MonthFirst, true
	}
	unsure := false
	for _, c := range stamps {
		for _, text := range g.texts[c] {
			day, okDay := ParseStamp([]byte(text), DayFirst)
			_, okMonth := ParseStamp([]byte(text), MonthFirst)
			switch {
			case okDay && !okMonth:
				return DayFirst, true
			case okMonth && !okDay:
				return MonthFirst, true
			case okDay && day.Unsure:
				unsure = true
				if lower := strings.ToLower(text); strings.HasSuffix(lower, "am") || strings.HasSuffix(lower, "pm") {
					order = MonthFirst
				}
			}
		}
	}
	return order, !unsure
}

// retireOtherTimes keeps further columns of time and running numbers from being taken for measured values.
func (g *guesser) retireOtherTimes(l *Layout) {
	for c := range l.Columns {
		col := &l.Columns[c]
		if col.Use == Time || c == l.Clock.Date || g.kinds[c] == Text || g.kinds[c] == Empty {
			continue
		}
		_, ofTime := timeUnits[strings.ToLower(col.Unit)]
		w := word(col.Name)
		switch {
		case g.kinds[c] == stampKind:
			col.Why = "another column tells the time"
		case l.Clock.Column < 0:
		case ofTime || len(w) > 1 && isTimeWord(col.Name) || col.Name == "t" && !falls(g.values[c]):
			col.Why = "another column tells the time"
		case indexWords[w] && whole(g.values[c]) && (w != "" || c == 0):
			col.Why = "it numbers the samples"
		}
	}
}

// declaredFormat applies time_format of the site sheet.
func (g *guesser) declaredFormat(l *Layout) error {
	k := &l.Clock
	format := strings.ToLower(strings.TrimSpace(g.declared.TimeFormat))
	if format == "" || k.Kind == NoClock || k.Kind == NoClockAsked {
		return nil
	}
	if u, ok := timeUnits[format]; ok {
		if k.Kind == StampClock {
			return &FormatError{Line: l.Line, Msg: fmt.Sprintf("time_format = %q, but the time column holds time stamps; use \"d/m/y\", \"m/d/y\" or \"iso\"", g.declared.TimeFormat)}
		}
		k.Kind, k.Unit, k.Seconds, k.UnitStated = NumberClock, u.name, u.seconds, true
		k.Epoch = false
		k.epoch(first(g.values[k.Column]))
		return nil
	}
	switch format {
	case "index":
		if k.Kind == StampClock {
			return &FormatError{Line: l.Line, Msg: "time_format = \"index\", but the time column holds time stamps; use \"d/m/y\", \"m/d/y\" or \"iso\""}
		}
		k.Kind = IndexClock
	case "d/m/y", "m/d/y", "iso":
		if k.Kind != StampClock {
			return &FormatError{Line: l.Line, Msg: fmt.Sprintf("time_format = %q, but the time column holds plain numbers; use \"s\", \"ms\", \"us\" or \"index\"", g.declared.TimeFormat)}
		}
	default:
		return &FormatError{Msg: fmt.Sprintf("time_format = %q in the site sheet is not known; use \"s\", \"ms\", \"us\", \"index\", \"d/m/y\", \"m/d/y\" or \"iso\"", g.declared.TimeFormat)}
	}
	return nil
}
