package chart

import (
	"image/color"
	"math"
)

// A field's values are shown by a scale whose lightness falls all the way, so that it reads the same in grey. Up to a
// mark, such as the limit, it is blue; past it, darker still and red-brown: both hue and darkness say "over".
var (
	coolRamp = []color.NRGBA{{0xf4, 0xf7, 0xfa, 0xff}, {0xd3, 0xe3, 0xf0, 0xff}, {0x9f, 0xc6, 0xe2, 0xff},
		{0x5f, 0xa2, 0xd0, 0xff}, {0x2b, 0x7f, 0xb8, 0xff}}
	hotRamp  = []color.NRGBA{{0xb8, 0x45, 0x00, 0xff}, {0x84, 0x2c, 0x02, 0xff}, {0x4a, 0x14, 0x05, 0xff}}
	fullRamp = []color.NRGBA{{0xf4, 0xf7, 0xfa, 0xff}, {0xc6, 0xdb, 0xec, 0xff}, {0x7f, 0xb2, 0xd8, 0xff},
		{0x3b, 0x86, 0xbc, 0xff}, {0x0f, 0x58, 0x94, 0xff}, {0x08, 0x2c, 0x58, 0xff}, {0x05, 0x14, 0x2b, 0xff}}
)

// shadesOfRamp is how many inks a field uses at most: as many as an eye tells apart, and few enough that neighbours
// often share one and are drawn as one.
const shadesOfRamp = 32

// A ramp turns values into inks.
type ramp struct {
	low, high, mark float64
	log             bool
}

// share is where a value stands on the scale, 0 to 1.
func (r ramp) share(v float64) float64 {
	s := (v - r.low) / (r.high - r.low)
	if r.log {
		s = math.Log(v/r.low) / math.Log(r.high/r.low)
	}
	return math.Min(math.Max(s, 0), 1)
}

// marked reports whether there is a mark to tell values by; it may be the scale's own end.
func (r ramp) marked() bool { return r.mark > r.low }

// index is a value's ink, 0 to shadesOfRamp-1. A value just past the mark never shares an ink with one before it.
func (r ramp) index(v float64) int {
	s := r.share(v)
	n := shadesOfRamp
	if !r.marked() {
		return min(int(s*float64(n)), n-1)
	}
	m := r.share(r.mark)
	half := n / 2
	if v <= r.mark || m >= 1 {
		return min(int(s/m*float64(half)), half-1)
	}
	return half + min(int((s-m)/(1-m)*float64(half)), half-1)
}

func (r ramp) ink(index int) color.NRGBA {
	n := float64(shadesOfRamp - 1)
	if !r.marked() {
		return mix(fullRamp, float64(index)/n)
	}
	half := shadesOfRamp / 2
	if index < half {
		return mix(coolRamp, float64(index)/float64(half-1))
	}
	return mix(hotRamp, float64(index-half)/float64(half-1))
}

// mix reads a ramp at a share of its length.
func mix(ramp []color.NRGBA, share float64) color.NRGBA {
	at := share * float64(len(ramp)-1)
	i := min(int(at), len(ramp)-2)
	f := at - float64(i)
	blend := func(a, b uint8) uint8 { return uint8(math.Round(float64(a) + f*(float64(b)-float64(a)))) }
	a, b := ramp[i], ramp[i+1]
	return color.NRGBA{blend(a.R, b.R), blend(a.G, b.G), blend(a.B, b.B), 0xff}
}
