package main

import (
	"fmt"
	"strings"

	"github.com/spf13/cobra"
)

// newRoot makes the command tree.
func newRoot(a *app) *cobra.Command {
	root := &cobra.Command{
		Use:   "wavetally",
		Short: "Harmonics of a mains recording, measured, judged and written up",
		Long: `wavetally measures harmonics on recorded mains waveforms after IEC 61000-4-7 and 61000-4-30, judges them by
published limits, and writes a report to sign (PDF), a workbook to hand over (XLSX) and the data (JSON).

Recordings are made by qualified persons only, under the local code and the site's rules. The program reads files
and gives engineering guidance; it proves neither safety nor compliance.`,
		Example: `  wavetally demo
  wavetally survey --site site.toml board.cfg`,
		Version:       version(),
		Args:          knownCommand,
		RunE:          func(cmd *cobra.Command, _ []string) error { return cmd.Help() },
		SilenceErrors: true,
		SilenceUsage:  true,
	}
	root.SetIn(a.in)
	root.SetOut(a.out)
	root.SetErr(a.err)
	root.SetFlagErrorFunc(func(cmd *cobra.Command, err error) error {
		return usageError{fmt.Sprintf("%v; see `%s --help`", err, cmd.CommandPath())}
	})
	root.CompletionOptions.HiddenDefaultCmd = true
	root.AddCommand(newDemo(a), newPeek(a), newSheet(a), newSurvey(a), newRules(a), newLogbook(a), newTrend(a))
	return root
}

// knownCommand refuses words that are no command.
func knownCommand(cmd *cobra.Command, args []string) error {
	if len(args) == 0 {
		return nil
	}
	if near := cmd.SuggestionsFor(args[0]); len(near) > 0 {
		return usageError{fmt.Sprintf("unknown command %q; did you mean %q?", args[0], near[0])}
	}
	var names []string
	for _, c := range cmd.Commands() {
		if c.IsAvailableCommand() {
			names = append(names, c.Name())
		}
	}
	return usageError{fmt.Sprintf("unknown command %q; the commands are %s", args[0], strings.Join(names, ", "))}
}

// arguments makes a check of the number of arguments; most below 0 is no limit.
func arguments(least, most int, what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) < least {
			return usageError{fmt.Sprintf("%s wants %s; see `%s --help`", cmd.Name(), what, cmd.CommandPath())}
		}
		if most >= 0 && len(args) > most {
			return usageError{fmt.Sprintf("%s does not take %q; see `%s --help`", cmd.Name(), args[most], cmd.CommandPath())}
		}
		return nil
	}
}
