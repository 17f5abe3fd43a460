package harmonics

import "math"

// A windowChannel is what one window gives of one channel. Squares are of rms values in the channel's unit.
type windowChannel struct {
	missing    bool // samples are missing: nothing below counts
	meanSquare float64
	dc         float64
	group      [Orders]float64    // square of the subgroup of each order, from 1
	inter      [Orders]float64    // square of the centred interharmonic subgroup above each order
	line       [Orders]complex128 // rms phasor of the order's own line; phase 0 is a cosine at the window's first sample
	half       [2 * 12]float64    // mean square of each half cycle, voltages only
	raw        rawFacts
}

// square returns |c|².
func square(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }

// group sums a spectrum into harmonic subgroups and centred interharmonic subgroups, IEC 61000-4-7:2002+A1:2008,
// 5.5 and annex A, with N = cycles lines from one order to the next:
//
//	Gsg,h²  = sum of C²(N·h+i), i = -1..1
//	Gisg,h² = sum of C²(N·h+i), i = 2..N-2
//
// A capture shorter than a window has no room for neighbours: its harmonics are the lines themselves, and what lies
// between is not told apart.
func (w *windowChannel) sum(c []complex128, f frame, linesOnly bool) {
	n := f.cycles
	w.dc = real(c[0])
	for h := range Orders {
		w.group[h], w.inter[h], w.line[h] = math.NaN(), math.NaN(), 0
	}
	for h := 1; h <= f.top; h++ {
		k := n * h
		w.line[h] = c[k]
		w.group[h] = square(c[k])
		if !linesOnly {
			w.group[h] += square(c[k-1]) + square(c[k+1])
		}
	}
	if linesOnly {
		return
	}
	for h := 0; h <= f.top; h++ {
		var s float64
		for k := n*h + 2; k <= n*h+n-2 && k < len(c); k++ {
			s += square(c[k])
		}
		w.inter[h] = s
	}
}
