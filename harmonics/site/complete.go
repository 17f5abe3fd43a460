package site

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"

	"wavetally/harmonics/wave"
)

// Complete fills in what the sheet does not declare, from the recording's header and a first look at it, and appends a
// sentence to Guessed for each thing it filled in: what, from what, and what would settle it. What it cannot guess
// stays undeclared.
//
// A channel that the sheet names is left as it is; with an empty role it stays unmeasured. Channels that the sheet does
// not name get a role from their names; from unit and size only when the sheet declares no channel at all.
//
// It is an error when the sheet names a channel that the recording does not have.
func Complete(sheet Sheet, h wave.Header, look Look) (Sheet, error) {
	c := completion{sheet: sheet, header: h, look: look}
	c.sheet.Channels = slices.Clone(sheet.Channels)
	c.sheet.Guessed = slices.Clone(sheet.Guessed)
	for _, declared := range sheet.Channels {
		i := Find(h, declared.Source)
		if i < 0 {
			return Sheet{}, &NoChannelError{Source: declared.Source, Have: channelNames(h)}
		}
		c.taken = append(c.taken, i)
	}
	c.byName()
	if len(sheet.Channels) == 0 {
		c.bySize()
	}
	c.frequency()
	c.connection()
	c.nominalVoltage()
	c.zone()
	return c.sheet, nil
}

// A NoChannelError says that the site sheet names a channel which the recording does not have.
type NoChannelError struct {
	Source string
	Have   []string
}

func (e *NoChannelError) Error() string {
	have := e.Have
	more := ""
	if len(have) > 12 {
		have, more = have[:12], fmt.Sprintf(" and %d more", len(e.Have)-12)
	}
	return fmt.Sprintf("the recording has no channel %q; it has %s%s; give one of these names, or a number from 1",
		e.Source, strings.Join(have, ", "), more)
}

func channelNames(h wave.Header) (names []string) {
	for _, c := range h.Channels {
		names = append(names, strconv.Quote(c.Name))
	}
	return names
}

type completion struct {
	sheet  Sheet
	header wave.Header
	look   Look
	taken  []int // channels that the sheet names
}

func (c *completion) guessed(format string, args ...any) {
	c.sheet.Guessed = append(c.sheet.Guessed, fmt.Sprintf(format, args...))
}

// has reports whether a channel measures the role.
func (c *completion) has(r Role) bool { return c.source(r) >= 0 }

// source returns the index in the recording of the channel that measures the role, -1 for none.
func (c *completion) source(r Role) int {
	for _, ch := range c.sheet.Channels {
		if Role(ch.Measures) == r {
			return Find(c.header, ch.Source)
		}
	}
	return -1
}

// assign gives channel i a role and returns how to say so.
func (c *completion) assign(i int, g guess) string {
	name := c.header.Channels[i].Name
	c.sheet.Channels = append(c.sheet.Channels, Channel{Source: name, Measures: string(g.role), Scale: 1, Reversed: g.reversed})
	c.taken = append(c.taken, i)
	if g.reversed {
		return fmt.Sprintf("%q as %s reversed", name, g.role)
	}
	return fmt.Sprintf("%q as %s", name, g.role)
}

// settle tells what makes a guess about channels a declaration.
const settle = "a [[channel]] entry for each in the site sheet settles it"

// byName gives roles to the channels whose names tell one, the first channel for each role.
func (c *completion) byName() {
	guesses := map[int]guess{}
	for i, ch := range c.header.Channels {
		if g, ok := roleByName(ch.Name, ch.Unit, ch.Phase); ok && !slices.Contains(c.taken, i) {
			guesses[i] = g
		}
	}
	dropLoneRST(guesses)
	var said, spare []string
	for _, weak := range []bool{false, true} {
		for i := range c.header.Channels {
			g, ok := guesses[i]
			switch {
			case !ok || g.weak != weak:
			case c.has(g.role):
				spare = append(spare, fmt.Sprintf("%q (%s)", c.header.Channels[i].Name, g.role))
				c.taken = append(c.taken, i)
			default:
				said = append(said, c.assign(i, g))
			}
		}
	}
	if len(said) > 0 {
		c.guessed("Channels were given roles by their names and units: %s; %s.", strings.Join(said, ", "), settle)
	}
	if len(spare) > 0 {
		c.guessed("Left out because another channel has the role already: %s; a [[channel]] entry in the site sheet chooses another.",
			shortened(spare))
	}
}

// dropLoneRST removes guesses that rest on the letters R, S, T where not all three are there.
func dropLoneRST(guesses map[int]guess) {
	seen := map[Role]bool{}
	for _, g := range guesses {
		if g.rst {
			seen[g.role] = true
		}
	}
	for i, g := range guesses {
		for _, phase := range []string{"1", "2", "3"} {
			if g.rst && !seen[Role(string(g.role[0])+phase)] {
				delete(guesses, i)
			}
		}
	}
}

func shortened(list []string) string {
	if len(list) > 6 {
		return strings.Join(list[:6], ", ") + fmt.Sprintf(" and %d more", len(list)-6)
	}
	return strings.Join(list, ", ")
}

// bySize gives roles, in file order, to the channels whose names tell nothing: by their unit, and without one by their
// size and shape. Where names have told the voltages, or the currents, a nameless one beside them is something else.
func (c *completion) bySize() {
	var volts, amps []int
	unknown := 0
	named := map[byte]bool{}
	for _, ch := range c.sheet.Channels {
		named[ch.Measures[0]] = true
	}
	for i, ch := range c.header.Channels {
		if slices.Contains(c.taken, i) || i >= len(c.look.Channels) || !(c.look.Channels[i].RMS > 0) {
			continue
		}
		switch {
		case ch.Unit == "V" && !named['V']:
			volts = append(volts, i)
		case ch.Unit == "A" && !named['I']:
			amps = append(amps, i)
		case ch.Unit != "" || len(named) > 0:
		case c.seemsVoltage(i):
			volts = append(volts, i)
			unknown++
		default:
			amps = append(amps, i)
			unknown++
		}
	}
	said := append(c.inOrder(volts, c.voltageRoles()), c.inOrder(amps, []Role{"I1", "I2", "I3", "IN"})...)
	if len(said) == 0 {
		return
	}
	from := "their units"
	if unknown > 0 {
		from = "size and shape alone, for the file tells neither name nor unit"
	}
	c.guessed("Channels were given roles in file order, from %s: %s; %s.", from, strings.Join(said, ", "), settle)
}

func (c *completion) voltageRoles() []Role {
	if c.sheet.Supply.Connection == Delta3 || c.sheet.Supply.Connection == Wye3 {
		return []Role{"V12", "V23", "V31"}
	}
	return []Role{"V1", "V2", "V3", "VN"}
}

// inOrder assigns the roles that are free to channels in turn. The neutral's role goes to a fourth channel only.
func (c *completion) inOrder(channels []int, roles []Role) (said []string) {
	for _, i := range channels {
		for len(roles) > 0 && c.has(roles[0]) {
			roles = roles[1:]
		}
		if len(roles) == 0 {
			return said
		}
		said = append(said, c.assign(i, guess{role: roles[0]}))
		roles = roles[1:]
	}
	return said
}

// A channel without name and unit is taken for a voltage when it is nearly a sine and of the size of a standard supply
// voltage, or when it is nearly a sine and the only channel.
func (c *completion) seemsVoltage(i int) bool {
	const nearlySine = 10 // % THD; IEC 61000-2-4 class 3, the dirtiest industrial supply, allows 10 %
	l := c.look.Channels[i]
	if !(l.THDPct < nearlySine) {
		return false
	}
	if len(c.header.Channels) == 1 {
		return true
	}
	f := frequencyClass(c.look.Frequency)
	return l.Fundamental > 50 && (NearestNominal(l.Fundamental, f, false) > 0 || NearestNominal(l.Fundamental*math.Sqrt(3), f, true) > 0)
}

// frequencyClass returns 50 or 60 for a measured frequency, 0 for none.
func frequencyClass(hz float64) float64 {
	switch {
	case hz >= 40 && hz < 55:
		return 50
	case hz >= 55 && hz <= 70:
		return 60
	}
	return 0
}

func (c *completion) frequency() {
	if c.sheet.Supply.NominalFrequency != 0 {
		return
	}
	const declare = "supply.nominal_frequency in the site sheet, or --nominal-frequency, settles it"
	measured := frequencyClass(c.look.Frequency)
	told := c.header.Nominal
	switch {
	case measured != 0 && (told == 50 || told == 60) && told != measured:
		c.guessed("The nominal frequency was taken to be %g Hz, from the measured %.2f Hz, although the file says %g Hz; %s.",
			measured, c.look.Frequency, told, declare)
	case measured != 0:
		c.guessed("The nominal frequency was taken to be %g Hz, from the measured %.2f Hz; %s.", measured, c.look.Frequency, declare)
	case told == 50 || told == 60:
		measured = told
		c.guessed("The nominal frequency was taken to be %g Hz, as the file says; %s.", told, declare)
	}
	c.sheet.Supply.NominalFrequency = measured
}

func (c *completion) connection() {
	if c.sheet.Supply.Connection != "" || len(c.sheet.Channels) == 0 {
		return
	}
	connection, from := c.guessConnection()
	c.sheet.Supply.Connection = connection
	c.guessed("The connection was taken to be %s, from %s; supply.connection in the site sheet settles it.", connection, from)
}

func (c *completion) guessConnection() (connection, from string) {
	switch {
	case c.has("V3") || (c.has("V2") && !c.opposed("V1", "V2")):
		return Wye4, "voltages measured to neutral"
	case c.has("V2"):
		return SplitPhase, "two voltages to neutral that are opposed"
	case c.has("V1") && (c.has("I2") || c.has("I3")):
		return Wye4, "one voltage to neutral and the currents of several phases"
	case c.has("V1"):
		return SinglePhase, "a single voltage"
	case c.has("V12") || c.has("V23") || c.has("V31"):
		return Delta3, "voltages measured from line to line only"
	case c.has("I3"):
		return Wye4, "the currents of three phases without a voltage"
	case c.has("I2"):
		return SplitPhase, "the currents of two phases without a voltage"
	}
	return SinglePhase, "a single current"
}

// opposed reports whether two channels' fundamentals are nearer to 180° apart than to 120°.
func (c *completion) opposed(a, b Role) bool {
	i, j := c.source(a), c.source(b)
	if i < 0 || j < 0 || max(i, j) >= len(c.look.Channels) {
		return false
	}
	apart := math.Mod(math.Abs(c.look.Channels[i].Angle-c.look.Channels[j].Angle), 360)
	return math.Abs(apart-180) < 30
}

func (c *completion) nominalVoltage() {
	s := &c.sheet.Supply
	if s.NominalVoltage != 0 {
		return
	}
	const declare = "supply.nominal_voltage in the site sheet, or --nominal-voltage, settles it"
	for _, ch := range c.sheet.Channels {
		role := Role(ch.Measures)
		i := Find(c.header, ch.Source)
		if !role.Voltage() || role.Neutral() || i >= len(c.look.Channels) || !(c.look.Channels[i].Fundamental > 0) {
			continue
		}
		measured := c.look.Channels[i].Fundamental * math.Abs(ch.Gain())
		// What the declared voltage would be if the measured one were exactly nominal.
		declared := measured / Supply{Connection: s.Connection, NominalVoltage: 1}.NominalOf(role)
		nominal := NearestNominal(declared, s.NominalFrequency, s.ThreePhase())
		if nominal == 0 {
			c.guessed("The nominal voltage could not be guessed: %s measures %.4g V, which is not within 15 %% of a standard voltage; %s.",
				role, measured, declare)
			return
		}
		s.NominalVoltage = nominal
		c.guessed("The nominal voltage was taken to be %g V, the standard voltage nearest to the %.4g V of %s; %s.",
			nominal, measured, role, declare)
		return
	}
}

func (c *completion) zone() {
	if c.sheet.Site.Timezone == "" && !c.header.Start.IsZero() && !c.header.HasZone {
		c.guessed("The recording's clock was taken to be UTC, for the file names no time zone; site.timezone in the site sheet settles it.")
	}
}
