package report

import (
	"math"
	"slices"
	"time"

	"wavetally/harmonics"
	"wavetally/harmonics/site"
)

// What follows serves comparison from month to month, which wants levels in V and A rather than shares of a fundamental
// that changes with the load, and levels at the same load.

// LevelStats are statistics of a level over valid intervals, in the channel's unit: of 10 min intervals where there are
// any, else of 3 s intervals.
type LevelStats struct {
	Interval Number `json:"interval_s"` // 600 or 3
	N        int    `json:"n"`
	P50      Number `json:"p50"`
	P95      Number `json:"p95"`
	P99      Number `json:"p99"`
	Max      Number `json:"max"`
}

// Coverage counts the 10 min intervals of a recording.
type Coverage struct {
	Intervals int `json:"intervals_10min"` // that the recording spans
	Valid     int `json:"valid_10min"`
	Weekday   int `json:"valid_weekday"` // of the valid ones, Monday to Friday in the site's time zone; 0 when the start is unknown
}

// A LoadBin holds the medians of a current's harmonics over the valid 10 min intervals in which its fundamental was
// within [Low, High), A.
type LoadBin struct {
	Low     Number   `json:"low"`
	High    Number   `json:"high"`
	N       int      `json:"n"`
	Medians []Number `json:"medians"` // A, [order-1]
}

func levelStatsOf(threes, tens harmonics.Stats) *LevelStats {
	s, interval := tens, 600.0
	if tens.N == 0 {
		s, interval = threes, 3
	}
	if s.N == 0 {
		return nil
	}
	return &LevelStats{Number(interval), s.N, Number(s.P50), Number(s.P95), Number(s.P99), Number(s.Max)}
}

func coverageOf(sum *harmonics.Summary, zone string) Coverage {
	c := Coverage{Intervals: int(math.Ceil(sum.Duration / 600))}
	for _, v := range sum.Tens {
		if !v.Valid() {
			continue
		}
		c.Valid++
		if sum.Start.IsZero() {
			continue
		}
		if day := sum.Start.Add(time.Duration(v.At * 1e9)).In(location(zone)).Weekday(); day != 0 && day != 6 {
			c.Weekday++
		}
	}
	return c
}

// loadBinsOf sorts the 10 min intervals of channel k by its fundamental. The bins are the same in every recording of a
// site: fifths of the declared demand current, or, where none is declared, steps of √2 in ampere.
func loadBinsOf(sum *harmonics.Summary, k int, supply site.Supply) []LoadBin {
	c := &sum.Channels[k]
	if !c.Role.Current() || c.Role.Neutral() {
		return nil
	}
	edge := func(i int) float64 { return math.Pow(2, float64(i)/2) }
	bin := func(a float64) int { return int(math.Floor(2 * math.Log2(a))) }
	if d := supply.DemandCurrent; d > 0 {
		edge = func(i int) float64 { return float64(i) * d / 5 }
		bin = func(a float64) int { return int(math.Floor(5 * a / d)) }
	}
	values := map[int][][]float64{} // [bin][order-1]
	low, high := math.MaxInt, math.MinInt
	for _, v := range sum.Tens {
		if !v.Valid() || !(v.Channels[k].H[1] > 0) {
			continue
		}
		i := bin(v.Channels[k].H[1])
		low, high = min(low, i), max(high, i)
		if values[i] == nil {
			values[i] = make([][]float64, harmonics.MaxOrder)
		}
		for h := 1; h <= harmonics.MaxOrder; h++ {
			values[i][h-1] = append(values[i][h-1], v.Channels[k].H[h])
		}
	}
	var out []LoadBin
	for i := low; i <= high; i++ {
		v := values[i]
		if v == nil {
			continue
		}
		b := LoadBin{Low: Number(edge(i)), High: Number(edge(i + 1)), N: len(v[0])}
		for _, levels := range v {
			b.Medians = append(b.Medians, Number(medianOf(levels)))
		}
		out = append(out, b)
	}
	return out
}

// location is that of an IANA name, UTC where there is none of that name.
func location(zone string) *time.Location {
	if l, err := time.LoadLocation(zone); err == nil {
		return l
	}
	return time.UTC
}

// medianOf is the middle of the values that were measured; it sorts v.
func medianOf(v []float64) float64 {
	v = slices.DeleteFunc(v, math.IsNaN)
	if len(v) == 0 {
		return math.NaN()
	}
	slices.Sort(v)
	m := len(v) / 2
	if len(v)%2 == 1 {
		return v[m]
	}
	return (v[m-1] + v[m]) / 2
}
