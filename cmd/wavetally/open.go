package main

import (
	"crypto/sha256"
	"encoding/hex"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"

	"github.com/spf13/cobra"

	"wavetally/harmonics"
	"wavetally/harmonics/fitness"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
	"wavetally/loaders"
	"wavetally/loaders/sitesheet"
)

// openFlags say how to open a recording; peek, sheet and survey have them.
type openFlags struct {
	site string
	rate float64
}

func (f *openFlags) addTo(cmd *cobra.Command) {
	cmd.Flags().StringVar(&f.site, "site", "", "site sheet (TOML)")
	cmd.Flags().Float64Var(&f.rate, "sampling-rate", 0, "Hz, for files that do not tell it")
}

// sheet reads the site sheet, or makes an empty one when none is named, and puts the flags into it.
func (f openFlags) sheet() (s site.Sheet, err error) {
	if f.site != "" {
		s, err = sitesheet.Read(f.site)
	}
	if !(f.rate >= 0 && f.rate < 1e9) {
		return s, usageError{fmt.Sprintf("--sampling-rate: is %g; it must be above 0 (Hz)", f.rate)}
	}
	if f.rate != 0 {
		s.File.SamplingRate = f.rate
	}
	return s, err
}

// A recording is an opened one and what a first look shows.
type recording struct {
	wave.Source
	look  site.Look
	sheet site.Sheet // completed
}

// open opens the files as one recording and completes the sheet from it.
func (f openFlags) open(files []string, sheet site.Sheet) (*recording, error) {
	paths, err := loaders.Expand(files)
	if err != nil {
		return nil, err
	}
	// A folder may hold a workbook that this program wrote; only one that is named is looked into.
	paths = slices.DeleteFunc(paths, func(p string) bool { return filepath.Base(p) == "survey.xlsx" && !slices.Contains(files, p) })
	zone, err := time.LoadLocation(sheet.Site.Timezone)
	if err != nil {
		return nil, err
	}
	src, err := loaders.Open(paths, loaders.Options{File: sheet.File, Zone: zone})
	if err != nil {
		return nil, err
	}
	look, err := harmonics.FirstLook(src)
	if err != nil {
		return nil, err
	}
	full, err := site.Complete(sheet, src.Header(), look)
	if err != nil {
		return nil, inSheet(err, f.site)
	}
	return &recording{Source: src, look: look, sheet: full}, nil
}

// inSheet gives an error about a channel the place in the site sheet where the channel is named.
func inSheet(err error, sheetPath string) error {
	var missing *site.NoChannelError
	if sheetPath == "" || !errors.As(err, &missing) {
		return err
	}
	return &wave.ParseError{File: filepath.Base(sheetPath), Line: sitesheet.LineOfSource(sheetPath, missing.Source), Msg: err.Error(), Err: err}
}

// notes returns what was odd about the files, from before and from while they were read.
func (r *recording) notes() []wave.Note {
	return append(append([]wave.Note(nil), r.Header().Notes...), r.Notes()...)
}

// named puts the recording's name before an error that says what cannot be measured in it.
func (r *recording) named(err error) error {
	for _, bare := range []error{harmonics.ErrNoFundamental, harmonics.ErrTooShort, harmonics.ErrNoChannels} {
		if files := r.Header().Files; errors.Is(err, bare) && len(files) > 0 {
			return fmt.Errorf("%s: %w", files[0].Name, err)
		}
	}
	return err
}

// timeBase says that the recording's times contradict the mains, or nil.
func (r *recording) timeBase() error {
	d, wrong := fitness.TimeBase(r.Header(), r.look)
	if !wrong {
		return nil
	}
	err := errors.New(lowerFirst(strings.TrimSuffix(d.Text, ".")) + ": " + strings.Join(d.Proposal, ", "))
	if files := r.Header().Files; len(files) > 0 {
		return fmt.Errorf("%s: %w", files[0].Name, err)
	}
	return err
}

func lowerFirst(s string) string {
	r, n := utf8.DecodeRuneInString(s)
	return string(unicode.ToLower(r)) + s[n:]
}

// hashes returns the SHA-256 of each file of the recording, in hex, by path.
func hashes(files []wave.File) (map[string]string, error) {
	out := map[string]string{}
	for _, f := range files {
		sum, err := hash(f.Path)
		if err != nil {
			return nil, err
		}
		out[f.Path] = sum
	}
	return out, nil
}

func hash(path string) (string, error) {
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}
