package harmonics

import (
	"math"
	"math/cmplx"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// FirstLook looks at the first two seconds or so of a recording: enough to guess what each channel measures. Values are
// in the units the recording holds.
func FirstLook(src wave.Source) (site.Look, error) {
	h := src.Header()
	look := site.Look{Channels: make([]site.ChannelLook, len(h.Channels))}
	data := make([][]float64, len(h.Channels))
	var rate float64
	for b, err := range src.Blocks() {
		if err != nil {
			return look, err
		}
		if rate != 0 && b.Rate != rate {
			break
		}
		rate = b.Rate
		for k := range data {
			for _, v := range b.Data[k] {
				if v-v != 0 {
					v = 0
				}
				data[k] = append(data[k], v)
			}
		}
		if len(data) > 0 && float64(len(data[0])) >= acquireSeconds*rate {
			break
		}
	}
	strongest := -1
	var best float64
	for k, x := range data {
		if len(x) == 0 {
			return look, nil
		}
		c := &look.Channels[k]
		var sum, mean float64
		for _, v := range x {
			sum += v * v
			mean += v / float64(len(x))
			c.Peak = max(c.Peak, math.Abs(v))
		}
		c.RMS, c.DC, c.THDPct = math.Sqrt(sum/float64(len(x))), mean, math.NaN()
		// A voltage says more about the frequency than a current of the same clarity; the unit, if given, tells.
		weight := 1.0
		if h.Channels[k].Unit == "V" {
			weight = 1e6
		}
		if f := acquire(x, rate, lowest50, highest60); f.clear && weight*f.rms > best {
			best, strongest, look.Frequency = weight*f.rms, k, f.hz
		}
	}
	if strongest < 0 {
		return look, nil
	}
	first := cmplx.Phase(firstPhasor(data[0], rate, look.Frequency))
	for k, x := range data {
		c := &look.Channels[k]
		p := firstPhasor(x, rate, look.Frequency)
		c.Fundamental = cmplx.Abs(p)
		c.Angle = degrees(p * cmplx.Rect(1, -first))
		if rest := c.RMS*c.RMS - c.DC*c.DC - c.Fundamental*c.Fundamental; c.Fundamental > 0 {
			c.THDPct = 100 * math.Sqrt(max(rest, 0)) / c.Fundamental
		}
	}
	return look, nil
}

// firstPhasor returns the rms phasor of the fundamental over the whole cycles of x, under a Hann window.
func firstPhasor(x []float64, rate, hz float64) complex128 {
	n := int(math.Floor(float64(len(x))*hz/rate) * rate / hz)
	if n < 8 {
		return 0
	}
	var sum complex128
	for i, v := range x[:n] {
		hann := (1 - math.Cos(2*math.Pi*float64(i)/float64(n))) / float64(n) * math.Sqrt2
		sum += complex(v*hann, 0) * cmplx.Rect(1, -2*math.Pi*hz*float64(i)/rate)
	}
	return sum
}
