package sitesheet

import (
	"fmt"
	"reflect"
	"slices"
	"strings"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// known lists the keys of each table, in order; the tables themselves are under "".
var known = func() map[string][]string {
	m := map[string][]string{}
	sheet := reflect.TypeFor[site.Sheet]()
	for i := range sheet.NumField() {
		table := sheet.Field(i).Tag.Get("toml")
		if table == "-" {
			continue
		}
		m[""] = append(m[""], table)
		fields := sheet.Field(i).Type
		if fields.Kind() == reflect.Slice {
			fields = fields.Elem()
		}
		for k := range fields.NumField() {
			m[table] = append(m[table], fields.Field(k).Tag.Get("toml"))
		}
	}
	return m
}()

// unknownKey complains about the first key that the sheet does not have.
func unknownKey(meta toml.MetaData, at lines) *wave.ParseError {
	unknown := meta.Undecoded()
	if len(unknown) == 0 {
		return nil
	}
	key := unknown[0]
	if len(key) == 1 {
		line := max(at.first("", key[0]), at.of(strings.ToLower(key[0]), 0, ""))
		return &wave.ParseError{Line: line, Msg: unknownTopLevel(key[0])}
	}
	table := strings.ToLower(key[0])
	return &wave.ParseError{Line: at.first(table, key[1]), Msg: unknownIn(table, key[1])}
}

func unknownTopLevel(name string) string {
	if table := home(name); table != "" {
		return fmt.Sprintf("key %q stands before any table; move it below [%s]", name, table)
	}
	if near := nearest(name, known[""]); near != "" {
		return fmt.Sprintf("unknown table %q; did you mean %q?", name, near)
	}
	return fmt.Sprintf("unknown table %q; the tables are %s", name, strings.Join(known[""], ", "))
}

func unknownIn(table, name string) string {
	if near := nearest(name, known[table]); near != "" {
		return fmt.Sprintf("unknown key %q; did you mean %q?", name, near)
	}
	if other := home(name); other != "" {
		return fmt.Sprintf("unknown key %q in [%s]; it belongs in [%s]", name, table, other)
	}
	return fmt.Sprintf("unknown key %q; the keys of [%s] are %s", name, table, strings.Join(known[table], ", "))
}

// home returns the table that has the key, "" for none.
func home(key string) string {
	for _, table := range known[""] {
		if slices.Contains(known[table], strings.ToLower(key)) {
			return table
		}
	}
	return ""
}

// nearest returns the word that is most like the given one, "" when none is near: about a third of its letters may
// differ.
func nearest(word string, among []string) string {
	best, distance := "", len(word)/3+2
	for _, w := range among {
		if d := edits(strings.ToLower(word), strings.ToLower(w)); d < distance {
			best, distance = w, d
		}
	}
	return best
}

// edits counts the letters to insert, delete or change to turn a into b (Levenshtein's distance).
func edits(a, b string) int {
	row := make([]int, len(b)+1)
	for j := range row {
		row[j] = j
	}
	for i := 1; i <= len(a); i++ {
		diagonal := row[0]
		row[0] = i
		for j := 1; j <= len(b); j++ {
			change := diagonal
			if a[i-1] != b[j-1] {
				change++
			}
			diagonal = row[j]
			row[j] = min(change, row[j]+1, row[j-1]+1)
		}
	}
	return row[len(b)]
}
