package fitness

import (
	"fmt"
	"math"
	"math/cmplx"
	"slices"
	"strings"

	"gonum.org/v1/gonum/stat"

	"wavetally/harmonics/site"
)

// The hook-up is judged by the angles of the fundamentals. A load's current lies within some 70° of its own phase's
// voltage, and the phases' loads do not differ by more than some 50°. Every assignment and polarity of the current sensors
// is tried; the one that makes sense with the fewest changes is proposed.

// A hookup is one way of reading the current channels: phase p's current is channel from[p], turned if flip[p].
type hookup struct {
	from [3]int
	flip [3]bool
}

var asFound = hookup{from: [3]int{0, 1, 2}}

// changes counts what would have to be wrong: a sensor on another phase counts as much as one turned round, and sensors
// swapped in pairs or moved round in a ring are one mistake of the hand a sensor.
func (h hookup) changes() int {
	n := 0
	for p := range 3 {
		if h.from[p] != p {
			n++
		}
		if h.flip[p] {
			n++
		}
	}
	return n
}

// phases are the fundamentals of one set: voltages to neutral and currents, by phase; here tells which take part.
type phases struct {
	v, i [3]complex128
	here [3]bool
}

func (p phases) count() int {
	n := 0
	for _, h := range p.here {
		if h {
			n++
		}
	}
	return n
}

// angle returns by how much the current of phase p lags its voltage under a hook-up, in degrees in (-180, 180].
func (p phases) angle(h hookup, k int) float64 {
	c := p.i[h.from[k]]
	if h.flip[k] {
		c = -c
	}
	return cmplx.Phase(p.v[k]*cmplx.Conj(c)) * 180 / math.Pi
}

// plausible reports whether a hook-up shows loads, and how far the worst angle is from the edge of what is allowed.
func (p phases) plausible(h hookup) (ok bool, margin float64) {
	margin = math.Inf(1)
	var angles []float64
	for k := range 3 {
		if p.here[k] {
			a := p.angle(h, k)
			angles = append(angles, a)
			margin = min(margin, loadAngle-math.Abs(a))
		}
	}
	for i := range angles {
		for j := range i {
			margin = min(margin, spread-math.Abs(wrap(angles[i]-angles[j])))
		}
	}
	return margin >= 0, margin
}

func wrap(d float64) float64 { return math.Mod(d+540, 360) - 180 }

// hookups lists all assignments and polarities of the phases that are here, the fewest changes first.
func (p phases) hookups() []hookup {
	var out []hookup
	for _, from := range [][3]int{{0, 1, 2}, {0, 2, 1}, {2, 1, 0}, {1, 0, 2}, {1, 2, 0}, {2, 0, 1}} {
		ok := true
		for k := range 3 {
			ok = ok && (p.here[k] || from[k] == k) && (!p.here[k] || p.here[from[k]])
		}
		if !ok {
			continue
		}
		for bits := range 8 {
			h := hookup{from: from}
			for k := range 3 {
				h.flip[k] = bits&(1<<k) != 0
				ok = !h.flip[k] || p.here[k]
				if !ok {
					break
				}
			}
			if ok {
				out = append(out, h)
			}
		}
	}
	slices.SortStableFunc(out, func(a, b hookup) int { return a.changes() - b.changes() })
	return out
}

// phasors gathers the fundamentals of voltages and currents. On a three-wire supply with line-to-line voltages the
// phases' are those against the middle of the three lines.
func (a *assessment) phasors() (p phases) {
	at := func(r site.Role) (complex128, bool) {
		_, f := a.channel(r)
		if f == nil || a.dead[r] || cmplx.Abs(f.Phasor) == 0 {
			return 0, false
		}
		return f.Phasor, true
	}
	v12, ok12 := at("V12")
	v23, ok23 := at("V23")
	v31, ok31 := at("V31")
	lines := ok12 && ok23 && ok31
	between := [3]complex128{(v12 - v31) / 3, (v23 - v12) / 3, (v31 - v23) / 3}
	strongest := a.strongest(current)
	for k := range 3 {
		v, okV := at(site.Role(fmt.Sprintf("V%d", k+1)))
		if !okV && lines {
			v, okV = between[k], true
		}
		i, okI := at(site.Role(fmt.Sprintf("I%d", k+1)))
		p.v[k], p.i[k] = v, i
		p.here[k] = okV && okI && cmplx.Abs(i) > smallLoad*strongest
	}
	return p
}

// wiring tries the hook-ups.
func (a *assessment) wiring() {
	p := a.phasors()
	turned := a.rotation(&p)
	if p.count() == 0 {
		return
	}
	if a.derivative(p) {
		return
	}
	if ok, margin := p.plausible(asFound); ok {
		a.ambiguous(p, margin)
		return
	}
	if a.sheet.Supply.Generation && a.exporting(p) {
		return
	}
	best := p.explanations()
	if len(best) == 0 {
		a.unexplained(p)
		return
	}
	a.propose(p, best, turned)
}

// explanations returns the plausible hook-ups with the fewest changes, the clearest first; of equally clear ones, that
// with the fewest sensors turned round.
func (p phases) explanations() []hookup {
	var best []hookup
	for _, h := range p.hookups() {
		if ok, _ := p.plausible(h); ok {
			if len(best) > 0 && h.changes() > best[0].changes() {
				break
			}
			best = append(best, h)
		}
	}
	slices.SortStableFunc(best, func(a, b hookup) int {
		_, ma := p.plausible(a)
		_, mb := p.plausible(b)
		if d := mb - ma; math.Abs(d) > 1 {
			return int(math.Copysign(1, d))
		}
		return a.flips() - b.flips()
	})
	return best
}

func (h hookup) flips() int {
	n := 0
	for _, f := range h.flip {
		if f {
			n++
		}
	}
	return n
}

// exporting reports whether every phase's power flows out, or is on its way, as on-site generation does.
func (a *assessment) exporting(p phases) bool {
	for k := range 3 {
		if p.here[k] && math.Abs(p.angle(asFound, k)) < 90 {
			return false
		}
	}
	return true
}

// rotation looks at the order in which the voltages follow each other. Where they follow in the wrong order, p's voltages
// are put right if the currents say that only the voltage leads were swapped; it reports whether it did.
func (a *assessment) rotation(p *phases) bool {
	var v [3]complex128
	for k := range 3 {
		if v[k] = p.v[k]; v[k] == 0 {
			return false
		}
	}
	if !a.sheet.Supply.ThreePhase() {
		return false
	}
	turn := cmplx.Rect(1, 2*math.Pi/3)
	pos := cmplx.Abs(v[0]+turn*v[1]+turn*turn*v[2]) / 3
	neg := cmplx.Abs(v[0]+turn*turn*v[1]+turn*v[2]) / 3
	if neg < rotated*pos {
		return false
	}
	whole := true // the currents follow in the same order
	if p.count() == 3 {
		whole, _ = p.plausible(asFound)
	}
	text := "The voltages follow each other in the order 1-3-2. Two voltage leads are swapped, or the supply turns that way: check with a rotation indicator. THD is not affected; sequence components and the meaning of orders are."
	evidence := map[string]float64{"negative_v": neg, "positive_v": pos}
	d := Doubt{Code: "voltage-rotation", Weight: Caution, Text: text, Evidence: evidence}
	if whole {
		a.add(d)
		return false
	}
	d.Text = "The voltages follow each other in the order 1-3-2 and the currents do not: two voltage leads are swapped. Power and angles are wrong until they are put right; THD is not affected."
	// Which two: the swap after which the currents make sense.
	for _, swap := range [][2]int{{1, 2}, {0, 1}, {0, 2}} {
		q := *p
		q.v[swap[0]], q.v[swap[1]] = q.v[swap[1]], q.v[swap[0]]
		if ok, _ := q.plausible(asFound); ok {
			d.Text = fmt.Sprintf("The voltages follow each other in the order 1-3-2 and the currents do not: V%d and V%d are swapped. Power and angles are wrong until they are put right; THD is not affected.", swap[0]+1, swap[1]+1)
			d.Proposal = a.swapLines([]site.Role{voltageRole(swap[0]), voltageRole(swap[1])}, []site.Role{voltageRole(swap[1]), voltageRole(swap[0])}, nil)
			*p = q
			break
		}
	}
	a.add(d)
	return true
}

func voltageRole(k int) site.Role { return site.Role(fmt.Sprintf("V%d", k+1)) }
func currentRole(k int) site.Role { return site.Role(fmt.Sprintf("I%d", k+1)) }

// ambiguous notes that another hook-up would look as good.
func (a *assessment) ambiguous(p phases, margin float64) {
	worst := 0.0
	for k := range 3 {
		if p.here[k] {
			worst = max(worst, math.Abs(p.angle(asFound, k)))
		}
	}
	if worst < oddAngle || p.count() < 3 {
		return
	}
	for _, h := range p.hookups()[1:] {
		ok, other := p.plausible(h)
		if !ok || other < margin {
			continue
		}
		a.add(Doubt{Code: "wiring-ambiguous", Weight: Note,
			Text: fmt.Sprintf("The currents lie up to %s° from their voltages, which a load can do; but %s would look as plausible. A look at the sensors, or a load of known power factor, settles it.",
				figure(worst), describe(p, h)),
			Evidence: map[string]float64{"angle_deg": worst}})
		return
	}
}

// describe says in words what a hook-up changes.
func describe(p phases, h hookup) string {
	var moved, flipped []site.Role
	for k := range 3 {
		if h.from[k] != k {
			moved = append(moved, currentRole(k))
		}
		if h.flip[k] {
			flipped = append(flipped, currentRole(h.from[k]))
		}
	}
	var parts []string
	switch len(moved) {
	case 2:
		parts = append(parts, "the sensors of "+list(moved)+" swapped")
	case 3:
		parts = append(parts, "all three sensors moved on by one phase")
	}
	if len(flipped) > 0 {
		slices.Sort(flipped)
		parts = append(parts, list(flipped)+" turned round")
	}
	return strings.Join(parts, " and ")
}

// propose raises the doubts of the best hook-ups: one if it is alone, a common one if several explain as much.
func (a *assessment) propose(p phases, best []hookup, turned bool) {
	if turned {
		return // the voltages are to be put right first
	}
	h := best[0]
	evidence := map[string]float64{}
	for k := range 3 {
		if p.here[k] {
			evidence[fmt.Sprintf("angle_%d_deg", k+1)] = math.Round(10*p.angle(asFound, k)) / 10
		}
	}
	_, margin := p.plausible(h)
	evidence["margin_deg"] = math.Round(10*margin) / 10
	alternative := ""
	if len(best) > 1 {
		alternative = fmt.Sprintf(" As plausible by the angles alone: %s; look at the sensors before changing anything.", describe(p, best[1]))
	} else if other, ok := a.generationReading(p); ok {
		alternative = other
	}
	proposal := a.hookupLines(h)
	said := map[site.Role]bool{}
	for k := range 3 {
		role := currentRole(h.from[k])
		switch {
		case h.from[k] != k && !said[role]:
			said[role] = true
			weight := StopsVerdict
			a.add(Doubt{Code: "current-on-wrong-phase", Weight: weight, Channel: role, Evidence: evidence, Proposal: proposal,
				Text: fmt.Sprintf("%s lies %s° from its voltage; with %s all currents lie near theirs. Put the sensors on the matching phases, or correct the site sheet.%s",
					role, figure(p.angle(asFound, h.from[k])), describe(p, h), alternative)})
		case h.flip[k] && !a.sheet.Supply.Generation:
			a.add(Doubt{Code: "current-reversed", Weight: StopsVerdict, Channel: role, Evidence: evidence, Proposal: proposal,
				Text: fmt.Sprintf("%s lies %s° from its voltage, so its power seems to flow backwards: its sensor points the wrong way. Turn the sensor, or set reversed = true in the site sheet; if there is generation on site, declare generation = true.%s",
					role, figure(p.angle(asFound, h.from[k])), alternative)})
		}
	}
}

// generationReading says that power flowing out on all phases may be real.
func (a *assessment) generationReading(p phases) (string, bool) {
	if !a.exporting(p) || p.count() < 1 {
		return "", false
	}
	return " Power flows out on every phase measured: that is what generation on site does too.", true
}

// unexplained says that no hook-up makes sense.
func (a *assessment) unexplained(p phases) {
	evidence := map[string]float64{}
	for k := range 3 {
		if p.here[k] {
			evidence[fmt.Sprintf("angle_%d_deg", k+1)] = math.Round(10*p.angle(asFound, k)) / 10
		}
	}
	for k := range 3 {
		if p.here[k] && math.Abs(p.angle(asFound, k)) > loadAngle {
			a.add(Doubt{Code: "wiring-unexplained", Weight: Caution, Channel: currentRole(k), Evidence: evidence,
				Text: fmt.Sprintf("%s lies %s° from its voltage, and no exchange of sensors makes all phases plausible. Power and angles are in doubt; check every sensor against a phase indicator.",
					currentRole(k), figure(p.angle(asFound, k)))})
		}
	}
}

// hookupLines returns site-sheet lines that put a hook-up into effect.
func (a *assessment) hookupLines(h hookup) []string {
	var from, to []site.Role
	var flip []bool
	for k := range 3 {
		if h.from[k] != k || h.flip[k] {
			from, to, flip = append(from, currentRole(h.from[k])), append(to, currentRole(k)), append(flip, h.flip[k])
		}
	}
	return a.swapLines(from, to, flip)
}

// swapLines returns channel tables in which the source that now measures from[i] measures to[i].
func (a *assessment) swapLines(from, to []site.Role, flip []bool) []string {
	var out []string
	for i := range from {
		for _, c := range a.sheet.Channels {
			if site.Role(c.Measures) != from[i] {
				continue
			}
			out = append(out, "[[channel]]", fmt.Sprintf("source = %q", c.Source), fmt.Sprintf("measures = %q", to[i]))
			if c.Scale != 0 && c.Scale != 1 {
				out = append(out, fmt.Sprintf("scale = %.6g", c.Scale))
			}
			if reversed := c.Reversed != (flip != nil && flip[i]); reversed {
				out = append(out, "reversed = true")
			}
		}
	}
	return out
}

// derivative looks for the signal of a coil that was not integrated: all currents lead by a quarter turn more than a load
// would, and their spectrum does not fall with order as currents do. It reports whether it raised the doubt.
func (a *assessment) derivative(p phases) bool {
	var suspects []site.Role
	slopes := map[site.Role]float64{}
	for k := range 3 {
		if !p.here[k] {
			continue
		}
		slope, n := a.slope(currentRole(k))
		c, _ := a.channel(currentRole(k))
		if n < leastOrders || slope < derivativeSlope || c.THDPct < derivativeTHD {
			continue
		}
		// Taking the quarter turn back must leave a load, or a turned one.
		if back := math.Abs(wrap(p.angle(asFound, k) + derivativeLead)); back > loadAngle && 180-back > loadAngle {
			continue
		}
		suspects = append(suspects, currentRole(k))
		slopes[currentRole(k)] = slope
	}
	for _, r := range suspects {
		a.add(Doubt{Code: "derivative-like-current", Weight: StopsVerdict, Channel: r,
			Text: fmt.Sprintf("The harmonics of %s do not fall with order (slope %s, where currents have about -1 or steeper) and its fundamental leads by a quarter turn: the signal looks like that of a coil that was not integrated, which shows order h about h times too large. Switch the integrator on, and record again.",
				r, figure(slopes[r])),
			Evidence: map[string]float64{"slope": slopes[r]}})
	}
	return len(suspects) > 0
}

// slope fits a straight line to the logarithm of the level of the odd harmonics above the noise against the logarithm of
// their order; n is how many took part. The fundamental does not: how high it stands above them is the load's affair.
func (a *assessment) slope(r site.Role) (slope float64, n int) {
	c, _ := a.channel(r)
	if c == nil {
		return math.NaN(), 0
	}
	var x, y []float64
	for h := 3; h <= min(25, c.TopOrder); h += 2 {
		if o := c.H(h); o.Above && o.Pct > 0.05 {
			x, y = append(x, math.Log(float64(h))), append(y, math.Log(o.RMS))
		}
	}
	if len(x) < 2 {
		return math.NaN(), len(x)
	}
	_, slope = stat.LinearRegression(x, y, nil, false)
	return slope, len(x)
}
