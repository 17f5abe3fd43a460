package main

import (
	"io/fs"
	"os"
	"path/filepath"
	"reflect"
	"regexp"
	"strings"
	"testing"

	"github.com/google/go-cmp/cmp"

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

// Every test that DEVELOPERS.md names is there.
func TestTestsInTheDocumentsExist(t *testing.T) {
	text, err := os.ReadFile("../../DEVELOPERS.md")
	if err != nil {
		t.Fatal(err)
	}
	all := map[string]bool{}
	declared := regexp.MustCompile(`(?m)^func (Test\w+|Fuzz\w+)\(`)
	err = filepath.WalkDir("../..", func(path string, d fs.DirEntry, err error) error {
		if err != nil || d.IsDir() || !strings.HasSuffix(path, "_test.go") {
			return err
		}
		code, err := os.ReadFile(path)
		for _, m := range declared.FindAllStringSubmatch(string(code), -1) {
			all[m[1]] = true
		}
		return err
	})
	if err != nil {
		t.Fatal(err)
	}
	for _, m := range regexp.MustCompile(`\b(Test|Fuzz)[A-Z]\w+`).FindAllString(string(text), -1) {
		if !all[m] {
			t.Errorf("DEVELOPERS.md names %s, which is not there", m)
		}
	}
}

// What the README shows of the program is what the program says: each block after a comment <!-- wavetally … --> is
// that command's output, in a folder in which the demonstration has been run. -update rewrites the blocks.
func TestReadmeShowsWhatTheProgramSays(t *testing.T) {
	if testing.Short() {
		t.Skip("the demonstration takes a few seconds")
	}
	text, err := os.ReadFile("../../README.md")
	if err != nil {
		t.Fatal(err)
	}
	t.Chdir(t.TempDir())
	said(t, []string{"demo"})
	count := 0
	shown := regexp.MustCompile("(?s)<!-- wavetally ([^>]*) -->\n```\n(.*?)```\n")
	got := shown.ReplaceAllStringFunc(string(text), func(block string) string {
		count++
		args := shown.FindStringSubmatch(block)[1]
		return "<!-- wavetally " + args + " -->\n```\n$ wavetally " + args + "\n" + said(t, strings.Fields(args)) + "```\n"
	})
	if count == 0 {
		t.Error("the README shows nothing of the program")
	}
	if *update {
		if err := os.WriteFile(readme, []byte(got), 0o644); err != nil {
			t.Fatal(err)
		}
	} else if diff := cmp.Diff(string(text), got); diff != "" {
		t.Errorf("run go test ./cmd/wavetally -run Readme -update, and look at the difference:\n%s", diff)
	}
}

// readme is the README's path, whatever the current folder.
var readme = func() string {
	path, err := filepath.Abs("../../README.md")
	if err != nil {
		panic(err)
	}
	return path
}()

// said runs the program and returns its output.
func said(t *testing.T, args []string) string {
	t.Helper()
	var out, complaint strings.Builder
	if code := run(t.Context(), args, strings.NewReader(""), &out, &complaint); code != 0 {
		t.Fatalf("wavetally %s: code %d, %s", strings.Join(args, " "), code, complaint.String())
	}
	return out.String()
}

// Every command line in the documents has commands and flags that exist.
func TestCommandLinesInTheDocumentsWork(t *testing.T) {
	line := regexp.MustCompile("(?m)(?:^    |<!-- |`|^//\t)wavetally ([^\\n`]*?)(?: -->|`|$)")
	for _, doc := range []string{"../../README.md", "../../DEVELOPERS.md", "main.go"} {
		text, err := os.ReadFile(doc)
		if err != nil {
			t.Fatal(err)
		}
		for _, m := range line.FindAllStringSubmatch(string(text), -1) {
			words := strings.Fields(strings.NewReplacer("[", "", "]", "", `\|`, " ").Replace(m[1]))
			if words[0] == "COMMAND" {
				continue
			}
			cmd, rest, err := newRoot(&app{}).Find(words)
			if err == nil {
				err = cmd.ParseFlags(rest)
			}
			if err != nil {
				t.Errorf("%s: wavetally %s: %v", doc, m[1], err)
			}
		}
	}
}

// Every command says in a line what it does, and shows an example.
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
