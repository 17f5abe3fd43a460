// Command wavetally measures harmonics on recorded mains waveforms, judges them by published limits, and writes a
// report to sign and a workbook to hand over.
//
//	wavetally demo                               an invented site, from recording to report
//	wavetally peek board.cfg                     what is in a recording, and whether it can be used
//	wavetally sheet board.cfg -o site.toml       a site sheet to fill in, from what the recording shows
//	wavetally survey --site site.toml board.cfg  measure, judge, write survey.pdf, survey.xlsx and survey.json
//	wavetally rules ieee-519-2022                a rule set's limits with their source
//
// Exit codes: 0 done; 1 a file or the run failed; 2 wrong usage; 3 something exceeds a limit and --fail-on-exceeds
// was given.
package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"os/signal"
	"runtime/debug"
	"syscall"
	"time"
)

func main() {
	// The heap is a few tens of megabytes whatever the recording: collecting it a quarter as often costs little memory
	// and saves a tenth of a short run. GOGC still overrules it.
	if os.Getenv("GOGC") == "" {
		debug.SetGCPercent(400)
	}
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	code := run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr)
	stop()
	os.Exit(code)
}

// An app is what the commands share: where they read and write, and the clock.
type app struct {
	in       io.Reader
	out, err io.Writer
	now      func() time.Time
}

// run is the program without its surroundings: it returns the exit code.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	a := &app{in: stdin, out: stdout, err: stderr, now: time.Now}
	root := newRoot(a)
	root.SetArgs(args)
	if err := root.ExecuteContext(ctx); err != nil {
		fmt.Fprintln(stderr, "wavetally: "+message(ctx, err))
		return exitCode(err)
	}
	return 0
}
