package harmonics

import (
	"math"

	"wavetally/harmonics/site"
)

// result turns the sums into the means of the recording. s is the summary with its channels filled in.
func (p *powerSums) result(m wires, channels []channel, s *Summary, connection string) *Power {
	out := &Power{Unbalance: Unbalance{U2: math.NaN(), U0: math.NaN(), I2: math.NaN(), I0: math.NaN(), U2Line: math.NaN()}}
	if p.n == 0 {
		return out
	}
	n := float64(p.n)
	rms := func(sum float64) float64 { return math.Sqrt(sum / n) }
	haveV, haveI := all(m.v) || all(m.vll), all(m.i)
	var three ThreePhase
	for ph := range 3 {
		three.V[ph], three.V1[ph] = rms(p.phase[ph]), rms(p.phase1[ph])
		three.Between[ph], three.Between1[ph] = rms(p.between[ph]), rms(p.between1[ph])
		k := m.i[ph]
		if k < 0 || m.v[ph] < 0 && !all(m.vll) {
			continue
		}
		c := &s.Channels[k]
		three.I[ph], three.I1[ph] = c.RMS, c.H(1).RMS
		one := SinglePhase{V: three.V[ph], I: c.RMS, V1: three.V1[ph], I1: c.H(1).RMS, P: p.power[ph] / n,
			P1: real(p.cross[ph][1]) / n, Q1: imag(p.cross[ph][1]) / n}
		pp := PowerOf(one)
		pp.Phase = ph + 1
		for h := 1; h < Orders; h++ {
			x := p.cross[ph][h] / complex(n, 0)
			pp.Orders = append(pp.Orders, OrderPower{Order: h, P: real(x), Q: imag(x), Theta: degrees(x)})
		}
		out.Phases = append(out.Phases, pp)
		three.P += one.P
		three.P1 += one.P1
	}
	if haveV || haveI {
		for h := 1; h < Orders; h++ {
			l := SequenceLevels{Order: h, VPos: math.NaN(), VNeg: math.NaN(), VZero: math.NaN(), IPos: math.NaN(), INeg: math.NaN(), IZero: math.NaN()}
			if haveV {
				l.VPos, l.VNeg, l.VZero = rms(p.seqV[h][0]), rms(p.seqV[h][1]), rms(p.seqV[h][2])
				if !all(m.v) {
					l.VZero = math.NaN() // line-to-line voltages do not hold it
				}
			}
			if haveI {
				l.IPos, l.INeg, l.IZero = rms(p.seqI[h][0]), rms(p.seqI[h][1]), rms(p.seqI[h][2])
			}
			out.Sequence = append(out.Sequence, l)
		}
		l := out.Sequence[0]
		out.Unbalance.U2, out.Unbalance.U0 = 100*l.VNeg/l.VPos, 100*l.VZero/l.VPos
		out.Unbalance.I2, out.Unbalance.I0 = 100*l.INeg/l.IPos, 100*l.IZero/l.IPos
		if haveV {
			out.Unbalance.U2Line = LineUnbalance(three.Between1[0], three.Between1[1], three.Between1[2])
		}
	}
	out.Neutral = p.neutral(m, s, connection)
	if len(out.Phases) == 3 && haveV && haveI {
		three.FourWire = all(m.v) && connection != site.Wye3 && connection != site.Delta3
		if three.FourWire && out.Neutral != nil {
			three.In, three.In1 = out.Neutral.RMS, out.Neutral.H[1]
		}
		x := p.cross1 * complex(3/n, 0)
		three.P1Pos, three.Q1Pos, three.S1Pos = real(x), imag(x), 3*out.Sequence[0].VPos*out.Sequence[0].IPos
		e := EffectiveOf(three)
		for _, ph := range out.Phases {
			e.Arithmetic += ph.S
		}
		e.Vector = vectorApparent(out.Phases)
		out.Effective = &e
	}
	return out
}

// vectorApparent is |sum of (P + jQB + kDB)| of the phases, Budeanu's reactive and distortion powers: kept for
// comparison with older instruments, which the standard advises against.
func vectorApparent(phases []PhasePower) float64 {
	var p, q, d float64
	for _, ph := range phases {
		var qb float64
		for _, o := range ph.Orders {
			if !math.IsNaN(o.Q) {
				qb += o.Q
			}
		}
		p += ph.P
		q += qb
		d += math.Sqrt(max(ph.S*ph.S-ph.P*ph.P-qb*qb, 0))
	}
	return math.Sqrt(p*p + q*q + d*d)
}

// neutral returns the measured neutral current, else that of the sum of the phase currents on a four-wire supply.
func (p *powerSums) neutral(m wires, s *Summary, connection string) *NeutralCurrent {
	n := float64(p.n)
	var out *NeutralCurrent
	if m.in >= 0 {
		c := &s.Channels[m.in]
		out = &NeutralCurrent{RMS: c.RMS, H: make([]float64, Orders), Mismatch: math.NaN()}
		out.H[0] = math.Abs(c.DC)
		for h := 1; h < Orders; h++ {
			out.H[h] = c.H(h).RMS
		}
	}
	if all(m.i) && connection != site.Delta3 && connection != site.Wye3 {
		if out != nil {
			// The neutral carries the sum back: measured plus sum is nothing, whichever way its sensor points.
			sum := math.Sqrt(p.line1[1] / n)
			out.Mismatch = math.Abs(out.H[1] - sum)
		} else {
			out = &NeutralCurrent{RMS: math.Sqrt(p.sum / n), H: make([]float64, Orders), Computed: true, Mismatch: math.NaN()}
			for h := 1; h < Orders; h++ {
				out.H[h] = math.Sqrt(p.line1[h] / n)
			}
		}
	}
	if out == nil {
		return nil
	}
	for h := 3; h < Orders; h += 6 { // 3, 9, 15 …
		if !math.IsNaN(out.H[h]) {
			out.TriplenRMS += out.H[h] * out.H[h]
		}
	}
	out.TriplenRMS = math.Sqrt(out.TriplenRMS)
	return out
}

// degrees returns the angle of c in (-180, 180].
func degrees(c complex128) float64 {
	a := math.Atan2(imag(c), real(c)) * 180 / math.Pi
	if a <= -180 {
		a += 360
	}
	return a
}
