package main

import (
	"os"
	"reflect"
	"regexp"
	"strings"
	"testing"

	"wavetally/harmonics/site"
	"wavetally/report"
)

// Every key of survey.json stands in DEVELOPERS.md, the ones of the site sheet aside: `wavetally sheet` explains those.
func TestEveryKeyOfTheSurveyIsDocumented(t *testing.T) {
	text, err := os.ReadFile("../../DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	for _, key := range jsonKeys(reflect.TypeFor[report.Survey]()) {
		if !strings.Contains(string(text), "`"+key+"`") {
			t.Errorf("DEVELOPERS.md does not explain %q", key)
		}
	}
}

// jsonKeys lists the JSON keys of a struct and of those in it.
func jsonKeys(typ reflect.Type) (keys []string) {
	for typ.Kind() == reflect.Pointer || typ.Kind() == reflect.Slice || typ.Kind() == reflect.Map {
		typ = typ.Elem()
	}
	if typ.Kind() != reflect.Struct || typ == reflect.TypeFor[site.Sheet]() || typ.PkgPath() == "time" {
		return nil
	}
	for i := range typ.NumField() {
		key, _, _ := strings.Cut(typ.Field(i).Tag.Get("json"), ",")
		if key == "" || key == "-" {
			continue
		}
		keys = append(append(keys, key), jsonKeys(typ.Field(i).Type)...)
	}
	return keys
}

// Every path that the documents name is there.
func TestPathsInTheDocumentsExist(t *testing.T) {
	path := regexp.MustCompile("(?:`|\\]\\()((?:cmd|harmonics|loaders|report|testdata|\\.ci)(?:/[A-Za-z0-9_.-]+)+)[`)]")
	for _, doc := range []string{"README.md", "DEVELOPERS.md"} {
		text, err := os.ReadFile("../../" + doc)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range path.FindAllStringSubmatch(string(text), -1) {
			if _, err := os.Stat("../../" + m[1]); err != nil {
				t.Errorf("%s names %s, which is not there", doc, m[1])
			}
		}
	}
}

// The package comment shows commands that exist, with flags that exist.
func TestHelpCoversTheCommands(t *testing.T) {
	for _, c := range newRoot(&app{}).Commands() {
		if c.Name() == "help" || c.Name() == "completion" {
			continue
		}
		if c.Short == "" || c.Example == "" {
			t.Errorf("command %s has no short text or no example", c.Name())
		}
	}
}
