package main

import (
	"bufio"
	"context"
	"errors"
	"flag"
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/rogpeppe/go-internal/testscript"

	"wavetally/harmonics/synth"
)

var update = flag.Bool("update", false, "rewrite the golden parts of the scripts")

func TestMain(m *testing.M) {
	testscript.Main(m, map[string]func(){
		"wavetally": func() { os.Exit(run(context.Background(), os.Args[1:], os.Stdin, os.Stdout, os.Stderr)) },
	})
}

// Each file in testdata/script is a session at a terminal, one topic a file. Besides the usual commands there are
//
//	record FILE SECONDS [OPTION…]   write a recording as CSV; options: reversed, numbered, notime, bare, 60hz, silent
//	code N wavetally ARGS…          run the program and want the exit code
func TestScript(t *testing.T) {
	testscript.Run(t, testscript.Params{
		Dir:           "testdata/script",
		UpdateScripts: *update,
		Cmds:          map[string]func(ts *testscript.TestScript, neg bool, args []string){"record": record, "code": code},
	})
}

// code runs a program of the script and wants its exit code. Its output goes where stdout and stderr look.
func code(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: code N PROGRAM ARGS…")
	}
	want, err := strconv.Atoi(args[0])
	ts.Check(err)
	got := 0
	if err := ts.Exec(args[1], args[2:]...); err != nil {
		var exit interface{ ExitCode() int }
		if !errors.As(err, &exit) {
			ts.Fatalf("%v", err)
		}
		got = exit.ExitCode()
	}
	if got != want {
		ts.Fatalf("exit code %d, want %d", got, want)
	}
}

// record writes a three-phase recording: 400 V, 3 % of 5th harmonic in the voltage; 40 A with 20 % of it in the current.
func record(ts *testscript.TestScript, neg bool, args []string) {
	if neg || len(args) < 2 {
		ts.Fatalf("usage: record FILE SECONDS [OPTION…]")
	}
	length, err := strconv.ParseFloat(args[1], 64)
	ts.Check(err)
	has := map[string]bool{}
	for _, o := range args[2:] {
		has[o] = true
	}
	hz := 50.02
	if has["60hz"] {
		hz = 59.97
	}
	r := synth.Recording{Rate: 12800, Seconds: length, Frequency: synth.Frequency{Hz: hz}, Seed: 3}
	volts := []synth.Harmonic{{Order: 1, RMS: 230.5}, {Order: 5, RMS: 6.9, Angle: 40}, {Order: 7, RMS: 3, Angle: 10}}
	amps := []synth.Harmonic{{Order: 1, RMS: 40, Angle: -20}, {Order: 5, RMS: 8, Angle: 160}, {Order: 7, RMS: 3, Angle: 30}}
	for k := range 3 {
		r.Channels = append(r.Channels, synth.Channel{Name: fmt.Sprintf("U%d (V)", k+1), Unit: "V", Harmonics: synth.Delayed(volts, float64(k)/3), Noise: 0.02})
	}
	for k := range 3 {
		c := synth.Channel{Name: fmt.Sprintf("I%d (A)", k+1), Unit: "A", Harmonics: synth.Delayed(amps, float64(k)/3), Noise: 0.005}
		if has["reversed"] && k == 1 {
			for i := range c.Harmonics {
				c.Harmonics[i].Angle += 180
			}
		}
		r.Channels = append(r.Channels, c)
	}
	for i := range r.Channels {
		if has["silent"] {
			r.Channels[i].Harmonics = nil
		}
		if has["numbered"] {
			r.Channels[i].Name = fmt.Sprintf("CH%d (%s)", i+1, r.Channels[i].Unit)
		}
	}
	ts.Check(writeTable(ts.MkAbs(args[0]), r, !has["notime"], !has["bare"]))
}

// writeTable writes a recording as comma-separated values.
func writeTable(path string, r synth.Recording, withTime, withHeader bool) error {
	f, err := os.Create(path)
	if err != nil {
		return err
	}
	defer f.Close()
	w := bufio.NewWriter(f)
	var names []string
	if withTime {
		names = append(names, "time (s)")
	}
	for _, c := range r.Channels {
		names = append(names, c.Name)
	}
	if withHeader {
		fmt.Fprintln(w, strings.Join(names, ","))
	}
	for b, err := range synth.New(r).Blocks() {
		if err != nil {
			return err
		}
		for n := range b.Len() {
			var cells []string
			if withTime {
				cells = append(cells, strconv.FormatFloat(b.At+float64(n)/b.Rate, 'f', 7, 64))
			}
			for c := range b.Data {
				cells = append(cells, strconv.FormatFloat(math.Round(b.Data[c][n]*1e4)/1e4, 'f', -1, 64))
			}
			fmt.Fprintln(w, strings.Join(cells, ","))
		}
	}
	return w.Flush()
}

func TestStoppedRunSaysSoAndWritesNothing(t *testing.T) {
	dir := t.TempDir()
	path := dir + "/long.csv"
	r := synth.Recording{Rate: 12800, Seconds: 20, Frequency: synth.Frequency{Hz: 50},
		Channels: []synth.Channel{{Name: "U1 (V)", Unit: "V", Harmonics: []synth.Harmonic{{Order: 1, RMS: 230}}}}}
	if err := writeTable(path, r, true, true); err != nil {
		t.Fatal(err)
	}
	ctx, stop := context.WithCancel(t.Context())
	stop()
	var out, complaint strings.Builder
	begin := time.Now()
	got := run(ctx, []string{"survey", "--into", dir + "/out", path}, strings.NewReader(""), &out, &complaint)
	if took := time.Since(begin); took > time.Second {
		t.Errorf("it took %v to stop, want at most 1 s", took)
	}
	if got != codeFailed || complaint.String() != "wavetally: stopped before the end; nothing is left half written\n" {
		t.Errorf("code %d, %q", got, complaint.String())
	}
	if _, err := os.Stat(dir + "/out"); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("the folder for the documents was made: %v", err)
	}
}

func TestStoppedDemonstrationLeavesNothing(t *testing.T) {
	dir := t.TempDir() + "/deep/demo"
	ctx, stop := context.WithCancel(t.Context())
	time.AfterFunc(100*time.Millisecond, stop) // its recording takes a second or two to make
	var out, complaint strings.Builder
	if got := run(ctx, []string{"demo", "--into", dir}, strings.NewReader(""), &out, &complaint); got != codeFailed {
		t.Errorf("code %d, want %d", got, codeFailed)
	}
	if _, err := os.Stat(dir); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("the folder is still there: %v", err)
	}
}
