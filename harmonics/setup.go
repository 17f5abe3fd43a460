package harmonics

import (
	"errors"
	"fmt"
	"math"
	"strconv"
	"strings"

	"wavetally/harmonics/site"
	"wavetally/harmonics/wave"
)

// A channel is one recorded channel that the site sheet gives a role.
type channel struct {
	role    site.Role
	source  int // index in the recording
	name    string
	unit    string
	gain    float64
	skew    float64 // s
	nominal float64 // V; 0 for currents, the neutral, and an undeclared supply
	err     float64 // uncertainty, % of reading
	step    float64 // of the converter, in the channel's unit; 0 unknown
}

// ErrNoChannels says that nothing in the recording has a role to measure.
var ErrNoChannels = errors.New("no channel of the recording has a role; say in the site sheet what each channel measures")

// resolve matches the site sheet's channels with the recording's, in the order of site.Roles.
func resolve(h wave.Header, sheet site.Sheet) ([]channel, error) {
	byRole := map[site.Role]channel{}
	for _, c := range sheet.Channels {
		role := site.Role(c.Measures)
		if c.Measures == "" {
			continue
		}
		if !role.Known() {
			return nil, fmt.Errorf("channel %q measures %q, which is none of %v", c.Source, c.Measures, site.Roles)
		}
		if _, twice := byRole[role]; twice {
			return nil, fmt.Errorf("two channels measure %s; a survey has one channel a role", role)
		}
		i := site.Find(h, c.Source)
		if i < 0 {
			return nil, fmt.Errorf("the recording has no channel %q; it has %s", c.Source, channelNames(h))
		}
		unit := "A"
		if role.Voltage() {
			unit = "V"
		}
		byRole[role] = channel{role: role, source: i, name: h.Channels[i].Name, unit: unit, gain: c.Gain(),
			skew: h.Channels[i].Skew, nominal: sheet.Supply.NominalOf(role), err: c.Uncertainty,
			step: math.Abs(h.Channels[i].Step * c.Gain())}
	}
	var out []channel
	for _, r := range site.Roles {
		if c, ok := byRole[r]; ok {
			out = append(out, c)
		}
	}
	if len(out) == 0 {
		return nil, ErrNoChannels
	}
	return out, nil
}

func channelNames(h wave.Header) string {
	var names []string
	for _, c := range h.Channels {
		names = append(names, strconv.Quote(c.Name))
	}
	return strings.Join(names, ", ")
}

// wires tells where the phases' channels stand among the measured ones; -1 where there is none.
type wires struct {
	v, i, vll [3]int
	vn, in    int
}

func wiring(channels []channel) wires {
	at := func(r site.Role) int {
		for k, c := range channels {
			if c.role == r {
				return k
			}
		}
		return -1
	}
	return wires{
		v: [3]int{at("V1"), at("V2"), at("V3")}, i: [3]int{at("I1"), at("I2"), at("I3")},
		vll: [3]int{at("V12"), at("V23"), at("V31")}, vn: at("VN"), in: at("IN"),
	}
}

func all(at [3]int) bool { return at[0] >= 0 && at[1] >= 0 && at[2] >= 0 }

// reference chooses the channel on which the fundamental is tracked: V1, else the voltage, else the current with the
// strongest fundamental. levels holds each channel's fundamental, rms.
func reference(channels []channel, levels []float64) int {
	best := -1
	better := func(k int) bool {
		if best < 0 {
			return true
		}
		a, b := channels[k].role.Voltage(), channels[best].role.Voltage()
		if a != b {
			return a
		}
		return levels[k] > levels[best]
	}
	for k, c := range channels {
		if c.role == "V1" && levels[k] > 0 {
			return k
		}
		if levels[k] > 0 && better(k) {
			best = k
		}
	}
	return max(best, 0)
}

// A frame is the working grid of one segment: how its windows are resampled.
type frame struct {
	cycles   int // of the fundamental in a window
	perCycle int // points
	top      int // highest order that the sampling rate supports
	lines    int // lines of a window's spectrum that are used: 0 .. lines-1
}

// nyquistShare is the share of half the sampling rate up to which harmonics are measured: beyond, anti-alias filters
// bite and interpolation would need ever longer filters.
const nyquistShare = 0.8

func newFrame(rate, hz float64, cycles int) frame {
	f := frame{cycles: cycles, perCycle: 256}
	f.top = min(MaxOrder, int(nyquistShare*rate/2/hz*1.0005))
	// As many points as samples will do; at much fewer, the filter against folding would cost more than it saves.
	for _, n := range []int{16, 32, 64, 128, 160, 192, 256} {
		if float64(n)*hz >= 0.99*rate {
			f.perCycle = n
			break
		}
	}
	f.lines = min((f.top+1)*cycles, f.points()/2) + 1
	return f
}

func (f frame) points() int { return f.cycles * f.perCycle }

// pass is the highest frequency that resampling leaves alone: half an order above the top one.
func (f frame) pass(rate, hz float64) float64 {
	return min((float64(f.top)+1)*hz, (nyquistShare+0.02)*rate/2)
}
