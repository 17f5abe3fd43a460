package report_test

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/limits"
	"wavetally/harmonics/wave"
	"wavetally/report"
	"wavetally/report/internal/fixture"
)

// A note that a doubt of the same code covers is not shown twice; the others become doubts on what the channel measures.
func TestNotesBecomeDoubts(t *testing.T) {
	in := fixture.TinyInputs()
	in.Header.Notes = []wave.Note{
		{Code: "missing-samples", Channel: "CH2", Text: "outlet.csv: 3 cells are empty."},
		{Code: "odd-unit", Text: "outlet.csv:1: unit 'Volt' is read as V."},
		{Code: "low-resolution", Channel: "CH2", Text: "steps of 0.04 A"},
		{Code: "low-resolution", Channel: "CH1", Text: "steps of 0.5 V"},
	}
	in.Notes = in.Header.Notes[:1] // the reading repeats what the header had
	var got []string
	for _, d := range report.Build(in).Doubts {
		got = append(got, d.Weight+" "+d.Code+" "+d.Channel)
	}
	want := []string{"caution short-record ", "caution missing-samples I1", "note low-resolution I1", "note odd-unit ", "note low-resolution V1"}
	if !slices.Equal(got, want) {
		t.Errorf("got  %q\nwant %q", got, want)
	}
}

// A thousand gaps are a handful of doubts and a count, not a thousand pages.
func TestManyNotesAreFolded(t *testing.T) {
	in := fixture.TinyInputs()
	for i := range 1000 {
		in.Notes = append(in.Notes, wave.Note{Code: "gap", Text: fmt.Sprintf("gap %d", i)})
	}
	var gaps []string
	for _, d := range report.Build(in).Doubts {
		if d.Code == "gap" {
			gaps = append(gaps, d.Text)
		}
	}
	if len(gaps) != 5 || !strings.HasSuffix(gaps[4], "(And 995 more like it.)") {
		t.Errorf("%d: %q", len(gaps), gaps)
	}
}

func TestHeaviestDoubtFirst(t *testing.T) {
	in := fixture.TinyInputs()
	in.Doubts = []fitness.Doubt{{Code: "a", Weight: fitness.Note}, {Code: "b", Weight: fitness.StopsVerdict}, {Code: "c", Weight: fitness.Caution}, {Code: "d", Weight: fitness.StopsVerdict}}
	var got string
	for _, d := range report.Build(in).Doubts {
		got += d.Code
	}
	if got != "bdca" {
		t.Error(got)
	}
}

// TDD is THD × I1 / IL (shared standards, 1.3: I1 80 A, IL 100 A, THD 10 % give 8 %).
func TestTDD(t *testing.T) {
	in := fixture.TinyInputs()
	in.Sheet.Supply.DemandCurrent = 100
	i := in.Summary.Channel("I1")
	i.Fundamental, i.THDPct = 80, 10
	s := report.Build(in)
	if got := s.Channels[1].TDD; got == nil || math.Abs(float64(got.Mean)-8) > 1e-12 {
		t.Errorf("TDD %+v", got)
	}
	if s.Channels[0].TDD != nil {
		t.Error("a voltage has a TDD")
	}
}

// Samples a file are only known where one file is the whole recording.
func TestSamplesOfFiles(t *testing.T) {
	if f := fixture.Tiny().Recording.Files[0]; f.Samples == nil || *f.Samples != 2520 {
		t.Errorf("%v", f.Samples)
	}
	for _, f := range fixture.Week().Recording.Files {
		if f.Samples != nil {
			t.Errorf("%s: %d samples", f.Name, *f.Samples)
		}
	}
}

// Build must stand whatever the measurement left out.
func TestBuildOfAlmostNothing(t *testing.T) {
	in := fixture.TinyInputs()
	in.Summary.Power, in.Summary.Capture, in.Summary.Channels, in.Summary.Facts = nil, nil, nil, nil
	in.Sheet.Channels, in.Doubts, in.Header.Files = nil, nil, nil
	s := report.Build(in)
	if charts := report.Charts(s); len(charts) != 0 {
		t.Errorf("%d charts of nothing", len(charts))
	}
	report.Tables(s)
	report.FullTables(s)
	if s.Headline.Verdict != limits.NotAssessed {
		t.Errorf("verdict %q", s.Headline.Verdict)
	}
	writeJSON(t, s)
}
