package pdf_test

import (
	"bytes"
	"errors"
	"fmt"
	"html"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"wavetally/report"
	"wavetally/report/internal/fixture"
	"wavetally/report/pdf"
)

func write(t testing.TB, s *report.Survey, paper string) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := pdf.Write(&b, s, pdf.Options{Paper: paper}); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

type key struct{ name, paper string }

var files = map[key][]byte{}

// file is a hard survey's document, written once for all tests.
func file(t testing.TB, name, paper string) []byte {
	t.Helper()
	k := key{name, paper}
	if files[k] == nil {
		files[k] = write(t, surveys()[name], paper)
	}
	return files[k]
}

// The same survey gives the same bytes, also when it is built anew from the same inputs.
func TestSameBytesEveryTime(t *testing.T) {
	for name := range surveys() {
		a, b := file(t, name, "A4"), write(t, hard[name](), "A4")
		if !bytes.Equal(a, b) {
			t.Errorf("%s: two runs differ (%d and %d bytes)", name, len(a), len(b))
		}
	}
}

// The date of the document is the survey's, not today's.
func TestDatesAreTheSurveys(t *testing.T) {
	want := "D:" + fixture.MadeAt.Format("20060102150405")
	if n := bytes.Count(write(t, fixture.Tiny(), ""), []byte(want)); n != 2 {
		t.Errorf("%s stands %d times, want twice", want, n)
	}
}

// ISO 216: A4 is 210 mm × 297 mm. ANSI Y14.1: Letter is 8.5 in × 11 in. 72 points are an inch.
func TestPaper(t *testing.T) {
	for _, c := range []struct {
		paper  string
		survey *report.Survey
		want   string
	}{
		{"A4", fixture.Tiny(), "595.28 841.89"}, {"letter", surveys()["week"], "612.00 792.00"},
		{"", surveys()["week"], "595.28 841.89"}, {"", fixture.Tiny(), "612.00 792.00"}, // at 60 Hz
	} {
		if !bytes.Contains(write(t, c.survey, c.paper), []byte("/MediaBox [0 0 "+c.want+"]")) {
			t.Errorf("paper %q is not %s", c.paper, c.want)
		}
	}
	err := pdf.Write(&bytes.Buffer{}, fixture.Tiny(), pdf.Options{Paper: "A5"})
	if err == nil || !strings.Contains(err.Error(), "A4 or Letter") {
		t.Errorf("paper A5: %v", err)
	}
}

type failing struct{ after int }

var errFull = errors.New("no space left")

func (f *failing) Write(b []byte) (int, error) {
	if len(b) > f.after {
		return f.after, errFull
	}
	f.after -= len(b)
	return len(b), nil
}

func TestWriteErrorIsReturned(t *testing.T) {
	for _, after := range []int{0, 1, 10_000} {
		if err := pdf.Write(&failing{after}, fixture.Tiny(), pdf.Options{}); !errors.Is(err, errFull) {
			t.Errorf("a writer that fails after %d bytes gave %v", after, err)
		}
	}
}

// Charts are vectors: the file holds no picture, and stays small.
func TestVectorsAndSize(t *testing.T) {
	const most = 1 << 20
	for name := range surveys() {
		b := file(t, name, "A4")
		if bytes.Contains(b, []byte("/Subtype /Image")) {
			t.Errorf("%s holds a bitmap", name)
		}
		if len(b) > most {
			t.Errorf("%s has %d bytes", name, len(b))
		}
	}
}

func TestPageCounts(t *testing.T) {
	for name, want := range map[string][2]int{"week": {10, 18}, "short": {9, 16}, "tiny": {5, 9}, "voltages only": {7, 14}, "eleven channels": {12, 26}} {
		n := bytes.Count(file(t, name, "A4"), []byte("<</Type /Page\n"))
		if n < want[0] || n > want[1] {
			t.Errorf("%s has %d pages, want %d to %d", name, n, want[0], want[1])
		}
	}
}

// A word is a word of a page and the box it stands in, in points from the page's top left corner.
type word struct {
	text           string
	x0, y0, x1, y1 float64
}

type page struct {
	width, height float64
	words         []word
}

var (
	pageTag = regexp.MustCompile(`<page width="([\d.]+)" height="([\d.]+)">`)
	wordTag = regexp.MustCompile(`<word xMin="([-\d.]+)" yMin="([-\d.]+)" xMax="([-\d.]+)" yMax="([-\d.]+)">(.*)</word>`)
)

var read = map[key][]page{}

// pagesOf reads a hard survey's document with poppler, which shares no code with what wrote it.
func pagesOf(t *testing.T, name, paper string) []page {
	t.Helper()
	k := key{name, paper}
	if read[k] == nil {
		read[k] = poppler(t, file(t, name, paper))
	}
	return read[k]
}

func poppler(t *testing.T, file []byte) []page {
	t.Helper()
	tool, err := exec.LookPath("pdftotext")
	if err != nil {
		t.Skip("pdftotext (poppler) is not here: where words stand was not checked")
	}
	in := filepath.Join(t.TempDir(), "survey.pdf")
	if err := os.WriteFile(in, file, 0o600); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command(tool, "-bbox", in, "-").CombinedOutput()
	if err != nil {
		t.Fatalf("pdftotext: %v\n%s", err, out)
	}
	var pages []page
	for _, line := range strings.Split(string(out), "\n") {
		if m := pageTag.FindStringSubmatch(line); m != nil {
			var p page
			fmt.Sscan(m[1]+" "+m[2], &p.width, &p.height)
			pages = append(pages, p)
		} else if m := wordTag.FindStringSubmatch(line); m != nil {
			w := word{text: html.UnescapeString(m[5])}
			fmt.Sscan(strings.Join(m[1:5], " "), &w.x0, &w.y0, &w.x1, &w.y1)
			pages[len(pages)-1].words = append(pages[len(pages)-1].words, w)
		}
	}
	if len(pages) == 0 {
		t.Fatal("poppler found no page")
	}
	return pages
}

// Nothing is cut off and nothing stands upon something else, on both papers, whatever the survey.
func TestEveryWordHasItsPlace(t *testing.T) {
	const left, right, edge = 46, 42, 0.8                                                 // margins of the page; a glyph may reach over its own box by a hair
	onLetter := []string{"week", "tiny", "eleven channels", "long words", "not measured"} // the ones that have failed there
	for name := range surveys() {
		for _, paper := range []string{"A4", "Letter"} {
			if paper == "Letter" && !slices.Contains(onLetter, name) {
				continue
			}
			for i, p := range pagesOf(t, name, paper) {
				for k, w := range p.words {
					if w.x0 < left-edge || w.x1 > p.width-right+edge || w.y0 < 20 || w.y1 > p.height-18 {
						t.Errorf("%s on %s, page %d: %q reaches from (%.1f, %.1f) to (%.1f, %.1f)", name, paper, i+1, w.text, w.x0, w.y0, w.x1, w.y1)
					}
					for _, v := range p.words[:k] {
						if overlap(v, w) {
							t.Errorf("%s on %s, page %d: %q and %q overlap at (%.1f, %.1f)", name, paper, i+1, v.text, w.text, w.x0, w.y0)
						}
					}
				}
			}
		}
	}
}

// overlap reports whether two words cover each other. Boxes reach from ascent to descent, so lines set closely touch;
// a third of the height is more than that.
func overlap(a, b word) bool {
	x := min(a.x1, b.x1) - max(a.x0, b.x0)
	y := min(a.y1, b.y1) - max(a.y0, b.y0)
	return x > 1 && y > 0.34*min(a.y1-a.y0, b.y1-b.y0)
}

// Pages are filled: all but the last to two thirds at least.
func TestNoHalfEmptyPages(t *testing.T) {
	for name := range surveys() {
		pages := pagesOf(t, name, "A4")
		for i, p := range pages[:len(pages)-1] {
			lowest := 0.0
			for _, w := range p.words {
				if w.y1 < p.height-40 { // the foot
					lowest = max(lowest, w.y1)
				}
			}
			if lowest < 0.66*p.height {
				t.Errorf("%s: page %d of %d ends at %.0f %% of its height", name, i+1, len(pages), 100*lowest/p.height)
			}
		}
	}
}

func (p page) text() string {
	var words []string
	for _, w := range p.words {
		words = append(words, w.text)
	}
	return strings.Join(words, " ")
}

// Every page says what it belongs to.
func TestFeet(t *testing.T) {
	s := surveys()["week"]
	pages := pagesOf(t, "week", "A4")
	for i, p := range pages {
		for _, want := range []string{fmt.Sprintf("page %d of %d", i+1, len(pages)), "wavetally 0.1.0", s.Recording.Files[0].SHA256[:16]} {
			if !strings.Contains(p.text(), want) {
				t.Errorf("page %d lacks %q", i+1, want)
			}
		}
	}
}

// What was not measured is a dash or said in words; no number that is none gets onto paper.
func TestNotMeasuredIsSaid(t *testing.T) {
	for name := range surveys() {
		for i, p := range pagesOf(t, name, "A4") {
			for _, w := range p.words {
				if bad := strings.Trim(w.text, "+-−%()°,;.:"); bad == "NaN" || bad == "Inf" || bad == "∞" || strings.Contains(w.text, "%!") {
					t.Errorf("%s, page %d: %q", name, i+1, w.text)
				}
			}
		}
	}
}

// The document holds what it must, in this order.
func TestWhatItHolds(t *testing.T) {
	all := map[string]string{}
	for name, s := range surveys() {
		var pages []string
		for _, p := range pagesOf(t, name, "A4") {
			pages = append(pages, p.text())
		}
		all[name] = strings.Join(pages, "\n")
		for _, c := range s.Cautions {
			if words := strings.Fields(c); !strings.Contains(all[name], strings.Join(words[:5], " ")) {
				t.Errorf("%s lacks the caution %q", name, c)
			}
		}
	}
	at := -1
	for _, want := range []string{"Harmonic survey", "Exceeds limits", "Against the limits", "The record", "What next", "Not examined", "Site and recording", "Verdicts",
		"Spectrum", "Waveform", "Over time", "Channels, phasors and power", "Order by order", "Doubts", "Method", "Files", "Safety, and what this report is not",
		"Surveyed by", "Reviewed by responsible engineer", "Licence no.", "Signature"} {
		next := strings.Index(all["week"][at+1:], want)
		if next < 0 {
			t.Fatalf("%q is missing, or not after what should stand before it", want)
		}
		at += 1 + next
	}
	for name, wants := range map[string][]string{
		"tiny":       {"No limit applied", "Unnamed site, outlet.csv"},
		"short":      {"Undecided", "lines of 5 Hz over time"},
		"long words": {"Zoë's Großbäckerei № 7 □□ □", "The plant", "Permissible load of the declared transformer: 0.87 pu", "K-factor: not measured", "Proposed for the site sheet", "reversed = true"},
		"no limits":  {"No limit applied"},
	} {
		for _, want := range wants {
			if !strings.Contains(all[name], want) {
				t.Errorf("%s lacks %q", name, want)
			}
		}
	}
}

// Every chart's title, which states what it shows, is on paper; so are its limits' names.
func TestEveryChartIsThere(t *testing.T) {
	for name, s := range surveys() {
		var text strings.Builder
		for _, p := range pagesOf(t, name, "A4") {
			text.WriteString(p.text() + " ")
		}
		for _, c := range report.Charts(s) {
			if words := strings.Fields(c.Title); !strings.Contains(text.String(), strings.Join(words[:min(5, len(words))], " ")) {
				t.Errorf("%s lacks %q", name, c.Title)
			}
		}
	}
}

func BenchmarkWeek(b *testing.B) {
	s := fixture.Week()
	for b.Loop() {
		write(b, s, "A4")
	}
}
