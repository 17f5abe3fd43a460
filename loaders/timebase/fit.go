// Package timebase finds the sampling rate behind the time stamps of a table's rows, and notices while reading where
// rows are lost or the clock jumps.
//
// Stamps are often far coarser than the sampling interval, or written with few digits. The rate is therefore taken from
// many rows at once: each stamp bounds the row's true time to within its own resolution, and a rate is possible when
// one straight line passes all those bounds. Of the possible rates the simplest number is taken, since instruments
// sample at such rates; any possible rate is as true to the stamps.
package timebase

import (
	"errors"
	"math"
	"slices"
)

// A Point is one row's stamp.
type Point struct {
	Row  int64
	T    float64 // s, from any origin
	Step float64 // s, the resolution that the stamp is written with
}

// A Fit is a sampling interval found from stamps.
type Fit struct {
	Interval float64 // s between rows
	Low, Top float64 // s, the least and largest interval that the stamps allow
	Jitter   float64 // s, peak to peak, by which stamps stray from even steps beyond their resolution; 0: not at all
	Points   int     // that the fit rests on
	Exact    bool    // the stamps agree with Rate far closer than their resolution asks for
}

// Rate is the sampling rate in samples per second: the simplest possible one, or the best estimate when stamps jitter.
func (f Fit) Rate() float64 {
	if f.Jitter > 0 {
		return 1 / f.Interval
	}
	return simplest(f.Low, f.Top)
}

// Uncertainty is the half width of the range of possible rates, as a share of the rate.
func (f Fit) Uncertainty() float64 { return (f.Top - f.Low) / 2 / f.Interval }

// Sure reports whether the rate is known for all that it is used for: closely enough, or because a number as simple as
// it would hardly lie among the possible ones by chance.
func (f Fit) Sure() bool {
	if f.Uncertainty() < 2e-5 || f.Exact {
		return true
	}
	_, rate := roundest(1/f.Top, 1/f.Low)
	_, interval := roundest(f.Low, f.Top)
	return f.Jitter == 0 && math.Pow10(min(rate, interval))*2*f.Uncertainty() < 0.25
}

// Errors of From.
var (
	ErrTooFew   = errors.New("too few time stamps")
	ErrStanding = errors.New("the time stamps do not advance")
	ErrUneven   = errors.New("the time stamps advance too unevenly")
	ErrCoarse   = errors.New("the time stamps change too seldom")
)

// From fits the interval of points, which are in the order of their rows. Gaps and jumps of the clock are left out: the
// longest run of even steps counts. The origin is the stamp value of T = 0; single-precision rounding grows with it.
func From(points []Point, origin float64) (Fit, error) {
	if len(points) < 3 {
		return Fit{}, ErrTooFew
	}
	rough := roughInterval(points)
	if !(rough > 0) {
		return Fit{}, ErrStanding
	}
	run := longestRun(points, rough, 0.03)
	for range 2 { // a better interval cuts at gaps more surely
		if len(run) >= 3 {
			rough = slope(run)
			run = longestRun(points, rough, 0.002)
		}
	}
	if len(run) < 3 {
		return Fit{}, ErrTooFew
	}
	f := bound(run, slope(run), origin)
	span := f.Interval * float64(run[len(run)-1].Row-run[0].Row)
	if !(f.Interval > 1e-12 && f.Interval < 1e6 && f.Low > 0 && f.Uncertainty() < 0.1 && f.Jitter < 0.1*span) {
		return Fit{}, ErrUneven
	}
	return f, nil
}

// roughInterval is the interval that half of all pairs of rows agree on, the rows being as far apart as their resolution
// and jitter need for that.
func roughInterval(points []Point) float64 {
	for lag := 1; ; lag *= 2 {
		slopes := make([]float64, 0, len(points))
		for i := 0; i+lag < len(points); i++ {
			a, b := points[i], points[i+lag]
			slopes = append(slopes, (b.T-a.T)/float64(b.Row-a.Row))
		}
		slices.Sort(slopes)
		low, high := shortestHalf(slopes)
		switch middle := (low + high) / 2; {
		case middle > 0 && high-low < 0.03*middle:
			return middle
		case lag*4 > len(points):
			return slopes[len(slopes)/2]
		}
	}
}

// shortestHalf is the narrowest range that holds half of the sorted values.
func shortestHalf(sorted []float64) (low, high float64) {
	half := len(sorted) / 2
	low, high = sorted[0], sorted[len(sorted)-1]
	for i := 0; i+half < len(sorted); i++ {
		if sorted[i+half]-sorted[i] < high-low {
			low, high = sorted[i], sorted[i+half]
		}
	}
	return low, high
}

// longestRun is the longest stretch of rows whose steps are even, within the resolution, a share of slack, and where
// stamps jitter beyond these, four times what nine steps in ten keep to.
func longestRun(points []Point, interval, slack float64) []Point {
	offs := make([]float64, len(points)-1)
	for i := range offs {
		offs[i] = math.Abs(points[i+1].T - points[i].T - interval*float64(points[i+1].Row-points[i].Row))
	}
	sorted := slices.Clone(offs)
	slices.Sort(sorted)
	usual := sorted[len(sorted)*9/10]
	best, start := points[:0], 0
	for i := 1; i <= len(points); i++ {
		if i < len(points) {
			a, b := points[i-1], points[i]
			allowed := 0.75*interval + max(a.Step, b.Step)
			if usual > 2*allowed {
				allowed = 4 * usual
			}
			if offs[i-1] <= allowed+slack*interval*float64(b.Row-a.Row) {
				continue
			}
		}
		if run := points[start:i]; len(best) == 0 || run[len(run)-1].Row-run[0].Row > best[len(best)-1].Row-best[0].Row {
			best = run
		}
		start = i
	}
	return best
}

// slope is the least-squares interval.
func slope(points []Point) float64 {
	var n, sx, sy, sxx, sxy float64
	x0, y0 := points[0].Row, points[0].T
	for _, p := range points {
		x, y := float64(p.Row-x0), p.T-y0
		n++
		sx += x
		sy += y
		sxx += x * x
		sxy += x * y
	}
	return (n*sxy - sx*sy) / (n*sxx - sx*sx)
}

// bound finds the range of intervals by which one straight line passes all stamps within their resolution.
func bound(points []Point, start, origin float64) Fit {
	points = few(points, 1200)
	f := Fit{Points: len(points)}
	steps := make([]float64, len(points))
	for i, p := range points {
		steps[i] = p.Step
	}
	slices.Sort(steps)
	span := float64(points[len(points)-1].Row - points[0].Row)
	f.Interval = minimum(func(b float64) float64 { return excess(points, b, once, origin) }, start, max(0.01*start, 4*steps[len(steps)/2]/span))
	for _, r := range []rounding{once, twice, single} {
		g := func(b float64) float64 { return excess(points, b, r, origin) }
		if g(f.Interval) <= 0 {
			f.Low, f.Top = edge(g, f.Interval, -1), edge(g, f.Interval, +1)
			f.Exact = len(points) >= 10 && excess(points, 1/f.Rate(), rounding{steps: 0.005}, origin) <= 0
			return f
		}
	}
	f.Jitter = excess(points, f.Interval, once, origin)
	f.Interval = start
	spread := f.Jitter / span / math.Sqrt(float64(len(points))) * 2
	f.Low, f.Top = start-spread, start+spread
	return f
}

// few thins points to about n, in neighbouring pairs, because where a coarse stamp changes the two rows beside it say
// the most.
func few(points []Point, n int) []Point {
	if len(points) <= n {
		return points
	}
	every := (len(points) + n - 1) / n * 2
	var kept []Point
	for i := 1; i < len(points); i++ {
		change := points[i].T != points[i-1].T
		if !change {
			continue
		}
		kept = append(kept, points[i-1], points[i])
		i += every - 2
	}
	return append(kept, points[len(points)-1])
}

// A rounding is how far a stamp may be off: so many of its own steps, and a share of its value.
type rounding struct{ steps, share float64 }

// Roundings that stamps have been through: as written, when they were rounded before they were cut to their decimals,
// and when they were held as single-precision numbers, whose spacing near 1 is 2^-23.
var (
	once   = rounding{steps: 0.5}
	twice  = rounding{steps: 1}
	single = rounding{steps: 0.5, share: 1.0 / (1 << 23)}
)

// excess is how far the stamps are from passing one line of the given slope within their resolution, in s; it is at
// most 0 when they do. It is a convex function of the slope.
func excess(points []Point, slope float64, r rounding, origin float64) float64 {
	low, top := math.Inf(-1), math.Inf(1)
	x0 := points[0].Row
	for _, p := range points {
		tolerance := p.Step*r.steps*(1+1e-6) + (r.share+4e-16)*math.Abs(p.T+origin)
		rest := p.T - slope*float64(p.Row-x0)
		low, top = max(low, rest-tolerance), min(top, rest+tolerance)
	}
	return low - top
}

// minimum finds where a convex function is least, near start.
func minimum(f func(float64) float64, start, reach float64) float64 {
	a, b := start-reach, start+reach
	for range 70 {
		third := (b - a) / 3
		if f(a+third) < f(b-third) {
			b -= third
		} else {
			a += third
		}
	}
	return (a + b) / 2
}

// edge finds, from a place inside, how far f stays at most 0 in one direction.
func edge(f func(float64) float64, inside, direction float64) float64 {
	reach := inside * 1e-9
	for reach < inside && f(inside+direction*reach) <= 0 {
		reach *= 2
	}
	in, out := inside, inside+direction*reach
	for range 60 {
		middle := (in + out) / 2
		if f(middle) <= 0 {
			in = middle
		} else {
			out = middle
		}
	}
	return in
}

// simplest returns the rate with the fewest digits whose interval lies in [low, top]; an interval with fewer digits
// than any such rate gives the rate instead. Without a short number it is the middle.
func simplest(low, top float64) float64 {
	middle := 2 / (low + top)
	rate, rateDigits := roundest(1/top, 1/low)
	interval, intervalDigits := roundest(low, top)
	switch {
	case rateDigits <= intervalDigits && rateDigits <= 12:
		return rate
	case intervalDigits <= 12:
		return 1 / interval
	}
	return middle
}

// roundest finds the number with the fewest decimal digits in [low, top], nearest the middle among equals.
func roundest(low, top float64) (value float64, digits int) {
	exponent := math.Floor(math.Log10(top))
	for digits = 1; digits <= 15; digits++ {
		unit := math.Pow(10, exponent+1-float64(digits))
		inverse := math.Pow(10, -(exponent + 1 - float64(digits)))
		n := math.Round((low + top) / 2 * inverse)
		if n*unit < low {
			n++
		} else if n*unit > top {
			n--
		}
		// Dividing keeps 0.0001 = 1/10000 exact where multiplying by 1e-4 would not.
		v := n * unit
		if unit < 1 {
			v = n / inverse
		}
		if n > 0 && v >= low && v <= top {
			return v, digits
		}
	}
	return (low + top) / 2, 99
}
