package synth

import (
	"fmt"
	"iter"
	"math"
	"math/rand/v2"
	"slices"

	"wavetally/harmonics/wave"
)

// New returns the recording as a source. It panics on a description that makes no sense.
func New(r Recording) wave.Source {
	if !(r.Rate > 0) || !(r.Seconds > 0) || len(r.Channels) == 0 {
		panic(fmt.Sprintf("synth: rate %g, %g s, %d channels: all must be positive", r.Rate, r.Seconds, len(r.Channels)))
	}
	for _, c := range r.Channels {
		if c.Bits > 0 && !(c.Range > 0) {
			panic("synth: channel " + c.Name + " has bits but no range")
		}
		for _, h := range c.Harmonics {
			if h.Order < 1 {
				panic(fmt.Sprintf("synth: channel %s has order %d", c.Name, h.Order))
			}
		}
	}
	if r.BlockLen == 0 {
		r.BlockLen = wave.BlockLen
	}
	return &source{r}
}

type source struct{ Recording }

func (s *source) Notes() []wave.Note { return nil }

func (s *source) Header() wave.Header {
	h := wave.Header{
		Files:   []wave.File{{Name: s.Name, Path: s.Name, Format: "generated"}},
		Start:   s.Start,
		HasZone: !s.Start.IsZero(),
		Rate:    s.Rate,
		Nominal: s.Nominal,
	}
	for first, next := range s.segments() {
		h.Samples += next - first
	}
	for _, c := range s.Channels {
		h.Channels = append(h.Channels, wave.Channel{Name: c.Name, Unit: c.Unit, FileUnit: c.Unit, Phase: c.Phase,
			Step: c.step(), Low: -c.Range, High: c.Range, Skew: c.Skew})
	}
	return h
}

// segments yields the first sample of each segment and the one after its last.
func (s *source) segments() iter.Seq2[int64, int64] {
	total := int64(math.Round(s.Seconds * s.Rate))
	gaps := slices.SortedFunc(slices.Values(s.Gaps), func(a, b Span) int { return int(math.Copysign(1, a.At-b.At)) })
	return func(yield func(int64, int64) bool) {
		first := int64(0)
		for _, g := range gaps {
			from, to := s.sampleAt(g.At), s.sampleAt(g.At+g.Length)
			if from >= total {
				break
			}
			if from > first && !yield(first, from) {
				return
			}
			first = max(first, to)
		}
		if first < total {
			yield(first, total)
		}
	}
}

// sampleAt returns the first sample at or after t.
func (s *source) sampleAt(t float64) int64 {
	n := int64(math.Ceil(t*s.Rate - 1e-6)) // a gap meant to begin on a sample does, whatever the last bit of t says
	return max(n, 0)
}

func (s *source) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		g := newGenerator(s.Recording)
		segment := 0
		for first, next := range s.segments() {
			for n := first; n < next; n += int64(s.BlockLen) {
				rows := g.block(n, int(min(int64(s.BlockLen), next-n)))
				if !yield(wave.Block{Segment: segment, At: float64(n) / s.Rate, Rate: s.Rate, Data: rows}, nil) {
					return
				}
			}
			segment++
		}
	}
}

// chunk is how many samples are made at a time: the powers of the fundamental's phasor for all orders then stay in cache.
const chunk = 256

// A generator makes blocks. Its noise makes it single-use: blocks must be asked for in order.
type generator struct {
	Recording
	noise    []*rand.Rand
	rows     [][]float64
	times    [chunk]float64
	cos, sin [][chunk]float64 // [order] of the fundamental's phase at times
	skew     float64          // that cos and sin were made for
	load     [chunk]float64
}

func newGenerator(r Recording) *generator {
	g := &generator{Recording: r}
	top := 1
	for i, c := range r.Channels {
		g.noise = append(g.noise, rand.New(rand.NewPCG(r.Seed, uint64(i))))
		g.rows = append(g.rows, make([]float64, r.BlockLen))
		for _, h := range c.Harmonics {
			top = max(top, h.Order)
		}
	}
	g.cos = make([][chunk]float64, top+1)
	g.sin = make([][chunk]float64, top+1)
	return g
}

// block returns n samples of every channel, from sample first on.
func (g *generator) block(first int64, n int) [][]float64 {
	out := make([][]float64, len(g.rows))
	for c := range out {
		out[c] = g.rows[c][:n]
	}
	for from := 0; from < n; from += chunk {
		count := min(chunk, n-from)
		g.skew = math.NaN()
		for c := range g.Channels {
			ch := &g.Channels[c]
			if ch.Skew != g.skew {
				g.turn(first+int64(from), count, ch.Skew)
			}
			g.fill(out[c][from:from+count], ch, g.noise[c])
		}
	}
	return out
}

// turn sets times, cos and sin for count samples. One sine and cosine a sample is exact; the orders above are its
// powers, where the rounding of fifty multiplications stays under 1e-14.
func (g *generator) turn(first int64, count int, skew float64) {
	g.skew = skew
	for i := range count {
		t := float64(first+int64(i))/g.Rate + skew
		_, cycles := math.Modf(g.Frequency.Phase(t))
		g.times[i] = t
		g.sin[1][i], g.cos[1][i] = math.Sincos(2 * math.Pi * cycles)
	}
	for h := 2; h < len(g.cos); h++ {
		for i := range count {
			c, s := g.cos[h-1][i], g.sin[h-1][i]
			g.cos[h][i] = c*g.cos[1][i] - s*g.sin[1][i]
			g.sin[h][i] = s*g.cos[1][i] + c*g.sin[1][i]
		}
	}
}

func (g *generator) fill(row []float64, c *Channel, noise *rand.Rand) {
	clear(row)
	for _, h := range c.Harmonics {
		g.addHarmonic(row, h)
	}
	if load := g.envelope(c, len(row)); load != nil {
		for i := range row {
			row[i] *= load[i]
		}
	}
	for _, tone := range c.Tones {
		g.addTone(row, tone)
	}
	for i := range row {
		row[i] += c.DC
		if c.Noise > 0 {
			row[i] += c.Noise * noise.NormFloat64()
		}
		row[i] = c.digitise(row[i])
		for _, m := range c.Missing {
			if m.holds(g.times[i]) {
				row[i] = math.NaN()
			}
		}
	}
}

func (g *generator) addHarmonic(row []float64, h Harmonic) {
	sin, cos := math.Sincos(radians(h.Angle))
	a, b := math.Sqrt2*h.RMS*cos, math.Sqrt2*h.RMS*sin
	turnCos, turnSin := &g.cos[h.Order], &g.sin[h.Order]
	if h.Depth == 0 && h.Load == nil {
		for i := range row {
			row[i] += a*turnCos[i] - b*turnSin[i]
		}
		return
	}
	for i := range row {
		f := 1.0
		if h.Depth != 0 {
			f += h.Depth * math.Cos(2*math.Pi*h.ModHz*g.times[i]+radians(h.ModAngle))
		}
		if h.Load != nil {
			f *= h.Load(g.times[i])
		}
		row[i] += f * (a*turnCos[i] - b*turnSin[i])
	}
}

func (g *generator) addTone(row []float64, tone Tone) {
	for i := range row {
		t := g.times[i]
		if t < tone.From || (tone.To > 0 && t >= tone.To) {
			continue
		}
		_, cycles := math.Modf(tone.Hz * t)
		row[i] += math.Sqrt2 * tone.RMS * math.Cos(2*math.Pi*cycles+radians(tone.Angle))
	}
}

// envelope returns what multiplies a channel's harmonics, nil for 1.
func (g *generator) envelope(c *Channel, n int) []float64 {
	if c.Load == nil && len(c.Dips) == 0 {
		return nil
	}
	out := g.load[:n]
	for i := range out {
		out[i] = 1
		if c.Load != nil {
			out[i] = c.Load(g.times[i])
		}
		for _, d := range c.Dips {
			if (Span{d.At, d.Length}).holds(g.times[i]) {
				out[i] *= 1 - d.Depth
			}
		}
	}
	return out
}

// step returns the size of one step of the channel's converter, 0 without one.
func (c *Channel) step() float64 {
	if c.Bits == 0 {
		return 0
	}
	return 2 * c.Range / math.Exp2(float64(c.Bits))
}

// digitise clips to the range and rounds to whole steps; the highest code is one step below the upper end, as in a
// two's complement converter.
func (c *Channel) digitise(x float64) float64 {
	if c.Range == 0 {
		return x
	}
	x = max(-c.Range, min(x, c.Range))
	step := c.step()
	if step == 0 {
		return x
	}
	return min(math.Round(x/step)*step, c.Range-step)
}
