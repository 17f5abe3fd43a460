package fitness

import (
	"fmt"
	"math"
	"time"
)

// frequency says how well the fundamental could be followed.
func (a *assessment) frequency() {
	w, l := a.sum.Windows, a.sum.Lock
	if l.Unlocked > 0 {
		share := float64(l.Unlocked) / float64(w.Total)
		weight := Caution
		if share > unlockedStops {
			weight = StopsVerdict
		}
		a.add(Doubt{Code: "no-lock", Weight: weight,
			Text: fmt.Sprintf("The fundamental was lost in %d of %d windows (%s %%) on %s; they are left out. Check that channel, and whether the supply was interrupted.",
				l.Unlocked, w.Total, figure(100*share), a.sum.Reference),
			Evidence: map[string]float64{"windows": float64(l.Unlocked), "windows_pct": 100 * share}})
	}
	if l.Steps > 0 || l.LargestChange > changeCaution {
		weight := Caution
		// Single steps only cost their own windows, which are left out.
		if l.LargestChange > changeStops && l.Steps == 0 || float64(l.Steps) > unlockedStops*float64(w.Total) {
			weight = StopsVerdict
		}
		a.add(Doubt{Code: "unsteady-frequency", Weight: weight,
			Text: fmt.Sprintf("The frequency changes by up to %s Hz from one window of 0.2 s to the next, and jumped inside %d windows: the supply is weak (a generator?), or the time base of the recording is not steady. Windows with a jump are left out.",
				figure(l.LargestChange), l.Steps),
			Evidence: map[string]float64{"largest_change_hz": l.LargestChange, "windows_with_a_step": float64(l.Steps)}})
	}
}

// span says what the length of the record allows, and what is missing from it.
func (a *assessment) span() {
	for _, n := range a.notes {
		if n.Code == "clock-jump" || n.Code == "time-column-wrong" {
			a.add(Doubt{Code: n.Code, Weight: Caution, Text: n.Text})
		}
	}
	if n := len(a.sum.Gaps); n > 0 {
		var lost, longest, at float64
		jump := false
		for _, g := range a.sum.Gaps {
			lost += g.Length
			if g.Length > longest {
				longest, at = g.Length, g.At
			}
			// Daylight saving time moves a clock by an hour, to the second.
			jump = jump || math.Abs(g.Length-3600) < 2
		}
		a.add(Doubt{Code: "gap", Weight: Caution,
			Text: fmt.Sprintf("Samples are missing in %d places, %s in all, the longest %s at %s; the 10 min intervals they fall into are left out. See whether the recorder's memory or link was too slow.",
				n, length(lost), length(longest), length(at)+" into the record"),
			Evidence: map[string]float64{"gaps": float64(n), "lost_s": lost, "longest_s": longest}})
		if jump && !a.has("clock-jump", "") {
			a.add(Doubt{Code: "clock-jump", Weight: Caution,
				Text:     "The clock jumps by one hour: the recorder followed daylight saving time. Set it to UTC; intervals on either side are kept apart.",
				Evidence: map[string]float64{"jump_s": 3600}})
		}
	}
	valid, want := 0, a.sum.Duration/600
	for _, v := range a.sum.Tens {
		if v.Valid() {
			valid++
		}
	}
	if d := a.sum.Duration; d < spanWhole*0.999 {
		weight := Caution
		text := fmt.Sprintf("The record spans %s, less than the week that weekly rules ask for; their values are indicative. Record for seven days that include a working week.", length(d))
		switch {
		case d > spanCaution:
			weight = Note
		case d < spanStops*0.999:
			text = fmt.Sprintf("The record spans %s: it shows causes, not compliance. No rule for a day or a week can be judged on it; values are indicative. Record for seven days that include a working week.", length(d))
		}
		a.add(Doubt{Code: "short-record", Weight: weight, Text: text, Evidence: map[string]float64{"span_s": d}})
	} else if share := float64(valid) / want; want >= 1 && share < validShare {
		a.add(Doubt{Code: "gap", Weight: Caution,
			Text:     fmt.Sprintf("Only %s %% of the 10 min intervals are valid; the rest hold gaps, dips, swells or interruptions and are left out.", figure(100*share)),
			Evidence: map[string]float64{"valid_pct": 100 * share}})
	}
}

// length writes a time span the way it is said.
func length(seconds float64) string {
	switch d := time.Duration(seconds * 1e9); {
	case seconds < 1:
		return figure(1000*seconds) + " ms"
	case d < 2*time.Minute:
		return figure(seconds) + " s"
	case d < 2*time.Hour:
		return figure(seconds/60) + " min"
	case d < 48*time.Hour:
		return figure(seconds/3600) + " h"
	}
	return figure(seconds/86400) + " days"
}
