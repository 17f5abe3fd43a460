package site

import (
	"slices"
	"strings"
	"unicode"
)

// The names that recorders and their users give to channels, from common practice in the trade: a quantity (V or U,
// I, or a word) and a conductor or a pair of them (1, L1, A or R; N; L1-N; L1-L2 or AB), in either order.

// quantityWords tell a quantity when they stand alone as a word.
var quantityWords = map[string]byte{
	"V": 'V', "U": 'V', "VOLTAGE": 'V', "VOLT": 'V', "VOLTS": 'V', "SPANNUNG": 'V', "TENSION": 'V', "VT": 'V', "PT": 'V',
	"I": 'I', "CURRENT": 'I', "CURR": 'I', "AMP": 'I', "AMPS": 'I', "STROM": 'I', "COURANT": 'I', "CORRIENTE": 'I',
	"CT": 'I', "CLAMP": 'I', "TI": 'I',
}

// fillers are words that tell neither a quantity nor a conductor.
var fillers = map[string]bool{"PHASE": true, "PH": true, "LINE": true, "RMS": true, "INST": true, "WAVEFORM": true, "WAVE": true,
	"INPUT": true, "BUS": true, "MAINS": true, "GRID": true, "SUPPLY": true, "LOAD": true, "TO": true, "KV": true, "MV": true,
	"KA": true, "MA": true}

// conductors are spellings of the ends of a measurement and the number of each conductor: 1, 2, 3, and 0 for neutral.
var conductors = map[string]string{
	"1": "1", "L1": "1", "A": "1", "R": "1", "P1": "1", "PH1": "1", "PHA": "1", "PHASEA": "1", "LA": "1", "L": "1",
	"2": "2", "L2": "2", "B": "2", "S": "2", "P2": "2", "PH2": "2", "PHB": "2", "PHASEB": "2", "LB": "2",
	"3": "3", "L3": "3", "C": "3", "T": "3", "P3": "3", "PH3": "3", "PHC": "3", "PHASEC": "3", "LC": "3",
	"N": "0", "4": "0", "NEUTRAL": "0", "NEUT": "0", "NE": "0", "NPE": "0", "NG": "0",
}

// pairs are the line-to-line roles by their conductors; the other direction measures the same pair turned round.
var pairs = map[string]Role{"12": "V12", "23": "V23", "31": "V31"}

// A guess is a role read from a name.
type guess struct {
	role     Role
	reversed bool // the name tells the opposite direction of the role: V21 is V12 reversed
	weak     bool // the name tells a quantity but no conductor ("Voltage"): phase 1, if nothing else claims it
	rst      bool // the conductor is spelled R, S or T; "Vs" or "It" alone may mean a source or a total
}

// roleByName reads a role from a channel's name, its unit ("V", "A" or "") and the file's own phase designation.
func roleByName(name, unit, phase string) (guess, bool) {
	words := split(name)
	if slices.ContainsFunc(words, openDelta) {
		return guess{}, false
	}
	if g, ok := roleOfWords(words, unit); ok {
		return g, true
	}
	if q := quantityOf(words, unit); q != 0 && phase != "" {
		return roleOf(q, strings.Join(split(phase), ""))
	}
	return guess{}, false
}

// openDelta reports whether a word names the sum of three voltages, as relays record it from an open delta winding: it
// is no voltage of the neutral conductor, whatever phase the file gives it.
func openDelta(word string) bool {
	return slices.Contains([]string{"3U0", "3UO", "3V0", "3VO", "U0", "V0"}, word)
}

// split cuts a name into upper-case words, without brackets' contents, fillers and the recorder's own channel number:
// "CH1" or "Channel A" say nothing about the hook-up.
func split(name string) (words []string) {
	if i := strings.IndexAny(name, "([{"); i > 0 {
		name = name[:i]
	}
	fields := strings.FieldsFunc(strings.ToUpper(name), func(r rune) bool { return !unicode.IsLetter(r) && !unicode.IsDigit(r) })
	for i := 0; i < len(fields); i++ {
		w := fields[i]
		switch {
		case w == "CH" || w == "CHAN" || w == "CHANNEL" || w == "AI" || w == "ANALOG":
			i++ // what follows is its number
		case isNumbered(w, "CH") || isNumbered(w, "CHAN") || isNumbered(w, "CHANNEL") || isNumbered(w, "AI") || isNumbered(w, "COL"):
		case !fillers[w]:
			words = append(words, w)
		}
	}
	return words
}

func isNumbered(word, prefix string) bool {
	rest, ok := strings.CutPrefix(word, prefix)
	return ok && rest != "" && strings.Trim(rest, "0123456789") == ""
}

// quantityOf tells V or I from the unit, else from a word; 0 when neither does.
func quantityOf(words []string, unit string) byte {
	switch unit {
	case "V":
		return 'V'
	case "A":
		return 'I'
	}
	for _, w := range words {
		if q := quantityWords[w]; q != 0 {
			return q
		}
	}
	return 0
}

func roleOfWords(words []string, unit string) (guess, bool) {
	unitQuantity := quantityOf(nil, unit)
	for i, w := range words {
		// A word for the quantity, and the others for the conductors: "Voltage L1-N", "A phase current", "I L1".
		alone := len(words) == 1 && len(w) == 2 // "VT" is the third of VR, VS, VT, rather than a transformer
		if q := quantityWords[w]; q != 0 && !alone && agree(q, unitQuantity) {
			rest := append(append([]string(nil), words[:i]...), words[i+1:]...)
			if g, ok := roleOf(q, strings.Join(rest, "")); ok {
				return g, true
			}
		}
	}
	whole := strings.Join(words, "")
	if whole == "" {
		return guess{}, false
	}
	for _, prefix := range []string{"VOLTAGE", "VOLT", "CURRENT", "CURR", "CLAMP", "AMP", "CT", "VT", "PT", "V", "U", "I"} {
		rest, ok := strings.CutPrefix(whole, prefix)
		if q := quantityWords[prefix]; ok && rest != "" && agree(q, unitQuantity) {
			if g, ok := roleOf(q, rest); ok {
				return g, true
			}
		}
	}
	// "L1" or "AN" alone: the unit says of what. A lone digit is a column number, not a conductor.
	if unitQuantity != 0 && strings.Trim(whole, "0123456789") != "" {
		return roleOf(unitQuantity, whole)
	}
	return guess{}, false
}

// agree reports whether what a word says does not contradict the unit.
func agree(word, unit byte) bool { return unit == 0 || word == unit }

// roleOf joins a quantity with the spelling of one conductor or of two.
func roleOf(quantity byte, ends string) (guess, bool) {
	if ends == "" {
		return guess{role: single(quantity, "1"), weak: true}, true
	}
	if quantity == 'I' {
		return currentIn(ends)
	}
	if c, ok := conductors[ends]; ok {
		return guess{role: single('V', c), rst: strings.Contains("RST", ends)}, true
	}
	if ends == "AC" || ends == "LL" {
		return guess{}, false // "VAC" nearly always means alternating voltage
	}
	for cut := 1; cut < len(ends); cut++ {
		if g, ok := between(conductors[ends[:cut]], conductors[ends[cut:]]); ok {
			return g, true
		}
	}
	return guess{}, false
}

// currentIn names the current in a conductor. Some recorders name the currents like the voltages, "I1N"; "I0" is the
// residual current, which a neutral sensor or the sum of three gives.
func currentIn(ends string) (guess, bool) {
	if ends == "0" {
		ends = "N"
	}
	c, ok := conductors[ends]
	if phase, cut := strings.CutSuffix(ends, "N"); cut && !ok {
		c, ok = conductors[phase]
	}
	return guess{role: single('I', c), rst: strings.Contains("RST", ends)}, ok
}

// between names the voltage from one conductor to another, each "1", "2", "3", "0" for neutral, or "".
func between(from, to string) (guess, bool) {
	switch {
	case from == "" || to == "" || from == to:
		return guess{}, false
	case to == "0":
		return guess{role: single('V', from)}, true
	case from == "0":
		return guess{role: single('V', to), reversed: true}, true
	case pairs[from+to] != "":
		return guess{role: pairs[from+to]}, true
	}
	return guess{role: pairs[to+from], reversed: true}, true
}

func single(quantity byte, conductor string) Role {
	if conductor == "0" {
		conductor = "N"
	}
	return Role(string(quantity) + conductor)
}
