// Package site holds what is declared about an installation and its hook-up, as plain data. The site sheet
// (a TOML file, read by loaders/sitesheet) is its written form; the field tags name the keys there and in survey.json.
//
// A number that was not declared is 0, a text that was not declared is empty.
package site

import "strings"

// A Sheet is one site sheet.
type Sheet struct {
	Site     Identity  `toml:"site" json:"site"`
	Supply   Supply    `toml:"supply" json:"supply"`
	Limits   Limits    `toml:"limits" json:"limits"`
	Channels []Channel `toml:"channel" json:"channel"`

	File      File      `toml:"file" json:"file,omitzero"`           // overrules what a loader guesses
	Intervals Intervals `toml:"intervals" json:"intervals,omitzero"` // of an interval log
	Columns   []Column  `toml:"column" json:"column,omitempty"`      // of an interval log

	// Guessed says, one sentence each, what was not declared and was taken from the recording instead.
	Guessed []string `toml:"-" json:"guessed"`
}

// Identity says whose recording this is and why it was made.
type Identity struct {
	Name       string `toml:"name" json:"name"`
	Location   string `toml:"location" json:"location"`
	SurveyedBy string `toml:"surveyed_by" json:"surveyed_by"`
	Purpose    string `toml:"purpose" json:"purpose"`
	Timezone   string `toml:"timezone" json:"timezone"` // IANA name; "" is UTC
}

// Connections of the supply.
const (
	SinglePhase = "single-phase"
	SplitPhase  = "split-phase"
	Wye4        = "wye-4wire"
	Wye3        = "wye-3wire"
	Delta3      = "delta-3wire"
)

// Connections lists every value that Supply.Connection may have.
var Connections = []string{SinglePhase, SplitPhase, Wye4, Wye3, Delta3}

// Supply describes the electrical network at the measuring point.
type Supply struct {
	Connection       string  `toml:"connection" json:"connection"`
	NominalVoltage   float64 `toml:"nominal_voltage" json:"nominal_voltage"`     // V, line to line; single-phase: line to neutral; split-phase: line to neutral
	NominalFrequency float64 `toml:"nominal_frequency" json:"nominal_frequency"` // Hz, 50 or 60
	Point            string  `toml:"point" json:"point"`                         // "PCC" or "internal"

	ShortCircuitCurrent    float64 `toml:"short_circuit_current" json:"short_circuit_current"`         // A, maximum at the point
	ShortCircuitCurrentMin float64 `toml:"short_circuit_current_min" json:"short_circuit_current_min"` // A, minimum in normal operation
	ShortCircuitSource     string  `toml:"short_circuit_source" json:"short_circuit_source"`
	DemandCurrent          float64 `toml:"demand_current" json:"demand_current"` // A, IL: maximum demand load current, fundamental
	DemandSource           string  `toml:"demand_source" json:"demand_source"`

	Generation bool `toml:"generation" json:"generation"` // on-site generation may push power out: reversed flow is no wiring fault

	TransformerKVA       float64   `toml:"transformer_kva" json:"transformer_kva"`
	TransformerImpedance float64   `toml:"transformer_impedance" json:"transformer_impedance"`   // %
	TransformerEddyLoss  float64   `toml:"transformer_eddy_loss" json:"transformer_eddy_loss"`   // winding eddy loss, pu of the I²R loss at rated load
	TransformerStrayLoss float64   `toml:"transformer_stray_loss" json:"transformer_stray_loss"` // other stray loss, pu of the I²R loss; liquid-filled only
	TransformerKRating   float64   `toml:"transformer_k_rating" json:"transformer_k_rating"`     // 0: none declared
	CapacitorKvar        []float64 `toml:"capacitor_kvar" json:"capacitor_kvar"`                 // steps
	CapacitorDetuning    float64   `toml:"capacitor_detuning" json:"capacitor_detuning"`         // reactor share p, %; 0: none
}

// Limits names the rule sets to judge by: names from `wavetally rules`, or paths of rule files.
type Limits struct {
	Apply []string `toml:"apply" json:"apply"`
}

// A Channel says what a channel of the recording measures.
type Channel struct {
	Source      string  `toml:"source" json:"source"`           // the recording's channel name, or its number from 1
	Measures    string  `toml:"measures" json:"measures"`       // a Role
	Scale       float64 `toml:"scale" json:"scale"`             // multiplies what the file holds, after unit conversion; 0 or absent: 1
	Reversed    bool    `toml:"reversed" json:"reversed"`       // the sensor points the wrong way: the sign is turned
	Uncertainty float64 `toml:"uncertainty" json:"uncertainty"` // % of reading of sensor and input together; 0: not declared
}

// Gain is the factor from the recording's base-unit sample to the quantity at the sensor's primary side.
func (c Channel) Gain() float64 {
	g := c.Scale
	if g == 0 {
		g = 1
	}
	if c.Reversed {
		g = -g
	}
	return g
}

// A Role is what a channel measures: V1 V2 V3 (to neutral), V12 V23 V31 (line to line), VN, I1 I2 I3 IN.
type Role string

// Roles lists every role in the order in which reports show them.
var Roles = []Role{"V1", "V2", "V3", "V12", "V23", "V31", "VN", "I1", "I2", "I3", "IN"}

// Known reports whether r is one of Roles.
func (r Role) Known() bool {
	for _, k := range Roles {
		if r == k {
			return true
		}
	}
	return false
}

// Voltage reports whether r is a voltage, line to line included.
func (r Role) Voltage() bool { return strings.HasPrefix(string(r), "V") }

// Current reports whether r is a current.
func (r Role) Current() bool { return strings.HasPrefix(string(r), "I") }

// LineToLine reports whether r is a voltage between two lines.
func (r Role) LineToLine() bool { return len(r) == 3 && r[0] == 'V' }

// Neutral reports whether r belongs to the neutral conductor.
func (r Role) Neutral() bool { return r == "VN" || r == "IN" }

// Phase returns 1, 2 or 3 for V1…V3 and I1…I3, and for V12, V23, V31 the first of its two; 0 for the neutral.
func (r Role) Phase() int {
	if len(r) >= 2 && r[1] >= '1' && r[1] <= '3' {
		return int(r[1] - '0')
	}
	return 0
}

// ThreePhase reports whether the supply has three line conductors.
func (s Supply) ThreePhase() bool {
	return s.Connection == Wye4 || s.Connection == Wye3 || s.Connection == Delta3
}

// NominalOf returns the nominal voltage, in V, across the pair of conductors that r is measured on, and 0 when the
// supply's nominal voltage is not declared or r has none (VN, currents).
//
// Line to neutral it is the line-to-line value over √3 on three-phase supplies. On split-phase supplies the declared
// value is line to neutral, and twice that between the lines.
func (s Supply) NominalOf(r Role) float64 {
	const sqrt3 = 1.7320508075688772
	switch {
	case !r.Voltage() || r.Neutral():
		return 0
	case s.ThreePhase() && !r.LineToLine():
		return s.NominalVoltage / sqrt3
	case s.Connection == SplitPhase && r.LineToLine():
		return 2 * s.NominalVoltage
	}
	return s.NominalVoltage
}

// File overrules what a loader guesses about a table of text. Every field may be absent.
type File struct {
	Delimiter    string  `toml:"delimiter" json:"delimiter,omitempty"`         // one character, or "tab"
	Decimal      string  `toml:"decimal" json:"decimal,omitempty"`             // "." or ","
	Encoding     string  `toml:"encoding" json:"encoding,omitempty"`           // "utf-8", "utf-16", "windows-1252", or another IANA name
	HeaderLines  *int    `toml:"header_lines" json:"header_lines,omitempty"`   // lines before the first data row
	TimeColumn   string  `toml:"time_column" json:"time_column,omitempty"`     // name, number from 1, or "none"
	TimeFormat   string  `toml:"time_format" json:"time_format,omitempty"`     // "s", "ms", "us", "index", "d/m/y", "m/d/y", or "iso"
	SamplingRate float64 `toml:"sampling_rate" json:"sampling_rate,omitempty"` // Hz
}

// Intervals describes a recorder's interval log.
type Intervals struct {
	Length float64 `toml:"length_s" json:"length_s,omitempty"` // s
	Stamp  string  `toml:"stamp" json:"stamp,omitempty"`       // "start" or "end"
}

// A Column maps columns of an interval log. Source and Measures may hold {phase}, Source and Quantity {order} or
// {order:02}.
type Column struct {
	Source   string `toml:"source" json:"source"`
	Measures string `toml:"measures" json:"measures"`
	Quantity string `toml:"quantity" json:"quantity"` // h0…h50, thd, rms, frequency, u2, p, q1, flag
	Unit     string `toml:"unit" json:"unit"`         // "%" (of the fundamental), V, A, Hz, W, var
}
