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

// progress shows how far a measurement is, with its rate in seconds of recording a second and the time that remains, on
// stderr when that is a terminal. The returned function is told the seconds of recording done and in all; end takes the
// display away.
func (a *app) progress(what string) (tell func(done, total float64), end func()) {
	if terminalWidth(a.err) == 0 {
		return nil, func() {}
	}
	var bar *progressbar.ProgressBar
	tell = func(done, total float64) {
		length := int64(total) + 1
		if total <= 0 {
			length = -1 // the file does not tell: how far, but not how far of what
		}
		if bar == nil {
			bar = a.bar(what, length)
		}
		_ = bar.Set64(int64(done)) // a display that fails is no reason to stop measuring
	}
	end = func() {
		if bar != nil {
			_ = bar.Finish()
		}
	}
	return tell, end
}

func (a *app) bar(what string, seconds int64) *progressbar.ProgressBar {
	return progressbar.NewOptions64(seconds,
		progressbar.OptionSetWriter(a.err),
		progressbar.OptionSetDescription(what),
		progressbar.OptionSetWidth(24),
		progressbar.OptionThrottle(100*time.Millisecond),
		progressbar.OptionShowCount(),
		progressbar.OptionShowIts(),
		progressbar.OptionSetItsString("s of recording"),
		progressbar.OptionSetPredictTime(true),
		progressbar.OptionClearOnFinish(),
	)
}
