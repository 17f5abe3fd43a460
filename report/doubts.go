package report

import (
	"fmt"
	"slices"
	"strconv"
	"strings"

	"wavetally/harmonics/fitness"
	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// allNotes joins the notes of the header with those of the reading, each once.
func allNotes(in Inputs) []wave.Note {
	var out []wave.Note
	for _, n := range slices.Concat(in.Header.Notes, in.Notes) {
		if !slices.Contains(out, n) {
			out = append(out, n)
		}
	}
	return out
}

// notesShown is how many notes of one kind are shown in full; a recording with a thousand gaps has a thousand notes.
const notesShown = 5

// doubtsOf brings doubts and loader notes into one list, heaviest first. A note that a doubt of the same code already
// covers is left out: the doubt has the numbers.
func doubtsOf(doubts []fitness.Doubt, notes []wave.Note, sheet site.Sheet, h wave.Header) []Doubt {
	out := []Doubt{}
	for _, d := range doubts {
		out = append(out, doubtOf(d))
	}
	more := map[string]int{}
	shown := map[string]int{}
	for _, n := range notes {
		channel := roleOfNote(n, sheet, h)
		if covered(doubts, n, channel) {
			continue
		}
		if shown[n.Code] == notesShown {
			more[n.Code]++
			continue
		}
		shown[n.Code]++
		out = append(out, Doubt{Code: n.Code, Weight: noteWeight(n.Code), Channel: channel, Text: n.Text, Evidence: map[string]Number{}})
	}
	for i := len(out) - 1; i >= 0; i-- {
		if n := more[out[i].Code]; n > 0 {
			out[i].Text += fmt.Sprintf(" (And %d more like it.)", n)
			delete(more, out[i].Code)
		}
	}
	slices.SortStableFunc(out, func(a, b Doubt) int { return weightRank(a.Weight) - weightRank(b.Weight) })
	return out
}

func doubtOf(d fitness.Doubt) Doubt {
	out := Doubt{Code: d.Code, Weight: d.Weight, Channel: string(d.Channel), Text: d.Text, Evidence: map[string]Number{}, Proposal: d.Proposal}
	for name, v := range d.Evidence {
		out.Evidence[name] = Number(v)
	}
	return out
}

func covered(doubts []fitness.Doubt, n wave.Note, channel string) bool {
	return slices.ContainsFunc(doubts, func(d fitness.Doubt) bool {
		return d.Code == n.Code && (d.Channel == "" || string(d.Channel) == channel || n.Channel == "")
	})
}

// roleOfNote names the channel of a note by what it measures; by the recording's name where it measures nothing.
func roleOfNote(n wave.Note, sheet site.Sheet, h wave.Header) string {
	if n.Channel == "" {
		return ""
	}
	for _, c := range sheet.Channels {
		if strings.EqualFold(c.Source, n.Channel) && c.Measures != "" {
			return c.Measures
		}
		if k, err := strconv.Atoi(c.Source); err == nil && k >= 1 && k <= len(h.Channels) && h.Channels[k-1].Name == n.Channel && c.Measures != "" {
			return c.Measures
		}
	}
	return n.Channel
}

// cautious are the codes of loader notes that change how the numbers must be read.
var cautious = []string{"gap", "truncated", "time-column-wrong", "clock-jump", "overlap", "missing-samples", "clipped"}

func noteWeight(code string) string {
	if slices.Contains(cautious, code) {
		return fitness.Caution
	}
	return fitness.Note
}

func weightRank(w string) int {
	return slices.Index([]string{fitness.StopsVerdict, fitness.Caution, fitness.Note}, w)
}
