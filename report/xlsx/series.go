package xlsx

import (
	"fmt"
	"io"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics"
)

// seriesRows is how many rows a sheet may hold; the title takes a few.
const seriesRows = 1<<20 - 16

// seriesSheets write the intervals: totals on one sheet, orders on others, one row an interval. A recording of hours
// has its orders by 10 min intervals only; one that is shorter has them by 3 s too.
func (b *book) seriesSheets(p *plotter) {
	sum := b.survey.Summary
	if sum == nil {
		return
	}
	const hours = 12 // 10 min intervals in the two hours from which on they say enough
	for _, one := range []struct {
		name   string
		ivs    []harmonics.Interval
		orders bool
	}{{"10 min", sum.Tens, true}, {"3 s", sum.Threes, len(sum.Tens) < hours}} {
		for part, ivs := range parts(one.ivs) {
			b.series(p, one.name+part, ivs, one.orders)
		}
	}
}

// parts splits intervals over as many sheets as they need.
func parts(ivs []harmonics.Interval) func(func(string, []harmonics.Interval) bool) {
	return func(yield func(string, []harmonics.Interval) bool) {
		n := 0
		for chunk := range slices.Chunk(ivs, seriesRows) {
			n++
			name := ""
			if n > 1 {
				name = fmt.Sprintf(" (%d)", n)
			}
			if !yield(name, chunk) {
				return
			}
		}
	}
}

func (b *book) series(p *plotter, name string, ivs []harmonics.Interval, orders bool) {
	s := b.sheet("Series "+name, "totals of every interval of "+name)
	t := &totals{book: b, sheet: s, ivs: ivs}
	t.write(name)
	p.trends(t)
	if !orders {
		return
	}
	for _, g := range []struct{ short, long string }{{"V", "voltages"}, {"I", "currents"}} {
		if channels := b.channelsOf(g.short == "V"); len(channels) > 0 {
			o := &orderSeries{book: b, channels: channels, ivs: ivs}
			o.write(b.sheet("Orders "+name+" "+g.short, "every order and interharmonic of the "+g.long+", every interval of "+name), name, g.long)
		}
	}
}

// channelsOf are the indices of the voltages or of the currents.
func (b *book) channelsOf(voltage bool) []int {
	var out []int
	for i, c := range b.survey.Summary.Channels {
		if c.Role.Voltage() == voltage {
			out = append(out, i)
		}
	}
	return out
}

// start heads and fills the column that says when an interval began: a date where the recording's start is known.
func (b *book) start() (column, func(harmonics.Interval) cell) {
	if begin := b.survey.Recording.Start; begin != nil {
		return column{head: "Start", unit: "UTC", width: 20}, func(iv harmonics.Interval) cell {
			c := moment(begin.Add(seconds(iv.At)))
			if iv.Span < 60 {
				c.style = momentLook
			}
			return c
		}
	}
	return column{head: "Start", unit: "s from the beginning", width: 19}, func(iv harmonics.Interval) cell { return number(iv.At, "0.0") }
}

// totals are the sheet of an interval series with one column a channel and quantity.
type totals struct {
	*book
	sheet       *sheet
	ivs         []harmonics.Interval
	first, last int
	at          map[string]int // column of a quantity, by "I1 tdd"
	columns     []column
	get         []func(iv harmonics.Interval, row int) cell
	printed     int // columns
}

func (t *totals) add(key string, c column, get func(iv harmonics.Interval, row int) cell) {
	t.columns, t.get = append(t.columns, c), append(t.get, get)
	t.at[key] = len(t.columns)
}

// channel adds a column of one channel, empty where no window of an interval counts.
func (t *totals) channel(i int, key, head, unit, format string, get func(harmonics.Levels) float64) {
	role := string(t.survey.Summary.Channels[i].Role)
	t.add(role+" "+key, column{head: role + " " + head, unit: unit, width: 9}, func(iv harmonics.Interval, _ int) cell {
		if iv.Windows == 0 {
			return none
		}
		return number(get(iv.Channels[i]), format)
	})
}

func (t *totals) write(name string) {
	t.at = map[string]int{}
	head, start := t.start()
	t.add("start", head, func(iv harmonics.Interval, _ int) cell { return start(iv) })
	t.add("span", column{head: "Length", unit: "s"}, func(iv harmonics.Interval, _ int) cell { return measured(iv.Span) })
	t.add("valid", column{head: "Counts", unit: "in statistics", width: 11}, func(iv harmonics.Interval, _ int) cell { return text(yesNo(iv.Valid())) })
	t.add("flags", column{head: "Flags", width: 16}, func(iv harmonics.Interval, _ int) cell { return text(flags(iv)) })
	t.add("windows", column{head: "Windows", unit: "used", width: 9}, func(iv harmonics.Interval, _ int) cell { return count(iv.Windows) })
	t.add("want", column{head: "Windows", unit: "complete", width: 9}, func(iv harmonics.Interval, _ int) cell { return count(iv.Want) })
	t.add("frequency", column{head: "Frequency", unit: "Hz", width: 10}, func(iv harmonics.Interval, _ int) cell { return number(iv.Frequency, "0.000") })
	t.channels()
	t.lay(name)
}

func yesNo(b bool) string { return pick(b, "yes", "no") }

func flags(iv harmonics.Interval) string {
	words := strings.Join(iv.Flags.Strings(), ", ")
	if words == "" && !iv.Complete {
		return "incomplete"
	}
	return words
}

// channels adds the quantities, channels side by side.
func (t *totals) channels() {
	channels := t.survey.Summary.Channels
	for i, c := range channels {
		if !c.Role.Neutral() {
			t.channel(i, "thd", "THD", "% of fund.", computedFormat, func(l harmonics.Levels) float64 { return 100 * l.THC / l.H[1] })
		}
	}
	first, demand := len(t.columns), 0
	for _, c := range channels {
		if c.Role.Current() && !c.Role.Neutral() {
			demand++
		}
	}
	for i, c := range channels {
		if c.Role.Current() && !c.Role.Neutral() {
			t.tdd(i, c, first+demand)
			demand++
		}
	}
	t.printed = len(t.columns)
	for i, c := range channels {
		if c.Role.Current() {
			t.channel(i, "thc", "harmonics", "A", computedFormat, func(l harmonics.Levels) float64 { return l.THC })
		}
	}
	for i, c := range channels {
		t.channel(i, "fundamental", "fund.", c.Unit, computedFormat, func(l harmonics.Levels) float64 { return l.H[1] })
	}
	for i, c := range channels {
		t.channel(i, "rms", "rms", c.Unit, computedFormat, func(l harmonics.Levels) float64 { return l.RMS })
	}
}

// tdd adds the total demand distortion of a current, which follows the demand current on sheet Site: the harmonics of
// the same row, in column thc, over it.
func (t *totals) tdd(i int, c harmonics.ChannelSummary, thc int) {
	role := string(c.Role)
	il := t.survey.Site.Supply.DemandCurrent
	t.add(role+" tdd", column{head: role + " TDD", unit: "% of IL", width: 9}, func(iv harmonics.Interval, row int) cell {
		if iv.Windows == 0 || math.IsNaN(iv.Channels[i].THC) {
			return none
		}
		v := math.NaN()
		if il > 0 {
			v = 100 * iv.Channels[i].THC / il
		}
		return number(v, computedFormat).orEmpty().live(fmt.Sprintf(`IF(N(%[1]s)>0,100*%[2]s/%[1]s,"")`, nameIL, at(thc+1, row)))
	})
}

func (t *totals) lay(name string) {
	s := t.sheet
	s.title("Series, intervals of " + name)
	s.note("One row an interval, all channels at once. Intervals that do not count in statistics are kept and flagged. Empty: not measured. THD and harmonics over orders 2 to 50, interharmonics not counted. Columns to the right of THD and TDD are not printed. "+t.firstHour(name), noteWidth)
	units := s.header(t.columns)
	s.freeze(units, 1, units-1)
	s.printed = t.printed
	t.first = units + 1
	for _, iv := range t.ivs {
		row := make([]cell, len(t.get))
		for i, get := range t.get {
			row[i] = get(iv, s.next())
		}
		s.add(row...)
	}
	t.last = s.next() - 1
	if t.last >= t.first {
		s.filter = fmt.Sprintf("A%d:%s", units, at(len(t.columns), t.last))
		t.name("Series_"+strings.NewReplacer(" ", "_", "(", "", ")", "").Replace(name), s.span(1, t.first, len(t.columns), t.last))
	}
}

// firstHour says so where only the first hour's intervals are kept.
func (t *totals) firstHour(name string) string {
	if strings.HasPrefix(name, "3 s") && float64(t.survey.Recording.Duration) > 3600+3 {
		return "Of 3 s intervals the first hour is kept here; statistics use all."
	}
	return ""
}

// orderSeries are the sheet of an interval series with every order of some channels.
type orderSeries struct {
	*book
	channels []int
	ivs      []harmonics.Interval
}

func (o *orderSeries) write(s *sheet, name, kind string) {
	s.title("Orders of the " + kind + ", intervals of " + name)
	s.note("h5: rms of the harmonic subgroup of order 5. ih5: rms of the interharmonic centred subgroup between orders 5 and 6. h0: magnitude of dc. Numbers to eight significant digits. For computing with: only the first page is printed.", noteWidth)
	units := s.header(o.columns())
	s.freeze(units, 2, units-1)
	s.printed, s.long = 16, min(len(o.ivs), 30)
	first := units + 1
	s.body = func(w io.Writer) error { return o.rows(w, first) }
	o.id(dateLook)
	o.id(momentLook)
	o.id(number(0, "0.0").style)
	o.id(style{indent: true})
	o.id(style{format: computedFormat})
	o.name("Orders_"+strings.NewReplacer(" ", "_", "(", "", ")", "").Replace(name)+"_"+string(kind[0]-'a'+'A'), s.span(1, units+1, len(o.columns()), units+len(o.ivs)))
}

func (o *orderSeries) columns() []column {
	head, _ := o.start()
	out := []column{head, {head: "Counts", unit: "in statistics", width: 11}}
	for _, i := range o.channels {
		c := o.survey.Summary.Channels[i]
		for _, kind := range []string{" h", " ih"} {
			for h := range harmonics.Orders {
				out = append(out, column{head: string(c.Role) + kind + itoa(h), unit: c.Unit, width: 9})
			}
		}
	}
	return out
}

// rows writes one row an interval, from the given row on. Numbers are rounded to eight significant digits as in
// survey.json: beyond any instrument, and half as long to write.
func (o *orderSeries) rows(w io.Writer, row int) error {
	_, start := o.start()
	level, words := o.styles[style{format: computedFormat}], o.styles[style{indent: true}]
	r := newRowWriter(w, 2+len(o.channels)*2*harmonics.Orders)
	for i, iv := range o.ivs {
		r.begin(row + i)
		when := start(iv)
		at, _ := when.value.(float64)
		r.value(at, o.styles[when.style])
		r.word(yesNo(iv.Valid()), words)
		for _, c := range o.channels {
			r.levels(iv.Channels[c].H, level)
			r.levels(iv.Channels[c].Inter, level)
		}
		r.end()
	}
	r.flush()
	return r.err
}

// levels writes the numbers of all orders.
func (r *rowWriter) levels(v []float64, look int) {
	for h := range harmonics.Orders {
		x := math.NaN()
		if h < len(v) {
			x = v[h]
		}
		r.value(rounded(x), look)
	}
}

// rounded keeps eight significant digits.
func rounded(v float64) float64 {
	if v == 0 || math.IsNaN(v) || math.IsInf(v, 0) {
		return v
	}
	exponent := 7 - int(math.Floor(math.Log10(math.Abs(v))))
	if exponent < 0 || exponent > 22 { // beyond what a power of ten is exact for
		return v
	}
	p := math.Pow10(exponent)
	return math.Round(v*p) / p
}
