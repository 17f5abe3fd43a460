package harmonics

// IEEE 519 asks for the 99th percentile of the 3 s values of each day, 28 800 of them. Only the highest are kept: the
// percentile is exact, and a week needs no more memory than a day.

const (
	daySeconds = 86400
	threesADay = daySeconds / 3
	dayKept    = threesADay/100 + 1
)

// A dayWatch gathers the upper end of each day's 3 s values. Days are counted from the first 3 s interval.
type dayWatch struct {
	days  []Day
	begun bool
	at    float64
	n     int
	level [][]highest // [channel][order]; [0] is the THC
	share [][]highest // the same, per cent of the fundamental; [0] is the THD
}

func (d *dayWatch) init(channels int) {
	d.level, d.share = make([][]highest, channels), make([][]highest, channels)
	for k := range channels {
		d.level[k], d.share[k] = make([]highest, Orders), make([]highest, Orders)
		for h := range Orders {
			d.level[k][h].k, d.share[k][h].k = dayKept, dayKept
		}
	}
}

func (d *dayWatch) add(v *Interval) {
	if d.begun && v.At-d.at >= daySeconds {
		d.close()
		for d.at += daySeconds; v.At-d.at >= daySeconds; {
			d.at += daySeconds
		}
	}
	if !d.begun {
		if len(d.days) == 0 {
			d.at = v.At
		}
		d.begun = true
	}
	d.n++
	for k := range v.Channels {
		l := &v.Channels[k]
		d.level[k][0].add(l.THC)
		d.share[k][0].add(100 * l.THC / l.H[1])
		for h := 1; h < Orders; h++ {
			d.level[k][h].add(l.H[h])
			d.share[k][h].add(100 * l.H[h] / l.H[1])
		}
	}
}

// close ends the day at hand.
func (d *dayWatch) close() {
	if !d.begun {
		return
	}
	day := Day{At: d.at, N: d.n, Want: threesADay, Channels: make([]DayLevels, len(d.level))}
	for k := range day.Channels {
		l := DayLevels{Level: make([]float64, Orders), Share: make([]float64, Orders)}
		for h := 1; h < Orders; h++ {
			l.Level[h], l.Share[h] = d.level[k][h].percentile(99), d.share[k][h].percentile(99)
		}
		l.THC, l.THD = d.level[k][0].percentile(99), d.share[k][0].percentile(99)
		for h := range Orders {
			d.level[k][h].reset()
			d.share[k][h].reset()
		}
		day.Channels[k] = l
	}
	d.days = append(d.days, day)
	d.begun, d.n = false, 0
}
