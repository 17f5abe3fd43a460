package main

import (
	"io"
	"os"
	"time"

	"github.com/schollz/progressbar/v3"
	"golang.org/x/term"
)

// terminalWidth returns the width of the terminal that w is, 0 when it is none.
func terminalWidth(w io.Writer) int {
	f, ok := w.(*os.File)
	if !ok || !term.IsTerminal(int(f.Fd())) {
		return 0
	}
	width, _, err := term.GetSize(int(f.Fd()))
	if err != nil || width < 40 {
		return 80
	}
	return width
}

// progress shows how far a measurement is, on stderr when that is a terminal. The returned function is told the
// seconds of recording done and in all; done ends the display.
func (a *app) progress(what string) (tell func(done, total float64), end func()) {
	if terminalWidth(a.err) == 0 {
		return nil, func() {}
	}
	const parts = 1000
	bar := progressbar.NewOptions(parts,
		progressbar.OptionSetWriter(a.err),
		progressbar.OptionSetDescription(what),
		progressbar.OptionSetWidth(30),
		progressbar.OptionThrottle(100*time.Millisecond),
		progressbar.OptionSetPredictTime(true),
		progressbar.OptionClearOnFinish(),
	)
	tell = func(done, total float64) {
		if total > 0 {
			_ = bar.Set(int(parts * min(done/total, 1))) // a display that fails is no reason to stop measuring
		}
	}
	return tell, func() { _ = bar.Finish() }
}
