package fitness

// Thresholds, all in one place. The starting points are the working rules of practice.md 1.3b (our own design
// inference); where a figure was changed the reason stands beside it.
const (
	// Voltage over nominal.
	nominalLow, nominalHigh = 0.85, 1.15 // beyond: stops the verdict
	nominalOddLow           = 0.90       // between: caution
	nominalOddHigh          = 1.10
	factorFit               = 0.08 // a ratio this close to a known factor is said to be it

	// Currents.
	ratingExcess    = 1.5  // highest current over the transformer's rated current
	demandExcess    = 2.0  // highest current over the declared demand
	loadStops       = 0.40 // highest current over the declared demand, below: stops current verdicts
	loadCaution     = 0.80
	deadShare       = 0.001 // of the strongest channel of its kind: nothing is connected
	smallLoad       = 0.004 // of the strongest phase current: an angle says nothing
	neutralMismatch = 0.25  // of the larger of measured and computed neutral
	neutralFloor    = 0.03  // of the mean phase current: below, a mismatch is a sensor's error

	// Wiring: a load's current lies within this angle of its voltage, and the phases' angles do not differ by more.
	loadAngle = 72.0 // degrees; cos 72° is a power factor of 0.31
	spread    = 50.0 // degrees
	oddAngle  = 45.0 // degrees; from here another hook-up can look as plausible

	// Rotation: negative over positive sequence of the fundamental voltages.
	rotated = 3.0

	// A coil whose signal was not integrated gives every order h times too large, and leads by 90°. Currents fall with
	// order about as 1/h or faster (slope -1), their derivatives hardly at all; below 20 % THD the spectrum of a clean,
	// actively controlled load is flat too, and says nothing.
	derivativeSlope = -0.5 // of log level against log order
	derivativeLead  = 90.0
	derivativeTHD   = 20.0 // %
	leastOrders     = 4

	// Samples and converter.
	perCycleStops   = 100 // samples a cycle, at or below: order 50 is beyond the sampling rate
	perCycleCaution = 128
	perCycleNote    = 256
	stepsStop       = 10 // converter steps from the middle to the crest
	stepsCaution    = 50
	clippedNote     = 0.001 // share of windows that touch the end of the range
	clippedStops    = 0.01
	driftShare      = 0.02  // wander of the dc component over the fundamental
	foldedShare     = 0.003 // rms of the upper band over the fundamental
	foldedOverNoise = 3.0   // the same over what the noise between the harmonics would put there

	// Frequency.
	changeCaution = 0.02 // Hz from window to window
	changeStops   = 0.1
	unlockedStops = 0.1 // share of windows

	// Length.
	spanStops   = 86400.0     // s, below: nothing but an indication
	spanCaution = 3 * 86400.0 // s
	spanWhole   = 7 * 86400.0
	validShare  = 0.95 // of the 10 min intervals

	// Noise floor over the fundamental (voltage) or the demand current, per cent: half of IEEE 519's smallest limit.
	noiseCaution = 0.15

	// An interharmonic this strong against the fundamental, and against the median of all, is a tone.
	toneShare      = 0.003
	toneOverMedian = 5.0
)
