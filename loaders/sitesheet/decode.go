package sitesheet

import (
	"errors"
	"fmt"
	"regexp"
	"strconv"
	"strings"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics/wave"
)

// decodeError puts an error of the TOML library into our words.
func decodeError(err error, text, name string) error {
	var parse toml.ParseError
	if errors.As(err, &parse) {
		return syntaxError(parse, name)
	}
	if m := wrongType.FindStringSubmatch(err.Error()); m != nil {
		return typeError(m, text, name)
	}
	return &wave.ParseError{File: name, Msg: strings.TrimPrefix(err.Error(), "toml: ") + "; see the sheet that `wavetally sheet` writes", Err: err}
}

func syntaxError(parse toml.ParseError, name string) error {
	msg := strings.TrimSuffix(parse.Message, ".") + "; each line is key = value, texts in quotes"
	if strings.Contains(parse.Message, "has already been defined") {
		msg = "is written twice; remove one of the lines"
	}
	msg = strings.Join(strings.Fields(msg), " ")
	if parse.LastKey != "" {
		msg = parse.LastKey + ": " + msg
	}
	return &wave.ParseError{File: name, Line: parse.Position.Line, Msg: msg, Err: parse}
}

// The library tells values of the wrong type in a text only.
var wrongType = regexp.MustCompile(`^toml: line (\d+) \(last key "(.*)"\): (?:incompatible types: .* destination has type (.*)|type mismatch .*)$`)

// typeError tells a value of the wrong type. match is that of wrongType.
func typeError(match []string, text, name string) error {
	line, _ := strconv.Atoi(match[1])
	key, kind := match[2], "table"
	for prefix, words := range map[string]string{"string": "text", "bool": "flag", "float": "number", "int": "number", "slice": "list"} {
		if strings.HasPrefix(match[3], prefix) {
			kind = words
		}
	}
	if table, last, dotted := strings.Cut(key, "."); dotted {
		line = lineOfWrongType(text, table, last, kind, line)
	}
	must := map[string]string{
		"text":   "must be a text; put it in quotes",
		"flag":   "must be true or false, without quotes",
		"number": "must be a number, without quotes or unit",
		"list":   "must be a list in brackets, such as [50, 50]",
		"table":  "must be a table; write [" + key + "] on a line of its own",
	}[kind]
	return &wave.ParseError{File: name, Line: line, Msg: fmt.Sprintf("%s: %s", key, must)}
}

// lineOfWrongType finds which of several [[table]] entries holds the wrong value: the library's line is that of the
// last one.
func lineOfWrongType(text, table, key, kind string, otherwise int) int {
	var all map[string]any
	if _, err := toml.Decode(text, &all); err != nil {
		return otherwise
	}
	entries, _ := all[table].([]map[string]any)
	for n, entry := range entries {
		if v, written := entry[key]; written && kindOf(v) != kind {
			return indexLines(text).of(table, n, key)
		}
	}
	return otherwise
}

func kindOf(v any) string {
	switch v.(type) {
	case string:
		return "text"
	case bool:
		return "flag"
	case int64, float64:
		return "number"
	}
	return ""
}
