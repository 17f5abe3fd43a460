package main

import (
	"context"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"

	"github.com/spf13/cobra"

	"wavetally/report"
	"wavetally/report/trend"
)

// trendFlags are those of trend.
type trendFlags struct {
	bookFlags
	site, into, paper string
	formats           []string
}

func newTrend(a *app) *cobra.Command {
	var f trendFlags
	cmd := &cobra.Command{
		Use:   "trend",
		Short: "Compare a site's months: within limits, worse, since when, how long",
		Long: `Compares the surveys of a site in the logbook month by month, and writes trend.pdf, trend.xlsx and trend.json. Amperes
and TDD are compared, not the THD of currents, and where the months allow it at equal load. A step is looked for
before a trend; nothing is called rising or falling that chance explains; a date for a limit is a range or none.`,
		Example: `  wavetally trend --into reports
  wavetally trend --site "Kestrel Lane bakery, board MB-1" --formats json`,
		Args: arguments(0, 0, ""),
		RunE: func(cmd *cobra.Command, _ []string) error { return a.trend(cmd.Context(), f) },
	}
	f.addTo(cmd)
	flags := cmd.Flags()
	flags.StringVar(&f.site, "site", "", "site, where the logbook has several")
	flags.StringVar(&f.into, "into", ".", "folder for the documents")
	flags.StringSliceVar(&f.formats, "formats", []string{"pdf", "xlsx", "json"}, "documents to write")
	flags.StringVar(&f.paper, "paper", "", "paper of the PDF: A4 or Letter; without it Letter at 60 Hz, else A4")
	return cmd
}

func (a *app) trend(ctx context.Context, f trendFlags) error {
	for _, name := range f.formats {
		if _, known := trendRenderers[name]; !known {
			return usageError{fmt.Sprintf("--formats: unknown format %q; the formats are pdf, xlsx, json", name)}
		}
	}
	b, err := f.book(true)
	if err != nil {
		return err
	}
	defer b.Close()
	site, err := oneSite(b, f.site)
	if err != nil {
		return err
	}
	facts, err := b.Facts(site)
	if err != nil {
		return err
	}
	events, err := b.Events(site)
	if err != nil {
		return err
	}
	made, err := a.madeAt()
	if err != nil {
		return err
	}
	r, err := trend.Build(facts, events, trend.Options{Program: report.Program{Name: "wavetally", Version: version()}, MadeAt: made})
	if err != nil {
		return err
	}
	return a.writeTrend(ctx, r, f)
}

// writeTrend writes the documents and answers the four questions.
func (a *app) writeTrend(ctx context.Context, r *trend.Report, f trendFlags) error {
	var documents []document
	var names []string
	for _, format := range f.formats {
		documents = append(documents, document{"trend." + format, func(w io.Writer) error { return trendRenderers[format](w, r, f) }})
		names = append(names, filepath.Join(f.into, "trend."+format))
	}
	if err := writeAll(ctx, f.into, documents); err != nil {
		return err
	}
	p := printer{w: a.out, width: a.width()}
	p.printf("%s, %s to %s\n\n", r.Site, r.From, r.To)
	for _, answer := range r.Answers {
		p.printf("%s\n", answer.Question)
		for _, line := range broken(answer.Text, p.width-2) {
			p.printf("  %s\n", line)
		}
	}
	p.printf("\nWritten: %s\n", strings.Join(slices.Clone(names), ", "))
	return p.err
}

// trendRenderers write a trend, by the documents' endings.
var trendRenderers = map[string]func(io.Writer, *trend.Report, trendFlags) error{
	"json": func(w io.Writer, r *trend.Report, _ trendFlags) error { return trend.WriteJSON(w, r) },
}
