package limits

import (
	"cmp"
	"embed"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"wavetally/harmonics/wave"
)

// A RuleSet is one edition of one limit document. Load makes one; its numbers are read through Tables.
type RuleSet struct {
	Name       string // such as "ieee-519-2022"; unique
	Title      string // one line for people
	Document   string
	Edition    string
	Scope      string   // what the document is for
	AppliesAt  []string // points that its limits are made for: site.Supply.Point values
	Grouping   string   // which lines of the spectrum make a harmonic
	Generation string   // what to mind where on-site generation may push power out, "" for nothing
	Notes      []string
	Statistics []Statistic
	Factors    []OrderFactor
	Raising    []Raising
	File       string // path of a user's rule file; "" for one that is built in

	tables []table
}

// Evidence tells where a number comes from.
type Evidence struct {
	Clause string // in the document
	Status string // "corroborated by N" public sources, "read from the document", "common practice" or "from memory"
	Source string
}

const fromMemory = "from memory"

// Unverified reports whether the number is from memory, not corroborated.
func (e Evidence) Unverified() bool { return e.Status == fromMemory }

// A Statistic is what of a quantity's course is held against the limit.
type Statistic struct {
	Quantity    string  // "voltage" or "current"
	Interval    string  // "3 s" or "10 min"
	Percentile  float64 // per cent, nearest rank
	Period      string  // "day" or "week"
	Factor      float64 // multiplies the table's limits
	TotalFactor float64 // multiplies the limit of a total; 0 where there is none for totals
	Formula     string  // of the factor for single orders, "" where Factor holds for all
	Information string  // why the statistic is shown but not judged; "" for one that is judged
	Evidence

	byOrder formula
}

// String returns the statistic in words, such as "95th percentile of 10 min values over a week".
func (s Statistic) String() string {
	return fmt.Sprintf("%s of %s values over a %s", percentileName(s.Percentile), s.Interval, s.Period)
}

// FactorOf returns what multiplies the table's limit for an order, 0 for totals.
func (s Statistic) FactorOf(order int) float64 {
	switch {
	case order == 0:
		return s.TotalFactor
	case s.Formula != "":
		return s.byOrder.at(order)
	}
	return s.Factor
}

// An OrderFactor multiplies the table's limits of some orders, such as the even ones.
type OrderFactor struct {
	Quantity string
	Orders   Orders
	Factor   float64
	Evidence
}

// A Raising lets the other single orders' limits be multiplied by Factor where each of Orders stays within HeldTo per
// cent of its own. It is shown, never applied.
type Raising struct {
	Orders []int
	HeldTo float64
	Factor float64
	Evidence
}

//go:embed data/*.toml
var data embed.FS

// Names lists the built-in rule sets in alphabetical order.
func Names() []string {
	entries, _ := fs.ReadDir(data, "data") // an embedded folder cannot fail
	var names []string
	for _, e := range entries {
		names = append(names, strings.TrimSuffix(e.Name(), ".toml"))
	}
	slices.Sort(names)
	return names
}

// Sizes in bytes above which a file, or a line, is none of a rule file's: the longest built-in file has 7 kB. They keep
// a file that was made to be slow from being so: the TOML library takes time by the square of a dotted key's length.
const (
	largest     = 256 << 10
	longestLine = 4000
)

// Load returns a built-in rule set by name, or else reads a rule file. Errors in a file's text are *wave.ParseError.
func Load(nameOrPath string) (*RuleSet, error) {
	if text, err := data.ReadFile("data/" + nameOrPath + ".toml"); err == nil {
		return parse(string(text), nameOrPath+".toml")
	}
	f, err := os.Open(nameOrPath)
	switch {
	case errors.Is(err, fs.ErrNotExist) && !looksLikePath(nameOrPath):
		return nil, noSuchSet(nameOrPath)
	case err != nil:
		return nil, err
	}
	defer f.Close()
	return read(f, nameOrPath)
}

func looksLikePath(s string) bool {
	return strings.ContainsAny(s, `/\`) || strings.HasSuffix(strings.ToLower(s), ".toml")
}

func noSuchSet(name string) error {
	hint := "there are " + strings.Join(Names(), ", ")
	if near := nearest(name, Names()); near != "" {
		hint = fmt.Sprintf("did you mean %q? (%s)", near, hint)
	}
	return fmt.Errorf("there is no rule set %q; %s; a rule file of your own is named by its path", name, hint)
}

func read(f *os.File, path string) (*RuleSet, error) {
	name := filepath.Base(path)
	if info, err := f.Stat(); err == nil && info.IsDir() {
		return nil, &wave.ParseError{File: name, Msg: "is a directory; name the rule file in it"}
	}
	text, err := io.ReadAll(io.LimitReader(f, largest+1))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", name, err)
	}
	r, err := parse(string(text), name)
	if err != nil {
		return nil, err
	}
	if slices.Contains(Names(), r.Name) {
		return nil, &wave.ParseError{File: name, Msg: fmt.Sprintf("name %q is that of a built-in rule set; choose another, so that reports tell them apart", r.Name)}
	}
	r.File = path
	return r, nil
}

// percentileName returns "95th percentile", "99.5th percentile" or "maximum".
func percentileName(p float64) string {
	if p == 100 {
		return "maximum"
	}
	text := sig(p, 4)
	end := "th"
	if last := text[len(text)-1]; !strings.HasSuffix(text, "11") && !strings.HasSuffix(text, "12") && !strings.HasSuffix(text, "13") {
		end = cmp.Or(map[byte]string{'1': "st", '2': "nd", '3': "rd"}[last], "th")
	}
	return text + end + " percentile"
}
