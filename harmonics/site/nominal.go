package site

import "math"

// Nominal voltages in V, line to line on three-phase supplies. Sources, from memory of both: IEC 60038 (2009), tables 1
// and 3 to 5, and ANSI C84.1-2020, table 1. IEC 60038 has replaced 220/380 V and 240/415 V by 230/400 V at 50 Hz, so
// these are not in the list. 100 to 120 V are also the secondary side of voltage transformers.
var (
	threePhase50 = []float64{100, 110, 200, 400, 690, 1000, 3000, 3300, 6000, 6600, 10e3, 11e3, 15e3, 20e3, 22e3, 30e3, 33e3,
		35e3, 66e3, 110e3, 132e3, 150e3, 220e3, 330e3, 400e3}
	threePhase60 = []float64{100, 115, 200, 208, 220, 240, 380, 400, 440, 480, 600, 2400, 4160, 4800, 6900, 8320, 12000, 12470,
		13200, 13800, 20780, 22860, 23e3, 24940, 34500, 46e3, 69e3, 115e3, 138e3, 161e3, 230e3, 345e3, 500e3}
	singlePhase50 = []float64{100, 110, 230, 400}
	singlePhase60 = []float64{100, 110, 115, 120, 127, 208, 220, 230, 240, 277, 347, 480}
)

// nominalReach is how far, as a share, a measured voltage may be from a nominal one to be taken for it: EN 50160 and
// ANSI C84.1 keep a supply within 10 %, and a little is left for a loaded feeder.
const nominalReach = 0.15

// NearestNominal returns the standard nominal voltage nearest to a measured one, 0 when none is within 15 %.
func NearestNominal(volts, frequency float64, threePhase bool) float64 {
	list := singlePhase50
	switch {
	case threePhase && frequency == 60:
		list = threePhase60
	case threePhase:
		list = threePhase50
	case frequency == 60:
		list = singlePhase60
	}
	best, off := 0.0, nominalReach
	for _, v := range list {
		if d := math.Abs(volts/v - 1); d <= off {
			best, off = v, d
		}
	}
	return best
}
