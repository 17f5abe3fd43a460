package limits

import (
	"cmp"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"wavetally/harmonics/wave"
)

// A problem is what is wrong at a path of a rule file.
type problem struct {
	path, msg string
	missing   bool // something is not there
}

// A document collects what is wrong with a rule file while it is taken apart.
type document struct {
	problems []problem
}

func (d *document) fail(path, format string, args ...any) {
	d.problems = append(d.problems, problem{path: path, msg: fmt.Sprintf(format, args...)})
}

func (d *document) missing(path, format string, args ...any) {
	d.problems = append(d.problems, problem{path: path, msg: fmt.Sprintf(format, args...), missing: true})
}

// first returns the problem that comes first in the file. What is missing goes last: it may be there, misspelt.
func (d *document) first(file string, at lines) error {
	if len(d.problems) == 0 {
		return nil
	}
	p := slices.MinFunc(d.problems, func(a, b problem) int {
		if a.missing != b.missing {
			return map[bool]int{true: 1, false: -1}[a.missing]
		}
		return cmp.Compare(at.of(a.path), at.of(b.path))
	})
	return &wave.ParseError{File: file, Line: at.of(p.path), Msg: shorten(p.msg)}
}

// A node is one table of the file. Its methods take keys out; done then complains about those that nobody asked for.
type node struct {
	doc   *document
	path  string
	keys  map[string]any
	asked []string
}

func (n *node) fail(key, format string, args ...any) {
	n.doc.fail(join(n.path, key), "%s", key+" "+fmt.Sprintf(format, args...))
}

func (n *node) take(key string) (any, bool) {
	n.asked = append(n.asked, key)
	v, ok := n.keys[key]
	return v, ok
}

// text returns an optional text.
func (n *node) text(key string) string {
	v, ok := n.take(key)
	if !ok {
		return ""
	}
	s, isText := v.(string)
	if !isText {
		n.fail(key, "must be a text; put it in quotes")
	}
	return s
}

// need returns a text that must be there.
func (n *node) need(key, example string) string {
	s := n.text(key)
	if v, there := n.keys[key]; !there || v == "" {
		n.missing(key, example)
	}
	return s
}

func (n *node) missing(key, example string) {
	n.doc.missing(n.path, "%s is missing%s; write %s = %s", key, n.place(), key, example)
}

// place names the table for a message.
func (n *node) place() string {
	if n.path == "" {
		return " from the top of the file"
	}
	name := n.path[strings.LastIndex(n.path, ".")+1:]
	name, _, _ = strings.Cut(name, "[")
	if strings.Contains(n.path, ".") {
		return " from this entry of " + name
	}
	return " from this [[" + name + "]]"
}

// oneOf returns a text that must be one of the given words.
func (n *node) oneOf(key string, words ...string) string {
	s := n.need(key, fmt.Sprintf("%q", words[0]))
	if _, isText := n.keys[key].(string); isText && s != "" {
		n.word(key, s, words)
	}
	return s
}

func (n *node) word(key, s string, words []string) {
	if slices.Contains(words, s) {
		return
	}
	if near := nearest(s, words); near != "" {
		n.fail(key, "is %q; did you mean %q?", s, near)
		return
	}
	n.fail(key, "is %q; it must be one of %s", s, quoted(words))
}

func quoted(words []string) string {
	var out []string
	for _, w := range words {
		out = append(out, fmt.Sprintf("%q", w))
	}
	return strings.Join(out, ", ")
}

// positive returns a number above 0, otherwise the given one where the key is absent.
func (n *node) positive(key string, otherwise float64) float64 {
	v, ok := n.take(key)
	if !ok {
		return otherwise
	}
	f, isNumber := asNumber(v)
	switch {
	case !isNumber:
		n.fail(key, "must be a number, without quotes or unit")
	case !(f > 0) || math.IsInf(f, 0):
		n.fail(key, "is %v; it must be above 0", f)
	}
	return f
}

func asNumber(v any) (float64, bool) {
	switch x := v.(type) {
	case float64:
		return x, true
	case int64:
		return float64(x), true
	}
	return math.NaN(), false
}

// texts returns a list of texts.
func (n *node) texts(key string) []string {
	var out []string
	for i, v := range n.array(key) {
		s, ok := v.(string)
		if !ok {
			n.doc.fail(fmt.Sprintf("%s[%d]", join(n.path, key), i), "%s must hold texts; put each in quotes", key)
			continue
		}
		out = append(out, s)
	}
	return out
}

// numbers returns a list of numbers above 0.
func (n *node) numbers(key string) []float64 {
	var out []float64
	for i, v := range n.array(key) {
		f, ok := asNumber(v)
		if !ok || !(f > 0) || math.IsInf(f, 0) {
			n.doc.fail(fmt.Sprintf("%s[%d]", join(n.path, key), i), "%s must hold numbers above 0, not %v", key, v)
			continue
		}
		out = append(out, f)
	}
	return out
}

// array returns the elements of a list.
func (n *node) array(key string) []any {
	v, ok := n.take(key)
	if !ok {
		return nil
	}
	list, isList := v.([]any)
	if !isList {
		n.fail(key, "must be a list in brackets")
	}
	return list
}

// nodes returns the entries of a list of tables.
func (n *node) nodes(key string) []*node {
	v, ok := n.take(key)
	if !ok {
		return nil
	}
	var out []*node
	add := func(i int, m map[string]any) {
		out = append(out, &node{doc: n.doc, path: fmt.Sprintf("%s[%d]", join(n.path, key), i), keys: m})
	}
	switch list := v.(type) {
	case []map[string]any:
		for i, m := range list {
			add(i, m)
		}
	case []any:
		for i, e := range list {
			m, isTable := e.(map[string]any)
			if !isTable {
				n.doc.fail(fmt.Sprintf("%s[%d]", join(n.path, key), i), "%s must hold entries in braces, such as { orders = \"5\", limit = 6.0 }", key)
				continue
			}
			add(i, m)
		}
	default:
		n.fail(key, "must be a list of tables; write [[%s]] for each", key)
	}
	return out
}

// done complains about keys that nobody asked for.
func (n *node) done() {
	for _, key := range slices.Sorted(maps.Keys(n.keys)) {
		if slices.Contains(n.asked, key) {
			continue
		}
		path := join(n.path, key)
		if near := nearest(key, n.asked); near != "" {
			n.doc.fail(path, "unknown key %q; did you mean %q?", key, near)
			continue
		}
		n.doc.fail(path, "unknown key %q; the keys here are %s", key, strings.Join(n.asked, ", "))
	}
}
