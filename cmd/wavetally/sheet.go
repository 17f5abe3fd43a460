package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"github.com/spf13/cobra"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/site"
	"wavetally/loaders/sitesheet"
)

func newSheet(a *app) *cobra.Command {
	var f openFlags
	var into string
	cmd := &cobra.Command{
		Use:   "sheet FILE…",
		Short: "Write a site sheet to fill in, from what a recording shows",
		Long: `Writes a site sheet with a comment on each key, filled in from what the recording shows. What was guessed stands in
its head, and what looks wrong with the hook-up stands at its end with the lines that would correct it, as comments:
nothing is corrected by itself.`,
		Example: `  wavetally sheet board.cfg -o site.toml
  wavetally sheet --site march.toml april.cfg -o april.toml`,
		Args: arguments(1, -1, "the recording's files, or their folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return a.writeSheet(cmd.Context(), args, f, into)
		},
	}
	f.addTo(cmd)
	cmd.Flags().StringVarP(&into, "output", "o", "", "file to write; without it the sheet goes to the standard output")
	return cmd
}

func (a *app) writeSheet(ctx context.Context, files []string, f openFlags, into string) error {
	if _, err := os.Lstat(into); into != "" && err == nil {
		return fmt.Errorf("%s: is there already; name another file, or remove it: it may hold what somebody filled in", into)
	}
	sheet, err := f.sheet()
	if err != nil {
		return err
	}
	rec, err := f.open(files, sheet)
	if err != nil {
		return err
	}
	comments, err := a.sheetComments(ctx, rec)
	if err != nil {
		return err
	}
	write := func(w io.Writer) error { return sitesheet.Write(w, withAllChannels(rec), comments) }
	if into == "" {
		return write(a.out)
	}
	if err := writeAll(ctx, filepath.Dir(into), []document{{filepath.Base(into), write}}); err != nil {
		return err
	}
	fmt.Fprintf(a.out, "Written: %s. Check each line, fill in what is missing, then: wavetally survey --site %s %s\n",
		into, into, strings.Join(files, " "))
	return nil
}

// withAllChannels adds the recording's other channels to its sheet, without a role, so that they need not be typed.
func withAllChannels(rec *recording) site.Sheet {
	s := rec.sheet
	named := map[int]bool{}
	for _, c := range s.Channels {
		named[site.Find(rec.Header(), c.Source)] = true
	}
	for i, c := range rec.Header().Channels {
		if !named[i] {
			s.Channels = append(s.Channels[:len(s.Channels):len(s.Channels)], site.Channel{Source: c.Name})
		}
	}
	return s
}

// sheetComments looks at the recording for what the sheet should say beside its values. A recording that cannot be
// measured gets a sheet all the same: correcting it may be what it needs.
func (a *app) sheetComments(ctx context.Context, rec *recording) (sitesheet.Comments, error) {
	var c sitesheet.Comments
	h := rec.Header()
	for _, f := range h.Files {
		c.Files = append(c.Files, f.Name)
	}
	for i, ch := range h.Channels {
		if i < len(rec.look.Channels) {
			text := strings.Join(strings.Fields(fmt.Sprintf("%.4g %s rms", rec.look.Channels[i].RMS, ch.Unit)), " ")
			c.Channels = append(c.Channels, sitesheet.ChannelComment{Source: ch.Name, Text: text})
		}
	}
	tell, end := a.progress("looking")
	sum, err := harmonics.Measure(ctx, rec, rec.sheet, harmonics.Options{Progress: tell})
	end()
	switch {
	case errors.Is(err, context.Canceled):
		return c, err
	case err != nil:
		c.Advice = append(c.Advice, sitesheet.Advice{Text: "It cannot be measured as the sheet stands: " + err.Error()})
		return c, nil
	}
	for _, d := range fitness.Assess(rec.sheet, h, rec.notes(), sum) {
		if len(d.Proposal) > 0 || d.Weight != fitness.Note {
			c.Advice = append(c.Advice, sitesheet.Advice{Text: d.Text, Lines: d.Proposal})
		}
	}
	return c, nil
}
