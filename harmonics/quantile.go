package harmonics

import (
	"math"
	"slices"
	"sync"
)

// A sample collects values of one quantity for nearest-rank percentiles. Up to keep values it is exact. Beyond, values
// are counted in classes of 0.1 % of their size, so that a recording of any length needs the same memory; a percentile
// is then the upper edge of its class, at most 0.1 % high: far below any instrument's uncertainty, and never low.
// NaN is not counted. Values must not be negative. The zero value is empty.
type sample struct {
	n       int64
	sum     float64
	max     float64
	maxAt   float64
	exact   []float64
	classes []uint32 // classes[i] counts class base+i
	base    int
	zeros   int64 // values below the smallest class
}

// keep is one hour of 3 s values: enough for exact figures on any short recording.
const keep = 1200

// classWidth is the logarithm of the ratio between the edges of a class.
const classWidth = 1e-3

// tiny is the smallest value told from 0: far below any sensor's resolution in V, A or per cent.
const tiny = 1e-9

func (s *sample) add(v, at float64) {
	if math.IsNaN(v) {
		return
	}
	if s.n == 0 || v > s.max {
		s.max, s.maxAt = v, at
	}
	s.n++
	s.sum += v
	if s.n <= keep {
		s.exact = append(s.exact, v)
		return
	}
	if s.exact != nil {
		for _, e := range s.exact {
			s.count(e)
		}
		s.exact = nil
	}
	s.count(v)
}

func (s *sample) count(v float64) {
	if v < tiny {
		s.zeros++
		return
	}
	class := int(math.Ceil(math.Log(v) / classWidth))
	switch {
	case len(s.classes) == 0:
		s.base, s.classes = class, make([]uint32, 1, 64)
	case class < s.base:
		s.classes = append(make([]uint32, s.base-class, s.base-class+len(s.classes)+64), s.classes...)
		s.base = class
	case class >= s.base+len(s.classes):
		s.classes = append(s.classes, make([]uint32, class-s.base-len(s.classes)+1)...)
	}
	s.classes[class-s.base]++
}

// rank returns the value of rank r, 1 the smallest.
func (s *sample) rank(rank int) float64 {
	r := int64(rank)
	if r < 1 || r > s.n {
		return math.NaN()
	}
	if s.exact != nil {
		return s.exact[r-1]
	}
	if r <= s.zeros {
		return 0
	}
	r -= s.zeros
	for i, c := range s.classes {
		if r -= int64(c); r <= 0 {
			return min(s.max, math.Exp(float64(s.base+i)*classWidth))
		}
	}
	return s.max
}

func (s *sample) stats() Stats {
	if s.n == 0 {
		return Stats{}
	}
	slices.Sort(s.exact)
	n := int(s.n)
	low, high := ranks95(n)
	return Stats{
		N: n, Mean: s.sum / float64(s.n), Max: s.max, MaxAt: s.maxAt,
		P50: s.rank(NearestRank(n, 50)), P95: s.rank(NearestRank(n, 95)), P99: s.rank(NearestRank(n, 99)),
		P95Low: s.rank(low), P95High: s.rank(high),
	}
}

// known95 remembers what ranks95 worked out: a summary asks for the same n hundreds of times.
var known95 sync.Map

func ranks95(n int) (low, high int) {
	if r, ok := known95.Load(n); ok {
		return r.([2]int)[0], r.([2]int)[1]
	}
	low, high = PercentileRanks(n, 95)
	known95.Store(n, [2]int{low, high})
	return low, high
}

// statsOf is for values that are held anyway.
func statsOf(values, at []float64) Stats {
	s := sample{exact: make([]float64, 0, len(values))}
	for i, v := range values {
		if math.IsNaN(v) {
			continue
		}
		if s.n == 0 || v > s.max {
			s.max, s.maxAt = v, at[i]
		}
		s.n++
		s.sum += v
		s.exact = append(s.exact, v)
	}
	return s.stats()
}

// highest keeps the k largest values seen, for exact upper percentiles of a known number of values.
type highest struct {
	n    int64
	k    int
	heap []float64 // smallest first
}

func (t *highest) add(v float64) {
	if math.IsNaN(v) {
		return
	}
	t.n++
	if len(t.heap) < t.k {
		t.heap = append(t.heap, v)
		for i := len(t.heap) - 1; i > 0 && t.heap[i] < t.heap[(i-1)/2]; i = (i - 1) / 2 {
			t.heap[i], t.heap[(i-1)/2] = t.heap[(i-1)/2], t.heap[i]
		}
		return
	}
	if v <= t.heap[0] {
		return
	}
	t.heap[0] = v
	for i := 0; ; {
		c := 2*i + 1
		if c+1 < len(t.heap) && t.heap[c+1] < t.heap[c] {
			c++
		}
		if c >= len(t.heap) || t.heap[i] <= t.heap[c] {
			return
		}
		t.heap[i], t.heap[c] = t.heap[c], t.heap[i]
		i = c
	}
}

// percentile returns the nearest-rank percentile p, or NaN when it lies below the values kept.
func (t *highest) percentile(p float64) float64 {
	if t.n == 0 {
		return math.NaN()
	}
	down := int(t.n) - NearestRank(int(t.n), p) // 0 is the highest
	if down >= len(t.heap) {
		return math.NaN()
	}
	slices.Sort(t.heap) // a sorted slice is a heap still
	return t.heap[len(t.heap)-1-down]
}

func (t *highest) reset() { t.n, t.heap = 0, t.heap[:0] }
