// Package fitness tells whether a recording is fit to judge by: wiring, sensors, sampling, length. What it finds is a
// [Doubt], our word for anything in the data that weakens a number.
package fitness

import "wavetally/harmonics/site"

// Weights of a doubt.
const (
	Note         = "note"          // worth knowing
	Caution      = "caution"       // the numbers must be read with care
	StopsVerdict = "stops verdict" // the affected findings are not assessed; numbers are still shown
)

// A Doubt is one thing that weakens the numbers, with the evidence for it.
type Doubt struct {
	Code     string             // short and stable, such as "current-reversed"
	Weight   string             // Note, Caution or StopsVerdict
	Channel  site.Role          // "" for the whole recording
	Text     string             // one or two sentences: what is wrong, how we know, what to do
	Evidence map[string]float64 // numbers behind it, by name with unit: "angle_deg", "span_s"
	Proposal []string           // ready lines for the site sheet, when there is something to correct
}
