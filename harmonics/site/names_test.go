package site

import "testing"

// Names as recorders and their users write them: common practice in the trade, collected by hand.
func TestRoleByName(t *testing.T) {
	for _, c := range []struct{ name, unit, phase, want string }{
		{"V1", "", "", "V1"}, {"U2", "V", "", "V2"}, {"UL1", "V", "", "V1"}, {"UL1-N", "", "", "V1"}, {"U_L3N", "", "", "V3"},
		{"L1-N", "V", "", "V1"}, {"L2", "A", "", "I2"}, {"L3", "V", "", "V3"}, {"Va", "", "", "V1"}, {"Ub", "V", "", "V2"},
		{"VAN", "V", "", "V1"}, {"V_CN", "", "", "V3"}, {"Vab", "V", "", "V12"}, {"U12", "", "", "V12"}, {"U23", "V", "", "V23"},
		{"UL1L2", "V", "", "V12"}, {"U L3-L1", "V", "", "V31"}, {"V1-2", "V", "", "V12"}, {"UL12", "V", "", "V12"},
		{"IL1", "", "", "I1"}, {"Ia", "A", "", "I1"}, {"I1", "", "", "I1"}, {"IN", "A", "", "IN"}, {"I4", "A", "", "IN"},
		{"In", "", "", "IN"}, {"I0", "A", "", "IN"}, {"I1N", "A", "", "I1"}, {"I_B", "", "", "I2"}, {"U4", "V", "", "VN"}, {"VN", "V", "", "VN"},
		{"U N-PE", "V", "", "VN"}, {"Voltage L1-N", "", "", "V1"}, {"Current L3", "", "", "I3"}, {"A phase current", "", "", "I1"},
		{"Phase B Voltage", "", "", "V2"}, {"Neutral current", "A", "", "IN"}, {"CH1 V1", "", "", "V1"}, {"I2 (A)", "A", "", "I2"},
		{"V3 [kV]", "V", "", "V3"}, {"CT2", "A", "", "I2"}, {"Clamp 3", "A", "", "I3"}, {"Spannung L2", "V", "", "V2"}, {"I L2 waveform", "A", "", "I2"},
		{"VR", "V", "", "V1"}, {"VS", "V", "", "V2"}, {"VT", "V", "", "V3"}, {"URS", "V", "", "V12"},
		{"V21", "V", "", "V12 reversed"}, {"Uac", "V", "", ""}, {"UNA", "V", "", "V1 reversed"}, {"V13", "V", "", "V31 reversed"},
		{"Voltage", "V", "", "V1 weak"}, {"I", "", "", "I1 weak"}, {"Current", "A", "", "I1 weak"}, {"V L-N", "", "", "V1"},
		// The file's own designation, as COMTRADE gives one.
		{"bus 4711", "V", "B", "V2"}, {"feeder", "A", "N", "IN"}, {"feeder", "A", "L3", "I3"}, {"line", "V", "AB", "V12"}, {"母线电压", "V", "C", "V3"},
		{"220kV I_3U0", "V", "N", ""}, {"T1_3I0", "A", "N", "IN"},
		// Nothing to tell a conductor by.
		{"CH1", "V", "", ""}, {"Channel A", "V", "", ""}, {"1", "V", "", ""}, {"col3", "", "", ""}, {"temp", "", "", ""}, {"VAC", "", "", ""},
		{"Vrms", "", "", ""}, {"Input 2", "A", "", ""}, {"AI4", "V", "", ""}, {"", "V", "", ""}, {"P", "", "A", ""}, {"L1", "", "", ""},
		// The unit contradicts the letter: the unit is the file's, the letter somebody's.
		{"I1", "V", "", ""}, {"V2", "A", "", ""},
	} {
		got := ""
		if g, ok := roleByName(c.name, c.unit, c.phase); ok {
			got = string(g.role)
			if g.reversed {
				got += " reversed"
			}
			if g.weak {
				got += " weak"
			}
		}
		if got != c.want {
			t.Errorf("%q, unit %q, phase %q: role %q, want %q", c.name, c.unit, c.phase, got, c.want)
		}
	}
}
