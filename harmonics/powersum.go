package harmonics

import (
	"math"
	"math/cmplx"
)

// powerSums adds up, over unflagged windows, what power and symmetrical components are made of.
type powerSums struct {
	n        int
	power    [3]float64            // W
	phase    [3]float64            // mean squares of the phase voltages
	phase1   [3]float64            // the same of their fundamentals
	between  [3]float64            // mean squares between phases
	sum      float64               // mean square of i1+i2+i3
	cross    [3][Orders]complex128 // V·conj(I) of each order's line
	seqV     [Orders][3]float64    // squares of positive, negative, zero sequence
	seqI     [Orders][3]float64
	line1    [Orders]float64 // square of the sum of the phase currents' lines
	between1 [3]float64      // squares of the fundamental between phases
	cross1   complex128      // positive-sequence V·conj(I) of the fundamental
}

// components returns the symmetrical components of three phasors, C. L. Fortescue, 1918.
func components(a, b, c complex128) (pos, neg, zero complex128) {
	turn := complex(-0.5, math.Sqrt(3)/2) // 120°
	back := cmplx.Conj(turn)
	return (a + turn*b + back*c) / 3, (a + back*b + turn*c) / 3, (a + b + c) / 3
}

func (p *powerSums) add(m wires, r *windowResult) {
	for _, set := range [][3]int{m.v, m.vll, m.i} {
		for _, k := range set {
			if k >= 0 && r.channels[k].missing {
				return
			}
		}
	}
	p.n++
	line := func(k, h int) complex128 { return r.channels[k].line[h] }
	voltage := func(ph, h int) complex128 { // of a phase; see windowResult.power
		if m.v[ph] >= 0 {
			return line(m.v[ph], h)
		}
		return (line(m.vll[ph], h) - line(m.vll[(ph+2)%3], h)) / 3
	}
	for ph := range 3 {
		p.power[ph] += r.power[ph]
		p.phase[ph] += r.phase[ph]
		p.between[ph] += r.between[ph]
		if m.v[ph] >= 0 || all(m.vll) {
			p.phase1[ph] += square(voltage(ph, 1))
			if m.i[ph] >= 0 {
				for h := 1; h < Orders; h++ {
					p.cross[ph][h] += voltage(ph, h) * cmplx.Conj(line(m.i[ph], h))
				}
			}
		}
		if a, b := m.v[ph], m.v[(ph+1)%3]; a >= 0 && b >= 0 {
			p.between1[ph] += square(line(a, 1) - line(b, 1))
		} else if k := m.vll[ph]; k >= 0 {
			p.between1[ph] += square(line(k, 1))
		}
	}
	p.sum += r.sum
	for h := 1; h < Orders; h++ {
		var v, i [3]complex128
		haveV, haveI := all(m.v) || all(m.vll), all(m.i)
		if haveV {
			v[0], v[1], v[2] = components(voltage(0, h), voltage(1, h), voltage(2, h))
			addSquares(&p.seqV[h], v)
		}
		if haveI {
			a, b, c := line(m.i[0], h), line(m.i[1], h), line(m.i[2], h)
			i[0], i[1], i[2] = components(a, b, c)
			addSquares(&p.seqI[h], i)
			p.line1[h] += square(a + b + c)
		}
		if h == 1 && haveV && haveI {
			p.cross1 += v[0] * cmplx.Conj(i[0])
		}
	}
}

func addSquares(to *[3]float64, v [3]complex128) {
	for i, c := range v {
		to[i] += square(c)
	}
}

// LineUnbalance returns the negative-sequence unbalance u2, in per cent, from the three line-to-line rms values of the
// fundamental (IEC 61000-4-30, 5.7.1): with β = (a⁴+b⁴+c⁴)/(a²+b²+c²)², u2² = (1-√(3-6β))/(1+√(3-6β)).
func LineUnbalance(a, b, c float64) float64 {
	a, b, c = a*a, b*b, c*c
	beta := (a*a + b*b + c*c) / ((a + b + c) * (a + b + c))
	root := math.Sqrt(min(max(3-6*beta, 0), 1)) // rounding may take it a hair beyond 1
	return 100 * math.Sqrt((1-root)/(1+root))
}

// A SinglePhase is what the power of one phase is worked out from, all rms values.
type SinglePhase struct {
	V, I   float64 // true rms
	V1, I1 float64 // of the fundamental
	P      float64 // active power, W
	P1, Q1 float64 // of the fundamental, W and var
}

// PowerOf works out the quantities of IEEE 1459-2010, 3.1.2, of one phase.
func PowerOf(s SinglePhase) PhasePower {
	vh := math.Sqrt(max(s.V*s.V-s.V1*s.V1, 0)) // everything but the fundamental: harmonics, dc, interharmonics
	ih := math.Sqrt(max(s.I*s.I-s.I1*s.I1, 0))
	p := PhasePower{P: s.P, P1: s.P1, PH: s.P - s.P1, Q1: s.Q1, S: s.V * s.I, S1: s.V1 * s.I1,
		DI: s.V1 * ih, DV: vh * s.I1, SH: vh * ih}
	p.SN = math.Sqrt(max(p.S*p.S-p.S1*p.S1, 0))
	p.DH = math.Sqrt(max(p.SH*p.SH-p.PH*p.PH, 0))
	p.N = math.Sqrt(max(p.S*p.S-p.P*p.P, 0))
	p.PF, p.PF1 = p.P/p.S, p.P1/p.S1
	return p
}

// A ThreePhase is what the effective power of three phases is worked out from, all rms values; [3] is phase 1, 2, 3,
// between is 12, 23, 31. V is not used on three-wire supplies, and In is 0 there.
type ThreePhase struct {
	FourWire            bool
	V, Between, I       [3]float64
	V1, Between1, I1    [3]float64
	In, In1             float64 // neutral
	P, P1               float64 // W
	S1Pos, P1Pos, Q1Pos float64 // of the positive sequence of the fundamental
}

// EffectiveOf works out the effective apparent power of IEEE 1459-2010, 3.2.3, with ρ = ξ = 1: a neutral of the
// phases' resistance, and as much heat in loads between phases as in loads to neutral.
func EffectiveOf(t ThreePhase) EffectivePower {
	e := EffectivePower{FourWire: t.FourWire, P: t.P, P1: t.P1, S1Pos: t.S1Pos, P1Pos: t.P1Pos, Q1Pos: t.Q1Pos}
	e.Ve, e.Ie = effectiveVoltage(t.FourWire, t.V, t.Between), effectiveCurrent(t.I, t.In)
	e.Ve1, e.Ie1 = effectiveVoltage(t.FourWire, t.V1, t.Between1), effectiveCurrent(t.I1, t.In1)
	veh := math.Sqrt(max(e.Ve*e.Ve-e.Ve1*e.Ve1, 0))
	ieh := math.Sqrt(max(e.Ie*e.Ie-e.Ie1*e.Ie1, 0))
	e.Se, e.Se1 = 3*e.Ve*e.Ie, 3*e.Ve1*e.Ie1
	e.SeN = math.Sqrt(max(e.Se*e.Se-e.Se1*e.Se1, 0))
	e.DeI, e.DeV, e.SeH = 3*e.Ve1*ieh, 3*veh*e.Ie1, 3*veh*ieh
	e.SU1 = math.Sqrt(max(e.Se1*e.Se1-e.S1Pos*e.S1Pos, 0))
	e.PFe, e.PF1Pos = e.P/e.Se, e.P1Pos/e.S1Pos
	return e
}

func squares(v [3]float64) float64 { return v[0]*v[0] + v[1]*v[1] + v[2]*v[2] }

func effectiveVoltage(fourWire bool, v, between [3]float64) float64 {
	if fourWire {
		return math.Sqrt((3*squares(v) + squares(between)) / 18)
	}
	return math.Sqrt(squares(between) / 9)
}

func effectiveCurrent(i [3]float64, in float64) float64 {
	return math.Sqrt((squares(i) + in*in) / 3)
}
