package xlsx

import (
	"cmp"
	"math"
	"slices"
)

// byShare are the findings with the highest shares of their limits, each with a share of its own.
func byShare(lines []line) []line {
	var out []line
	for _, l := range lines {
		if !math.IsNaN(l.Share) && l.Limit > 0 {
			out = append(out, l)
		}
	}
	slices.SortStableFunc(out, func(a, b line) int { return cmp.Compare(b.Share, a.Share) })
	return out[:min(shown, len(out))]
}
