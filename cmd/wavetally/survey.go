package main

import (
	"context"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"github.com/spf13/cobra"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/plant"
	"wavetally/harmonics/site"
	"wavetally/report"
	"wavetally/report/pdf"
	"wavetally/report/terminal"
	"wavetally/report/trend"
	"wavetally/report/xlsx"
)

// surveyFlags are the flags of survey; the zero value leaves all to the site sheet.
type surveyFlags struct {
	openFlags
	into, paper        string
	formats, rules     []string
	voltage, frequency float64
	logbook            string
	failOnExceeds      bool
}

func newSurvey(a *app) *cobra.Command {
	var f surveyFlags
	cmd := &cobra.Command{
		Use:   "survey FILE|DIR…",
		Short: "Measure a recording, judge it, and write the documents",
		Long: `Measures a recording, judges it by the rule sets of the site sheet, and writes survey.pdf, survey.xlsx and
survey.json. Several files, patterns and folders are taken as one recording, in the order of time.

Without a site sheet it still measures: what the channels are is guessed from their names, and every guess is told.
"wavetally sheet" writes a site sheet to fill in.

The documents carry the time they were made. With SOURCE_DATE_EPOCH set (seconds since 1970) they carry that time
instead, and the same inputs give the same bytes.`,
		Example: `  wavetally survey --site site.toml board.cfg
  wavetally survey --site site.toml --into march recordings/*.csv
  wavetally survey --rules ieee-519-2022 --nominal-voltage 480 --fail-on-exceeds feeder.csv`,
		Args: arguments(1, -1, "the recording's files, or their folder"),
		RunE: func(cmd *cobra.Command, args []string) error {
			if err := f.check(); err != nil {
				return err
			}
			return a.survey(cmd.Context(), args, f)
		},
	}
	f.addTo(cmd)
	flags := cmd.Flags()
	flags.StringVar(&f.into, "into", ".", "folder for the documents")
	flags.StringSliceVar(&f.formats, "formats", []string{"pdf", "xlsx", "json"}, "documents to write")
	flags.StringSliceVar(&f.rules, "rules", nil, "rule sets to judge by, instead of the site sheet's")
	flags.StringVar(&f.paper, "paper", "", "paper of the PDF: A4 or Letter; without it Letter at 60 Hz, else A4")
	flags.Float64Var(&f.voltage, "nominal-voltage", 0, "V, instead of the site sheet's")
	flags.Float64Var(&f.frequency, "nominal-frequency", 0, "Hz, 50 or 60, instead of the site sheet's")
	flags.StringVar(&f.logbook, "logbook", "", "logbook file to add the survey to")
	flags.BoolVar(&f.failOnExceeds, "fail-on-exceeds", false, "exit with code 3 when something exceeds its limit")
	return cmd
}

func (f surveyFlags) check() error {
	for _, name := range f.formats {
		if _, known := renderers[name]; !known {
			return usageError{fmt.Sprintf("--formats: unknown format %q; the formats are pdf, xlsx, json", name)}
		}
	}
	if len(f.formats) == 0 {
		return usageError{"--formats: names no format; the formats are pdf, xlsx, json"}
	}
	if f.paper != "" && f.paper != "A4" && f.paper != "Letter" {
		return usageError{fmt.Sprintf("--paper: is %q; it must be A4 or Letter", f.paper)}
	}
	if f.frequency != 0 && f.frequency != 50 && f.frequency != 60 {
		return usageError{fmt.Sprintf("--nominal-frequency: is %g; it must be 50 or 60 (Hz)", f.frequency)}
	}
	if !(f.voltage >= 0 && f.voltage < 1.2e6) {
		return usageError{fmt.Sprintf("--nominal-voltage: is %g; it must be above 0 (V)", f.voltage)}
	}
	return nil
}

// survey is the main job: from files to documents.
func (a *app) survey(ctx context.Context, files []string, f surveyFlags) error {
	sheet, err := f.sheet()
	if err != nil {
		return err
	}
	rec, err := f.open(files, f.overrule(sheet))
	if err != nil {
		return err
	}
	rules, err := loadRules(&rec.sheet, filepath.Dir(f.site))
	if err != nil {
		return err
	}
	sum, sums, err := a.measure(ctx, rec)
	if err != nil {
		return err
	}
	doubts := fitness.Assess(rec.sheet, rec.Header(), rec.notes(), sum)
	findings := fitness.Apply(judge(rules, rec.sheet, sum), doubts)
	made, err := a.madeAt()
	if err != nil {
		return err
	}
	s := report.Build(report.Inputs{Sheet: rec.sheet, Header: rec.Header(), Notes: rec.notes(), Summary: sum, Doubts: doubts,
		Findings: findings, RuleSets: rules, Plant: screen(rec.sheet, sum), Hashes: sums, Version: version(), MadeAt: made})
	if err := writeAll(ctx, f.into, f.documents(s)); err != nil {
		return err
	}
	if err := terminal.Write(a.out, s, a.width()); err != nil {
		return err
	}
	fmt.Fprintf(a.out, "\nWritten: %s\n", strings.Join(f.written(), ", "))
	if f.logbook != "" {
		if err := a.log(s, f.logbook); err != nil {
			return err
		}
	}
	if f.failOnExceeds && s.Headline.Verdict == limits.Exceeds {
		return errExceeds
	}
	return nil
}

// overrule puts what the flags say in the place of what the sheet says.
func (f surveyFlags) overrule(s site.Sheet) site.Sheet {
	if f.voltage != 0 {
		s.Supply.NominalVoltage = f.voltage
	}
	if f.frequency != 0 {
		s.Supply.NominalFrequency = f.frequency
	}
	if len(f.rules) > 0 {
		s.Limits.Apply = f.rules
	}
	return s
}

// loadRules loads the rule sets that the sheet names. Paths are taken from the site sheet's folder, else from the
// current one. Where the sheet names none, those that fit the nominal frequency are taken, and it is said.
func loadRules(sheet *site.Sheet, dir string) ([]*limits.RuleSet, error) {
	if len(sheet.Limits.Apply) == 0 {
		name := "en-50160"
		if sheet.Supply.NominalFrequency == 60 {
			name = "ieee-519-2022"
		}
		sheet.Limits.Apply = []string{name}
		sheet.Guessed = append(sheet.Guessed, fmt.Sprintf("Judged by %s, which is usual at %g Hz; limits.apply in the site sheet, or --rules, settles it.",
			name, sheet.Supply.NominalFrequency))
	}
	var sets []*limits.RuleSet
	for _, name := range sheet.Limits.Apply {
		beside := filepath.Join(dir, name)
		if _, err := os.Stat(beside); err == nil && !slices.Contains(limits.Names(), name) && !filepath.IsAbs(name) {
			name = beside
		}
		set, err := limits.Load(name)
		if err != nil {
			return nil, err
		}
		sets = append(sets, set)
	}
	return sets, nil
}

// measure measures the recording and, beside it, takes the files' hashes.
func (a *app) measure(ctx context.Context, rec *recording) (*harmonics.Summary, map[string]string, error) {
	if err := rec.timeBase(); err != nil {
		return nil, nil, err
	}
	tell, end := a.progress("measuring")
	defer end()
	type result struct {
		sums map[string]string
		err  error
	}
	hashed := make(chan result, 1)
	go func() {
		sums, err := hashes(rec.Header().Files)
		hashed <- result{sums, err}
	}()
	sum, err := harmonics.Measure(ctx, rec, rec.sheet, harmonics.Options{Progress: tell})
	if err != nil {
		return nil, nil, rec.named(err)
	}
	select {
	case r := <-hashed:
		return sum, r.sums, r.err
	case <-ctx.Done():
		return nil, nil, ctx.Err()
	}
}

// log adds a survey that was just made to a logbook.
func (a *app) log(s *report.Survey, path string) error {
	facts, err := trend.FactsOf(s)
	if err != nil {
		return fmt.Errorf("the documents are written, but the survey was not added to the logbook: %w", err)
	}
	return a.keep(bookFlags{path}, []*trend.Facts{facts})
}

// screen is what the harmonics do to the declared plant.
func screen(sheet site.Sheet, sum *harmonics.Summary) (out []report.Screening) {
	for _, f := range plant.Screen(sheet, sum) {
		out = append(out, report.Screening{Topic: f.Topic, Name: f.Name, Value: report.Number(f.Value), Unit: f.Unit, Text: f.Text})
	}
	return out
}

func judge(rules []*limits.RuleSet, sheet site.Sheet, sum *harmonics.Summary) (findings []limits.Finding) {
	for _, set := range rules {
		findings = append(findings, set.Judge(sheet, sum)...)
	}
	return findings
}

// madeAt is the time that documents carry: SOURCE_DATE_EPOCH where it is set, so that runs can be repeated to the byte.
func (a *app) madeAt() (time.Time, error) {
	epoch := os.Getenv("SOURCE_DATE_EPOCH")
	if epoch == "" {
		return a.now().UTC().Truncate(time.Second), nil
	}
	seconds, err := strconv.ParseInt(epoch, 10, 64)
	if err != nil {
		return time.Time{}, usageError{fmt.Sprintf("SOURCE_DATE_EPOCH is %q; it must be seconds since 1970-01-01 UTC", epoch)}
	}
	return time.Unix(seconds, 0).UTC(), nil
}

// width is how wide the summary may be: as the terminal, or 100 where the output goes elsewhere.
func (a *app) width() int {
	if w := terminalWidth(a.out); w > 0 {
		return w
	}
	return 100
}

// renderers write a survey in each format.
var renderers = map[string]func(w io.Writer, s *report.Survey, f surveyFlags) error{
	"pdf": func(w io.Writer, s *report.Survey, f surveyFlags) error {
		return pdf.Write(w, s, pdf.Options{Paper: f.paper})
	},
	"xlsx": func(w io.Writer, s *report.Survey, _ surveyFlags) error { return xlsx.Write(w, s) },
	"json": func(w io.Writer, s *report.Survey, _ surveyFlags) error { return report.WriteJSON(w, s) },
}

func (f surveyFlags) documents(s *report.Survey) (out []document) {
	for _, format := range f.formats {
		out = append(out, document{"survey." + format, func(w io.Writer) error { return renderers[format](w, s, f) }})
	}
	return out
}

// written names the documents with their folder.
func (f surveyFlags) written() (names []string) {
	for _, format := range f.formats {
		names = append(names, filepath.Join(f.into, "survey."+format))
	}
	return names
}
