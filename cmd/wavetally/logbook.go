package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"github.com/spf13/cobra"

	"wavetally/report"
	"wavetally/report/logbook"
	"wavetally/report/trend"
)

// bookFlags say which logbook is meant.
type bookFlags struct{ path string }

func (f *bookFlags) addTo(cmd *cobra.Command) {
	cmd.PersistentFlags().StringVar(&f.path, "logbook", "", "logbook file; without it WAVETALLY_LOGBOOK, else one in your data folder")
}

// file is the logbook's place: the flag, else the environment, else the user's data folder.
func (f bookFlags) file() (string, error) {
	if f.path != "" {
		return f.path, nil
	}
	if path := os.Getenv("WAVETALLY_LOGBOOK"); path != "" {
		return path, nil
	}
	dir, err := dataFolder()
	if err != nil {
		return "", fmt.Errorf("there is no folder for the logbook (%v); name a file with --logbook", err)
	}
	return filepath.Join(dir, "wavetally", "logbook.sqlite"), nil
}

// dataFolder is where programs of this system keep a user's data.
func dataFolder() (string, error) {
	if dir := os.Getenv("XDG_DATA_HOME"); dir != "" {
		return dir, nil
	}
	if runtime.GOOS == "windows" {
		if dir := os.Getenv("LocalAppData"); dir != "" {
			return dir, nil
		}
	}
	home, err := os.UserHomeDir()
	if err != nil {
		return "", err
	}
	if runtime.GOOS == "darwin" {
		return filepath.Join(home, "Library", "Application Support"), nil
	}
	return filepath.Join(home, ".local", "share"), nil
}

// book opens the logbook; with must it has to be there already.
func (f bookFlags) book(must bool) (*logbook.Book, error) {
	path, err := f.file()
	if err != nil {
		return nil, err
	}
	if _, err := os.Stat(path); must && errors.Is(err, fs.ErrNotExist) {
		return nil, fmt.Errorf("%s: there is no logbook yet; `wavetally logbook add survey.json` makes it", path)
	}
	return logbook.Open(path)
}

func newLogbook(a *app) *cobra.Command {
	var f bookFlags
	cmd := &cobra.Command{
		Use:   "logbook",
		Short: "Keep surveys, to compare them month by month",
		Long: `Keeps what comparison needs of surveys in one file, the logbook. The same survey twice is one entry; a changed ratio,
nominal value, method, rule set or demand current starts a new series.`,
		Example: `  wavetally logbook add march/survey.json
  wavetally logbook event 2026-03-31 "filter put into service"
  wavetally trend`,
		Args: knownCommand,
		RunE: func(cmd *cobra.Command, _ []string) error { return cmd.Help() },
	}
	f.addTo(cmd)
	cmd.AddCommand(newBookAdd(a, &f), newBookList(a, &f), newBookRemove(a, &f), newBookEvent(a, &f), newBookCheck(a, &f))
	return cmd
}

func newBookAdd(a *app, f *bookFlags) *cobra.Command {
	return &cobra.Command{
		Use:     "add survey.json|DIR…",
		Short:   "Add surveys; of a folder every survey.json in it",
		Example: "  wavetally logbook add march/survey.json\n  wavetally logbook add surveys/",
		Args:    arguments(1, -1, "survey.json files, or folders that hold them"),
		RunE: func(_ *cobra.Command, args []string) error {
			files, err := surveysIn(args)
			if err != nil {
				return err
			}
			facts := make([]*trend.Facts, 0, len(files))
			for _, path := range files {
				one, err := readFacts(path)
				if err != nil {
					return err
				}
				facts = append(facts, one)
			}
			return a.keep(*f, facts)
		},
	}
}

// batch is how many surveys are added at a time: a commit waits for the disk.
const batch = 100

// keep adds surveys to the logbook, and says how many were new.
func (a *app) keep(f bookFlags, facts []*trend.Facts) error {
	b, err := f.book(false)
	if err != nil {
		return err
	}
	defer b.Close()
	added := 0
	for part := range slices.Chunk(facts, batch) {
		n, err := b.Add(a.now(), part...)
		if err != nil {
			return err
		}
		added += n
	}
	fmt.Fprintf(a.out, "%s added to %s", plural(added, "survey", "surveys"), b.Path())
	if old := len(facts) - added; old > 0 {
		fmt.Fprintf(a.out, "; %d in it already", old)
	}
	fmt.Fprintln(a.out)
	return nil
}

// surveysIn lists the files named, and every survey.json below the folders named.
func surveysIn(args []string) (files []string, err error) {
	for _, arg := range args {
		info, err := os.Stat(arg)
		if err != nil {
			return nil, fmt.Errorf("%s: there is no such file; name the survey.json that `wavetally survey` wrote, or its folder", arg)
		}
		if !info.IsDir() {
			files = append(files, arg)
			continue
		}
		before := len(files)
		err = filepath.WalkDir(arg, func(path string, d fs.DirEntry, err error) error {
			if err == nil && !d.IsDir() && d.Name() == "survey.json" {
				files = append(files, path)
			}
			return err
		})
		if err != nil {
			return nil, err
		}
		if len(files) == before {
			return nil, fmt.Errorf("%s: there is no survey.json in this folder; `wavetally survey` writes one", arg)
		}
	}
	return files, nil
}

func readFacts(path string) (*trend.Facts, error) {
	r, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer r.Close()
	s, err := report.ReadJSON(r)
	if err != nil {
		return nil, fmt.Errorf("%s: %w; name the survey.json that `wavetally survey` wrote", path, err)
	}
	f, err := trend.FactsOf(s)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", path, err)
	}
	return f, nil
}

func newBookList(a *app, f *bookFlags) *cobra.Command {
	var name string
	cmd := &cobra.Command{
		Use: "list", Short: "List the surveys and events in the logbook",
		Example: "  wavetally logbook list --site \"Kestrel Lane bakery, board MB-1\"",
		Args:    arguments(0, 0, ""),
		RunE:    func(*cobra.Command, []string) error { return a.listBook(*f, name) },
	}
	cmd.Flags().StringVar(&name, "site", "", "of this site only")
	return cmd
}

func (a *app) listBook(f bookFlags, name string) error {
	b, err := f.book(true)
	if err != nil {
		return err
	}
	defer b.Close()
	entries, err := b.List(name)
	if err != nil {
		return err
	}
	p := printer{w: a.out, width: a.width()}
	rows := [][]string{{"entry", "start", "length", "configuration", "site"}}
	for _, e := range entries {
		rows = append(rows, []string{strconv.FormatInt(e.ID, 10), e.Start.Format("2006-01-02 15:04"), report.Duration(e.Duration), e.Config, e.Site})
	}
	if len(entries) == 0 {
		p.printf("No surveys.\n")
	} else {
		p.table(rows, 2, 0)
	}
	sites, err := b.Sites()
	if err != nil {
		return err
	}
	for _, site := range sites {
		if name != "" && site != name {
			continue
		}
		events, err := b.Events(site)
		if err != nil {
			return err
		}
		for _, e := range events {
			p.printf("%s  %s (%s)\n", e.Date, e.Text, site)
		}
	}
	return p.err
}

func newBookRemove(a *app, f *bookFlags) *cobra.Command {
	return &cobra.Command{
		Use: "remove ENTRY…", Short: "Remove surveys by the numbers that list shows",
		Example: "  wavetally logbook remove 12",
		Args:    arguments(1, -1, "the numbers of entries, as `wavetally logbook list` shows them"),
		RunE: func(_ *cobra.Command, args []string) error {
			var ids []int64
			for _, arg := range args {
				id, err := strconv.ParseInt(arg, 10, 64)
				if err != nil {
					return usageError{fmt.Sprintf("%q is no entry's number; see `wavetally logbook list`", arg)}
				}
				ids = append(ids, id)
			}
			b, err := f.book(true)
			if err != nil {
				return err
			}
			defer b.Close()
			if err := b.Remove(ids...); err != nil {
				return err
			}
			fmt.Fprintf(a.out, "%s removed\n", plural(len(ids), "survey", "surveys"))
			return nil
		},
	}
}

func newBookEvent(a *app, f *bookFlags) *cobra.Command {
	var name string
	cmd := &cobra.Command{
		Use: "event DATE TEXT", Short: "Note what was changed at a site, and when",
		Example: "  wavetally logbook event 2026-03-31 \"filter put into service\"",
		Args:    arguments(2, 2, "a date and a text"),
		RunE: func(_ *cobra.Command, args []string) error {
			b, err := f.book(true)
			if err != nil {
				return err
			}
			defer b.Close()
			site, err := oneSite(b, name)
			if err != nil {
				return err
			}
			if err := b.AddEvent(site, trend.Event{Date: args[0], Text: strings.TrimSpace(args[1])}); err != nil {
				return usageError{err.Error()}
			}
			fmt.Fprintf(a.out, "%s noted at %s\n", args[0], site)
			return nil
		},
	}
	cmd.Flags().StringVar(&name, "site", "", "site, where the logbook has several")
	return cmd
}

// oneSite is the site of that name, or the only one there is.
func oneSite(b *logbook.Book, name string) (string, error) {
	sites, err := b.Sites()
	switch {
	case err != nil:
		return "", err
	case name != "" && slices.Contains(sites, name):
		return name, nil
	case name == "" && len(sites) == 1:
		return sites[0], nil
	case len(sites) == 0:
		return "", fmt.Errorf("%s: holds no survey; add some with `wavetally logbook add`", b.Path())
	case name != "":
		return "", usageError{fmt.Sprintf("the logbook has no site %q; it has %s", name, quoted(sites))}
	}
	return "", usageError{fmt.Sprintf("the logbook has several sites, choose one with --site: %s", quoted(sites))}
}

func quoted(names []string) string {
	var out []string
	for _, n := range names {
		out = append(out, strconv.Quote(n))
	}
	return strings.Join(out, ", ")
}

func newBookCheck(a *app, f *bookFlags) *cobra.Command {
	return &cobra.Command{
		Use: "check", Short: "Read the whole logbook and say whether it is sound",
		Example: "  wavetally logbook check",
		Args:    arguments(0, 0, ""),
		RunE: func(*cobra.Command, []string) error {
			b, err := f.book(true)
			if err != nil {
				return err
			}
			defer b.Close()
			n, err := b.Check()
			if err != nil {
				return err
			}
			fmt.Fprintf(a.out, "%s: sound, %s\n", b.Path(), plural(n, "survey", "surveys"))
			return nil
		},
	}
}
