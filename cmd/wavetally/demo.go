package main

import (
	"context"
	"fmt"
	"io"
	"iter"
	"os"
	"path/filepath"
	"runtime/debug"

	"github.com/spf13/cobra"

	"wavetally/harmonics/synth"
	"wavetally/harmonics/wave"
	"wavetally/loaders/comtrade"
	"wavetally/loaders/sitesheet"
)

func newDemo(a *app) *cobra.Command {
	var into string
	cmd := &cobra.Command{
		Use:   "demo",
		Short: "Show the whole job on an invented site",
		Long: `Writes the recordings and the site sheet of an invented bakery into a folder, and does the whole job on them. One
current sensor of the recording is the wrong way round, as happens: see how it is found.`,
		Example: `  wavetally demo
  wavetally demo --into /tmp/bakery`,
		Args: arguments(0, 0, ""),
		RunE: func(cmd *cobra.Command, _ []string) error { return a.demo(cmd.Context(), into) },
	}
	cmd.Flags().StringVar(&into, "into", "wavetally-demo", "folder for the demonstration's files")
	return cmd
}

func (a *app) demo(ctx context.Context, into string) error {
	// A demonstration should not be noticed: half the memory for a little more work.
	defer debug.SetMemoryLimit(debug.SetMemoryLimit(32 << 20))
	fmt.Fprintf(a.out, "An invented bakery: %d s of seven channels at %d Hz, made up for this demonstration.\n\n", demoSeconds, demoRate)
	if err := writeDemoSite(ctx, into); err != nil {
		return err
	}
	sheet, board := filepath.Join(into, "site.toml"), filepath.Join(into, "board.cfg")
	if err := a.survey(ctx, []string{board}, surveyFlags{openFlags: openFlags{site: sheet}, into: into, formats: []string{"pdf", "xlsx", "json"}}); err != nil {
		return err
	}
	fmt.Fprintf(a.out, `
The report is %s. Try on its recording what you would do with your own:
  wavetally peek %s
  wavetally sheet %s
  wavetally survey --site %s --into %s %s
`, filepath.Join(into, "survey.pdf"), board, board, sheet, into, board)
	return nil
}

// writeDemoSite writes the invented site's recording and site sheet.
func writeDemoSite(ctx context.Context, into string) (err error) {
	made, err := makeDir(into)
	if err != nil {
		return err
	}
	beside, err := os.MkdirTemp(into, ".board.*.part")
	if err != nil {
		return err
	}
	defer func() {
		os.RemoveAll(beside)
		if err != nil {
			removeEmpty(made)
		}
	}()
	if err := comtrade.Write(filepath.Join(beside, "board"), stoppableSource{ctx, synth.New(demoRecording())}, comtrade.Binary); err != nil {
		return err
	}
	for _, name := range []string{"board.cfg", "board.dat"} {
		if err := os.Rename(filepath.Join(beside, name), filepath.Join(into, name)); err != nil {
			return err
		}
	}
	return writeAll(ctx, into, []document{{"site.toml", func(w io.Writer) error {
		return sitesheet.Write(w, demoSheet(), sitesheet.Comments{Files: []string{"board.cfg"}})
	}}})
}

// A stoppableSource ends with the context's error once the context is done.
type stoppableSource struct {
	ctx context.Context
	wave.Source
}

func (s stoppableSource) Blocks() iter.Seq2[wave.Block, error] {
	return func(yield func(wave.Block, error) bool) {
		for b, err := range s.Source.Blocks() {
			if err == nil {
				err = s.ctx.Err()
			}
			if err != nil {
				yield(wave.Block{}, err)
				return
			}
			if !yield(b, nil) {
				return
			}
		}
	}
}
