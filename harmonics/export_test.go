package harmonics

import (
	"context"
	"math"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// A WindowView is one window as tests look at it.
type WindowView struct {
	At, Span, Hz float64
	Flags        Flags
	Group        []float64 // [order] rms of the subgroups of the first channel
}

// WindowsOf cuts and transforms src one window at a time, on this goroutine.
func WindowsOf(src wave.Source, sheet site.Sheet) ([]WindowView, error) {
	channels, err := resolve(src.Header(), sheet)
	if err != nil {
		return nil, err
	}
	free := make(chan *batch, 3)
	for range 3 {
		free <- &batch{done: make(chan struct{}, 1)}
	}
	w := &worker{channels: channels, wires: wiring(channels)}
	var out []WindowView
	cut := &cutter{channels: channels, nominal: sheet.Supply.NominalFrequency, free: free, reference: -1,
		start: src.Header().Start, missing: make([]int64, len(channels))}
	cut.hand = func(b *batch) {
		w.linesOnly = b.linesOnly
		if len(b.cuts) > 0 {
			w.run(b)
		}
		for i, c := range b.cuts {
			v := WindowView{At: c.at, Span: c.span, Hz: c.hz, Flags: c.flags}
			for _, g := range b.out[i].channels[0].group {
				v.Group = append(v.Group, math.Sqrt(g))
			}
			out = append(out, v)
		}
		free <- b
	}
	err = cut.read(context.Background(), src, nil)
	return out, err
}
