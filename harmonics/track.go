package harmonics

import (
	"math"
	"math/cmplx"
	"slices"
)

// The fundamental is followed by its phase. The reference channel is cut into frames of five cycles, half overlapping;
// each, under a Hann window and against a carrier of exactly five cycles a frame, gives the phase of the fundamental
// at its middle. The frame's transform is zero at the harmonics of its carrier, so distortion does not pull it.
//
// The frequency of a window is the slope of a parabola fitted to the phases of its neighbourhood, about a second:
// enough to average noise and interharmonics out, and exact for a frequency that drifts evenly. Where the phases do not
// lie on a parabola, because the frequency jumped, the window's own ten cycles decide alone.
const (
	frameCycles = 5
	// reach is how far before and after a window, in seconds, phases take part in its fit.
	reach = 0.45
	// bent is the rms residual in radians above which a fit is not believed. Noise of 40 dB gives 0.001, an
	// interharmonic of 2 % next to the fundamental 0.014; a step of 0.1 Hz gives 0.02, one of 0.5 Hz 0.1.
	bent = 0.02
	// noisy is the ratio of that residual to the scatter of neighbouring phases up to which it is noise after all: heavy
	// noise scatters every phase, a step bends the line at one place only.
	noisy = 2.5
	// fineCycles is the length of the frames by which a window alone is measured where that fit is not believed.
	fineCycles = 2
	// The frequency is said to have stepped inside a window whose phases are further than jump, rms radians, from a
	// parabola, or whose parabola says that it drifts faster than rush, in Hz/s. A step of 0.5 Hz passes the second in
	// the middle of a window and the first near its ends. Noise of 40 dB gives 0.001.
	jump = 0.003
	rush = 2.5
	// retune is how far the frequency may be from the carrier, as a share of it, before a new carrier is made.
	retune = 0.002
	// weak is the share of the usual amplitude below which the fundamental counts as lost.
	weak = 0.1
)

// A carrier turns a frame of samples into the phasor of its fundamental.
type carrier struct {
	hz       float64
	length   int       // samples
	cos, sin []float64 // Hann window times carrier, carrier phase 0 in the middle of the frame
}

func newCarrier(cycles int, hz, rate float64) *carrier {
	n := int(math.Round(float64(cycles) * rate / hz))
	c := &carrier{length: n, cos: make([]float64, n), sin: make([]float64, n)}
	c.hz = float64(cycles) * rate / float64(n)
	for i := range n {
		// The middle of samples 0..n-1 taken as the points of a periodic window is i = n/2.
		t := float64(i) - float64(n)/2
		hann := (1 + math.Cos(2*math.Pi*t/float64(n))) / float64(n) * math.Sqrt2
		sin, cos := math.Sincos(2 * math.Pi * float64(cycles) * t / float64(n))
		c.cos[i], c.sin[i] = hann*cos, -hann*sin
	}
	return c
}

// phasor returns the rms phasor at the middle of the frame, sample len/2.
func (c *carrier) phasor(x []float64) complex128 {
	var re, im float64
	x = x[:len(c.cos)]
	sin := c.sin[:len(c.cos)]
	for i, v := range c.cos {
		re += v * x[i]
		im += sin[i] * x[i]
	}
	return complex(re, im)
}

// A mark is the phase of the fundamental at one time.
type mark struct {
	at    float64 // sample
	phase float64 // radians, unwrapped
	amp   float64 // rms
}

// A tracker follows the fundamental through one segment. Positions are samples from the start of the segment.
type tracker struct {
	rate      float64
	low, high float64
	carrier   *carrier
	fine      *carrier // of fineCycles; made when first needed
	next      int      // first sample of the next frame
	marks     []mark
	hz        float64   // latest estimate
	left      []float64 // scratch: what the last fit left over
	usual     float64   // running amplitude of the fundamental, rms
}

func newTracker(rate, hz, low, high, amp float64) *tracker {
	return &tracker{rate: rate, low: low, high: high, carrier: newCarrier(frameCycles, hz, rate), hz: hz, usual: amp}
}

// need returns the sample up to which the reference must be known before the window [start, start+length) can be
// fitted with all its neighbourhood.
func (t *tracker) need(start, length float64) int {
	return int(start+length+reach*t.rate) + t.carrier.length + 2
}

// extend makes marks from x, the reference's samples from position base on, as far as they go.
func (t *tracker) extend(x []float64, base int) {
	for t.next-base+t.carrier.length <= len(x) {
		c := t.carrier
		p := c.phasor(x[t.next-base:])
		m := mark{at: float64(t.next) + float64(c.length)/2, phase: cmplx.Phase(p), amp: cmplx.Abs(p)}
		if k := len(t.marks); k > 0 {
			last := t.marks[k-1]
			ahead := last.phase + 2*math.Pi*t.hz/t.rate*(m.at-last.at)
			m.phase += 2 * math.Pi * math.Round((ahead-m.phase)/(2*math.Pi))
			if hz := t.rate * (m.phase - last.phase) / (2 * math.Pi * (m.at - last.at)); m.amp > weak*t.usual && hz > t.low && hz < t.high {
				t.hz += 0.2 * (hz - t.hz)
			}
		}
		t.marks = append(t.marks, m)
		t.usual += 0.02 * (m.amp - t.usual)
		t.next += c.length / 2
		if math.Abs(t.hz-c.hz) > retune*c.hz && newLength(t.hz, t.rate) != c.length {
			t.carrier, t.fine = newCarrier(frameCycles, t.hz, t.rate), nil
		}
	}
}

func newLength(hz, rate float64) int { return int(math.Round(frameCycles * rate / hz)) }

// forget drops marks that no window from start on needs.
func (t *tracker) forget(start float64) {
	k := 0
	for k < len(t.marks) && t.marks[k].at < start-(reach+0.5)*t.rate {
		k++
	}
	t.marks = append(t.marks[:0], t.marks[k:]...)
}

// window returns the length in samples of the window of the given number of cycles that begins at start, and flags.
// x holds the reference's samples from position base on.
func (t *tracker) window(start float64, cycles int, x []float64, base int) (length float64, flags Flags) {
	length = float64(cycles) * t.rate / t.hz
	fit := t.fit(start, length, reach*t.rate)
	if fit.ok {
		length = float64(cycles) * t.rate / fit.hz // the fit hardly depends on where the window ends; once more settles it
		fit = t.fit(start, length, reach*t.rate)
	}
	if fit.ok && fit.residual <= max(bent, noisy*fit.scatter) {
		return float64(cycles) * t.rate / fit.hz, t.lost(fit.amp)
	}
	own, ok := t.own(start, length, x, base)
	if !ok {
		return length, t.lost(0)
	}
	if flags = t.lost(own.amp); flags == 0 && (own.residual > jump || math.Abs(own.drift) > rush) {
		flags = Step
	}
	return float64(cycles) * t.rate / own.hz, flags
}

func (t *tracker) lost(amp float64) Flags {
	if amp < weak*t.usual || !(t.usual > 0) {
		return Unlocked
	}
	return 0
}

type phaseFit struct {
	hz, drift, residual, scatter float64
	amp                          float64 // rms of the fundamental where it is weakest inside the window
	ok                           bool
}

// fit lays a parabola through the marks within margin of the window, weighted by a raised cosine so that the ripple of
// an interharmonic averages out, and returns its slope at the middle of the window.
func (t *tracker) fit(start, length, margin float64) phaseFit {
	middle := start + length/2
	half := length/2 + margin
	var s [5]float64 // weighted moments of u = (at-middle)/half
	var r [3]float64
	count := 0
	amp, first := math.Inf(1), 0.0
	for _, m := range t.marks {
		u := (m.at - middle) / half
		if u <= -1 || u >= 1 {
			continue
		}
		if count == 0 {
			first = m.phase
		}
		w := t.weight(m, u)
		phase := m.phase - first
		p := w
		for i := range s {
			s[i] += p
			if i < 3 {
				r[i] += p * phase
			}
			p *= u
		}
		if math.Abs(m.at-middle) <= length/2 {
			amp = min(amp, m.amp)
		}
		count++
	}
	if count < 3 {
		return phaseFit{}
	}
	a, b, c, ok := parabola(s, r, count)
	if !ok {
		return phaseFit{}
	}
	var residual float64
	t.left = t.left[:0]
	for _, m := range t.marks {
		u := (m.at - middle) / half
		if u <= -1 || u >= 1 {
			continue
		}
		d := m.phase - first - (a + b*u + c*u*u)
		residual += t.weight(m, u) * d * d
		if m.amp > t.usual/3 {
			t.left = append(t.left, d)
		}
	}
	f := phaseFit{hz: b / half * t.rate / (2 * math.Pi), residual: math.Sqrt(residual / s[0]), amp: amp}
	f.scatter = scatter(t.left)
	f.ok = f.hz > t.low && f.hz < t.high
	return f
}

// weight is that of a mark at u, -1..1 over the stretch of the fit. A mark taken where the fundamental was low or gone
// says little.
func (t *tracker) weight(m mark, u float64) float64 {
	a := min(1, m.amp/t.usual)
	return (1 + math.Cos(math.Pi*u)) * a * a
}

// scatter estimates the standard deviation of noise in d from its second differences, by their median; a step or a slow
// swing in d does not count. It changes d.
func scatter(d []float64) float64 {
	if len(d) < 5 {
		return 0
	}
	for i := 1; i+1 < len(d); i++ {
		d[i-1] = math.Abs(d[i-1] - 2*d[i] + d[i+1])
	}
	d = d[:len(d)-2]
	slices.Sort(d)
	// The median of |x| is 0.6745 standard deviations; a second difference of independent values has √6 of them.
	return d[len(d)/2] / (0.6745 * math.Sqrt(6))
}

// parabola solves the normal equations for a + b·u + c·u²; with few points it is a straight line.
func parabola(s [5]float64, r [3]float64, count int) (a, b, c float64, ok bool) {
	if count < 5 {
		det := s[0]*s[2] - s[1]*s[1]
		if det <= 1e-12*s[0]*s[0] {
			return 0, 0, 0, false
		}
		return (r[0]*s[2] - r[1]*s[1]) / det, (s[0]*r[1] - s[1]*r[0]) / det, 0, true
	}
	m00 := s[2]*s[4] - s[3]*s[3]
	m01 := s[1]*s[4] - s[2]*s[3]
	m02 := s[1]*s[3] - s[2]*s[2]
	det := s[0]*m00 - s[1]*m01 + s[2]*m02
	if math.Abs(det) <= 1e-12*s[0]*s[0]*s[0] {
		return 0, 0, 0, false
	}
	m11 := s[0]*s[4] - s[2]*s[2]
	m12 := s[0]*s[3] - s[1]*s[2]
	m22 := s[0]*s[2] - s[1]*s[1]
	a = (r[0]*m00 - r[1]*m01 + r[2]*m02) / det
	b = (-r[0]*m01 + r[1]*m11 - r[2]*m12) / det
	c = (r[0]*m02 - r[1]*m12 + r[2]*m22) / det
	return a, b, c, true
}

// own measures the frequency from the samples of the window alone: a parabola through the phases of short frames, a
// cycle apart.
func (t *tracker) own(start, length float64, x []float64, base int) (phaseFit, bool) {
	if t.fine == nil {
		t.fine = newCarrier(fineCycles, t.hz, t.rate)
	}
	c := t.fine
	count := int(float64(fineCycles)*length/float64(c.length)) - 1
	var at, phase []float64
	amp := math.Inf(1)
	for i := range count {
		from := int(math.Round(start + (length-float64(c.length))*float64(i)/float64(count-1)))
		if from < base || from-base+c.length > len(x) {
			return phaseFit{}, false
		}
		p := c.phasor(x[from-base:])
		m := cmplx.Phase(p)
		here := float64(from) + float64(c.length)/2
		if i > 0 {
			ahead := phase[i-1] + 2*math.Pi*c.hz/t.rate*(here-at[i-1])
			m += 2 * math.Pi * math.Round((ahead-m)/(2*math.Pi))
		}
		at, phase = append(at, here), append(phase, m)
		amp = min(amp, cmplx.Abs(p))
	}
	if count < 3 {
		return phaseFit{}, false
	}
	half := length / 2
	var s [5]float64
	var r [3]float64
	for i := range at {
		u, p := (at[i]-start-half)/half, 1.0
		for k := range s {
			s[k] += p
			if k < 3 {
				r[k] += p * (phase[i] - phase[0])
			}
			p *= u
		}
	}
	a, b, bend, ok := parabola(s, r, count)
	if !ok {
		return phaseFit{}, false
	}
	var left float64
	for i := range at {
		u := (at[i] - start - half) / half
		d := phase[i] - phase[0] - (a + b*u + bend*u*u)
		left += d * d
	}
	perSecond := t.rate / half
	f := phaseFit{hz: b * perSecond / (2 * math.Pi), drift: bend * perSecond * perSecond / math.Pi,
		residual: math.Sqrt(left / float64(count)), amp: amp}
	return f, f.hz > t.low && f.hz < t.high
}
