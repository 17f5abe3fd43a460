package dft

// A complexPlan is an in-order complex transform after Stockham: every pass reads one array and writes the other, so
// no digit reversal is needed. The length is taken apart into radices 4, 2, 3, 5 and whatever primes remain.
//
// A pass of radix r turns a set of s interleaved transforms of length l into r·s interleaved ones of length l/r:
// with m = l/r, point q of sub-transform j is
//
//	y[q + s·(r·p + j)] = w(l)^(j·p) · sum over i of x[q + s·(p + m·i)]·w(r)^(i·j),  w(n) = exp(-2πi/n)
//
// for p = 0..m-1 and q = 0..s-1.
type complexPlan struct {
	a, b   []complex128
	passes []pass
}

type pass struct {
	radix, m, s int
	twiddle     []complex128 // w(l)^(j·p), at [p·(radix-1) + j-1]
	roots       []complex128 // w(radix)^i, for the general radix only
}

func newComplexPlan(n int) *complexPlan {
	c := &complexPlan{a: make([]complex128, n), b: make([]complex128, n)}
	l, s := n, 1
	for _, r := range radices(n) {
		p := pass{radix: r, m: l / r, s: s, twiddle: make([]complex128, l/r*(r-1))}
		for i := range p.m {
			for j := 1; j < r; j++ {
				p.twiddle[i*(r-1)+j-1] = root(l, i*j)
			}
		}
		if r > 5 {
			p.roots = make([]complex128, r)
			for i := range p.roots {
				p.roots[i] = root(r, i)
			}
		}
		c.passes = append(c.passes, p)
		l, s = l/r, s*r
	}
	return c
}

// radices takes n apart, fours first: they do the most work a memory access.
func radices(n int) []int {
	var out []int
	for _, r := range []int{4, 2, 3, 5} {
		for n%r == 0 {
			out = append(out, r)
			n /= r
		}
	}
	for r := 7; n > 1; r += 2 {
		for n%r == 0 {
			out = append(out, r)
			n /= r
		}
	}
	return out
}

// run transforms c.a and returns the result, which lies in c.a or c.b until the next run.
func (c *complexPlan) run() []complex128 {
	x, y := c.a, c.b
	for i := range c.passes {
		p := &c.passes[i]
		switch p.radix {
		case 2:
			p.two(y, x)
		case 3:
			p.three(y, x)
		case 4:
			p.four(y, x)
		case 5:
			p.five(y, x)
		default:
			p.general(y, x)
		}
		x, y = y, x
	}
	return x
}

func (p *pass) two(y, x []complex128) {
	m, s := p.m, p.s
	for i := range m {
		w1 := p.twiddle[i]
		x0, x1 := x[s*i:][:s], x[s*(i+m):][:s]
		y0, y1 := y[2*s*i:][:s], y[2*s*i+s:][:s]
		for q := range x0 {
			a, b := x0[q], x1[q]
			y0[q] = a + b
			y1[q] = (a - b) * w1
		}
	}
}

func (p *pass) three(y, x []complex128) {
	const sin60 = 0.866025403784438646763723170752936183
	m, s := p.m, p.s
	for i := range m {
		w1, w2 := p.twiddle[2*i], p.twiddle[2*i+1]
		x0, x1, x2 := x[s*i:][:s], x[s*(i+m):][:s], x[s*(i+2*m):][:s]
		y0, y1, y2 := y[3*s*i:][:s], y[3*s*i+s:][:s], y[3*s*i+2*s:][:s]
		for q := range x0 {
			a, b, c := x0[q], x1[q], x2[q]
			t := b + c
			d := b - c
			u := complex(real(a)-real(t)/2, imag(a)-imag(t)/2)
			v := complex(sin60*imag(d), -sin60*real(d)) // -i·sin60·d
			y0[q] = a + t
			y1[q] = (u + v) * w1
			y2[q] = (u - v) * w2
		}
	}
}

func (p *pass) four(y, x []complex128) {
	m, s := p.m, p.s
	if s == 1 { // the first pass: inner loops of length one would cost more than the butterflies
		x0, x1, x2, x3 := x[:m], x[m:][:m], x[2*m:][:m], x[3*m:][:m]
		tw := p.twiddle[:3*m]
		y = y[:4*m]
		for i := range x0 {
			a, b, c, d := x0[i], x1[i], x2[i], x3[i]
			w := tw[3*i:][:3]
			o := y[4*i:][:4]
			s0, s1 := a+c, b+d
			d0, e := a-c, b-d
			d1 := complex(imag(e), -real(e)) // -i·(b-d)
			o[0] = s0 + s1
			o[1] = (d0 + d1) * w[0]
			o[2] = (s0 - s1) * w[1]
			o[3] = (d0 - d1) * w[2]
		}
		return
	}
	for i := range m {
		w1, w2, w3 := p.twiddle[3*i], p.twiddle[3*i+1], p.twiddle[3*i+2]
		x0, x1, x2, x3 := x[s*i:][:s], x[s*(i+m):][:s], x[s*(i+2*m):][:s], x[s*(i+3*m):][:s]
		o := y[4*s*i:][:4*s]
		y0, y1, y2, y3 := o[:s], o[s:][:s], o[2*s:][:s], o[3*s:][:s]
		for q := range x0 {
			a, b, c, d := x0[q], x1[q], x2[q], x3[q]
			s0, s1 := a+c, b+d
			d0, e := a-c, b-d
			d1 := complex(imag(e), -real(e))
			y0[q] = s0 + s1
			y1[q] = (d0 + d1) * w1
			y2[q] = (s0 - s1) * w2
			y3[q] = (d0 - d1) * w3
		}
	}
}

func (p *pass) five(y, x []complex128) {
	const (
		c1 = 0.309016994374947424102293417182819059 // cos 72°
		c2 = -0.809016994374947424102293417182819059
		s1 = 0.951056516295153572116439333379382143 // sin 72°
		s2 = 0.587785252292473129168705954639072769
	)
	m, s := p.m, p.s
	for i := range m {
		w := p.twiddle[4*i:][:4]
		w1, w2, w3, w4 := w[0], w[1], w[2], w[3]
		x0, x1, x2, x3, x4 := x[s*i:][:s], x[s*(i+m):][:s], x[s*(i+2*m):][:s], x[s*(i+3*m):][:s], x[s*(i+4*m):][:s]
		o := y[5*s*i:][:5*s]
		y0, y1, y2, y3, y4 := o[:s], o[s:][:s], o[2*s:][:s], o[3*s:][:s], o[4*s:][:s]
		for q := range x0 {
			a, b, c, d, e := x0[q], x1[q], x2[q], x3[q], x4[q]
			t1, t2 := b+e, c+d
			u1, u2 := b-e, c-d
			r1 := complex(real(a)+c1*real(t1)+c2*real(t2), imag(a)+c1*imag(t1)+c2*imag(t2))
			r2 := complex(real(a)+c2*real(t1)+c1*real(t2), imag(a)+c2*imag(t1)+c1*imag(t2))
			// -i·(s1·u1 + s2·u2) and -i·(s2·u1 - s1·u2)
			v1 := complex(s1*imag(u1)+s2*imag(u2), -s1*real(u1)-s2*real(u2))
			v2 := complex(s2*imag(u1)-s1*imag(u2), -s2*real(u1)+s1*real(u2))
			y0[q] = a + t1 + t2
			y1[q] = (r1 + v1) * w1
			y2[q] = (r2 + v2) * w2
			y3[q] = (r2 - v2) * w3
			y4[q] = (r1 - v1) * w4
		}
	}
}

// general does any radix by definition; records of ten or twelve cycles never need it.
func (p *pass) general(y, x []complex128) {
	r, m, s := p.radix, p.m, p.s
	for i := range m {
		for q := range s {
			for j := range r {
				var sum complex128
				for k := range r {
					sum += x[q+s*(i+m*k)] * p.roots[k*j%r]
				}
				if j > 0 {
					sum *= p.twiddle[i*(r-1)+j-1]
				}
				y[q+s*(r*i+j)] = sum
			}
		}
	}
}
