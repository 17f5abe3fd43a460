package harmonics

import (
	"math"

	"gonum.org/v1/gonum/mat"
)

// Captures shorter than a window, an oscilloscope's or a relay's few cycles, are measured over the whole cycles they
// have. The frequency is the one whose harmonics, fitted by least squares, leave the least of the samples over.

// A piece is a segment too short for a window.
type piece struct {
	at, rate float64
	data     [][]float64
	missing  uint16
}

// maxPieces is how many of them are kept: a series of snapshots longer than this is measured on its beginning.
const maxPieces = 512

func newPiece(s *segment) piece {
	p := piece{at: s.at + float64(s.batch.base)/s.rate, rate: s.rate, data: make([][]float64, len(s.batch.data))}
	for k, d := range s.batch.data {
		p.data[k] = append([]float64(nil), d...)
	}
	for _, h := range s.holes {
		p.missing |= 1 << h.channel
	}
	return p
}

// cutShort cuts each piece into one window of the cycles that all of them have. A piece of just ten (twelve) cycles
// makes a whole window.
func (c *cutter) cutShort() {
	var hz []float64
	whole := math.MaxInt
	low, high := band(c.nominal)
	for i := range c.short {
		f := c.frequencyOf(&c.short[i], low, high)
		hz = append(hz, f)
		if n := wholeCycles(c.short[i], f); n > 0 {
			whole = min(whole, n)
			low, high = max(low, f-1), min(high, f+1) // the others are of the same supply
		}
	}
	if whole == math.MaxInt {
		return
	}
	for i, p := range c.short {
		if wholeCycles(p, hz[i]) < whole {
			continue
		}
		c.settle(hz[i])
		c.linesOnly = whole < c.cycles
		c.cycles = min(whole, c.cycles)
		c.cutPiece(p, hz[i])
	}
}

// wholeCycles allows for the sample that would close the last cycle.
func wholeCycles(p piece, hz float64) int {
	if hz == 0 {
		return 0
	}
	return int((float64(len(p.data[0])) + 1) * hz / p.rate)
}

func (c *cutter) cutPiece(p piece, hz float64) {
	f := newFrame(p.rate, hz, c.cycles)
	if f.top < 1 {
		c.slow = p.rate
		return
	}
	kernel := newKernel(p.rate, hz, f)
	length := float64(c.cycles) * p.rate / hz
	c.seg = segment{at: p.at, rate: p.rate, frame: f, kernel: kernel, batch: c.fresh()}
	pad := kernel.Taps()/2 + 1 + c.skew()
	for k, x := range p.data {
		c.seg.batch.data[k] = append(c.seg.batch.data[k], around(x, length, pad)...)
	}
	c.seg.batch.cuts = append(c.seg.batch.cuts, cut{start: float64(pad), length: length, at: p.at, span: length / p.rate,
		hz: hz, missing: p.missing, breaks: true})
	if p.missing&(1<<c.reference) != 0 {
		c.seg.batch.cuts[0].flags |= Missing
	}
	c.windows++
	c.dispatch(c.seg.batch)
	c.seg.batch = nil
}

// around continues x, taken as periodic over length samples, by pad samples on either side.
func around(x []float64, length float64, pad int) []float64 {
	out := make([]float64, 0, len(x)+2*pad+2)
	for i := -pad; i < len(x)+pad+1; i++ {
		switch at := float64(i); {
		case i < 0:
			out = append(out, cubic(x, at+length))
		case i >= len(x):
			out = append(out, cubic(x, at-length))
		default:
			out = append(out, x[i])
		}
	}
	return out
}

// cubic reads x between its samples by the cubic through four of them.
func cubic(x []float64, at float64) float64 {
	i := min(max(int(math.Floor(at)), 1), len(x)-3)
	if len(x) < 4 {
		return x[min(max(int(at+0.5), 0), len(x)-1)]
	}
	t := at - float64(i)
	a, b, c, d := x[i-1], x[i], x[i+1], x[i+2]
	return -t*(t-1)*(t-2)/6*a + (t+1)*(t-1)*(t-2)/2*b - (t+1)*t*(t-2)/2*c + (t+1)*t*(t-1)/6*d
}

// frequencyOf returns the fundamental of a piece, or 0 when it has less than a cycle or none is to be seen.
func (c *cutter) frequencyOf(p *piece, low, high float64) float64 {
	n := len(p.data[0])
	cycles := float64(n+1) * low / p.rate
	if c.reference < 0 {
		c.reference = reference(c.channels, spreads(p.data))
	}
	x := p.data[c.reference]
	if spread(x) == 0 || float64(n+1)*high/p.rate < 1 {
		return 0
	}
	if cycles < 1.2 {
		// One cycle repeats nothing: its length cannot be seen, only taken as the nominal one.
		if c.nominal == 0 || float64(n+1)*c.nominal/p.rate < 1 {
			return 0
		}
		return c.nominal
	}
	x, rate := thin(x, p.rate)
	leftover := func(hz float64) float64 { return residual(x, rate, hz) }
	steps := max(8, int(2*(high-low)))
	best, least := low, math.Inf(1)
	for i := range steps + 1 {
		hz := low + (high-low)*float64(i)/float64(steps)
		if r := leftover(hz); r < least {
			best, least = hz, r
		}
	}
	if power := spread(x); least > 0.5*power*power*float64(len(x)) {
		return 0
	}
	step := (high - low) / float64(steps)
	return golden(leftover, best-step, best+step)
}

func spreads(data [][]float64) []float64 {
	out := make([]float64, len(data))
	for k, x := range data {
		out[k] = spread(x)
	}
	return out
}

// spread is the rms of x about its mean.
func spread(x []float64) float64 {
	var mean, sum float64
	for _, v := range x {
		mean += v / float64(len(x))
	}
	for _, v := range x {
		sum += (v - mean) * (v - mean)
	}
	return math.Sqrt(sum / float64(len(x)))
}

// thin averages runs of samples so that about 1000 are left: the frequency needs no more.
func thin(x []float64, rate float64) ([]float64, float64) {
	run := len(x) / 1000
	if run < 2 || rate/float64(run) < 3200 {
		return x, rate
	}
	out := make([]float64, 0, len(x)/run)
	for i := 0; i+run <= len(x); i += run {
		var s float64
		for _, v := range x[i : i+run] {
			s += v
		}
		out = append(out, s/float64(run))
	}
	return out, rate / float64(run)
}

// residual fits dc and the harmonics of hz to x and returns the sum of squares left over.
func residual(x []float64, rate, hz float64) float64 {
	orders := min(15, int(0.4*rate/hz), (len(x)-1)/4)
	a := mat.NewDense(len(x), 2*orders+1, nil)
	for i := range x {
		a.Set(i, 0, 1)
		s1, c1 := math.Sincos(2 * math.Pi * hz * float64(i) / rate)
		s, c := s1, c1
		for h := range orders {
			a.Set(i, 2*h+1, c)
			a.Set(i, 2*h+2, s)
			c, s = c*c1-s*s1, s*c1+c*s1
		}
	}
	var qr mat.QR
	qr.Factorize(a)
	var fit, left mat.VecDense
	b := mat.NewVecDense(len(x), x)
	if err := qr.SolveVecTo(&fit, false, b); err != nil {
		return math.Inf(1)
	}
	left.MulVec(a, &fit)
	left.SubVec(b, &left)
	return mat.Dot(&left, &left)
}

// golden finds the minimum of f between a and b by golden sections.
func golden(f func(float64) float64, a, b float64) float64 {
	const g = 0.6180339887498949
	x, y := b-g*(b-a), a+g*(b-a)
	fx, fy := f(x), f(y)
	for range 40 {
		if fx < fy {
			b, y, fy = y, x, fx
			x = b - g*(b-a)
			fx = f(x)
		} else {
			a, x, fx = x, y, fy
			y = a + g*(b-a)
			fy = f(y)
		}
	}
	return (a + b) / 2
}
