package sitesheet

import "strings"

// A place is where a key stands: which table, counted from 0 where a table comes several times, and the key.
// The key is "" for the table's own heading.
type place struct {
	table string
	n     int
	key   string
}

// lines tells the line of each key, from 1. The TOML library keeps positions to itself, so they are found again here;
// a sheet has few forms: [table], [[table]], key = value, and arrays or texts over several lines.
type lines map[place]int

func indexLines(text string) lines {
	at := lines{}
	count := map[string]int{}
	here := place{}
	quote := "" // the mark that ends a text of several lines
	for i, line := range strings.Split(text, "\n") {
		if quote != "" {
			if strings.Contains(line, quote) {
				quote = ""
			}
			continue
		}
		line = strings.TrimSpace(line)
		switch {
		case strings.HasPrefix(line, "["):
			name, _, _ := strings.Cut(strings.TrimLeft(line, "["), "]")
			name = strings.ToLower(unquote(name))
			here = place{table: name, n: count[name]}
			count[name]++
			at.set(here, i+1)
		case line != "" && line[0] != '#':
			key, value, found := strings.Cut(line, "=")
			if !found {
				continue
			}
			at.set(here.with(unquote(key)), i+1)
			quote = opened(value)
		}
	}
	return at
}

// opened returns the mark of a text that begins in value and does not end there, "" for none.
func opened(value string) string {
	for _, mark := range []string{`"""`, `'''`} {
		if strings.Count(value, mark) == 1 {
			return mark
		}
	}
	return ""
}

func unquote(s string) string { return strings.Trim(strings.TrimSpace(s), `"'`) }

// with returns the place of a key in the same table; "site.name" at the top is name in table site.
func (p place) with(key string) place {
	if table, rest, dotted := strings.Cut(key, "."); dotted && p.table == "" {
		return place{table: strings.ToLower(unquote(table)), key: strings.ToLower(unquote(rest))}
	}
	return place{p.table, p.n, strings.ToLower(key)}
}

func (l lines) set(p place, line int) {
	if _, twice := l[p]; !twice {
		l[p] = line
	}
}

// of returns the line of a key, or else of its table, or else 0.
func (l lines) of(table string, n int, key string) int {
	if line := l[place{table, n, strings.ToLower(key)}]; line > 0 {
		return line
	}
	return l[place{table: table, n: n}]
}

// first returns the line of the first such key in any table of that name.
func (l lines) first(table, key string) int {
	for n := 0; ; n++ {
		if line := l[place{table, n, strings.ToLower(key)}]; line > 0 {
			return line
		}
		if l[place{table: table, n: n}] == 0 {
			return 0
		}
	}
}
