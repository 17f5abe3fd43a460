package harmonics

// Power holds the quantities of IEEE 1459-2010 over the whole recording, means over unflagged windows. Nil slices and
// NaN mean not measured. Screening figures only where a quantity says so.
type Power struct {
	Phases    []PhasePower
	Effective *EffectivePower // three-phase supplies with all voltages and currents; else nil
	Unbalance Unbalance
	Sequence  []SequenceLevels // [order-1]; nil unless three phase voltages or currents were measured
	Neutral   *NeutralCurrent  // nil when there is neither a measured neutral nor all three phase currents of a four-wire supply
}

// PhasePower is one phase's power. Symbols are those of IEEE 1459-2010.
type PhasePower struct {
	Phase          int // 1, 2, 3
	P, P1, PH      float64
	Q1             float64
	S, S1, SN      float64
	DI, DV, SH, DH float64
	N              float64
	PF, PF1        float64
	Orders         []OrderPower // [order-1]
}

// OrderPower is the active power of one order, and the angle by which its current lags its voltage.
type OrderPower struct {
	Order int
	P     float64 // W
	Q     float64 // var
	Theta float64 // degrees in (-180, 180], voltage angle minus current angle
}

// EffectivePower is the three-phase apparent power after IEEE 1459-2010 and its parts.
type EffectivePower struct {
	FourWire                    bool
	P, P1                       float64
	Ve, Ie, Se                  float64
	Ve1, Ie1, Se1               float64
	SeN, DeI, DeV, SeH          float64
	S1Pos, P1Pos, Q1Pos, PF1Pos float64 // positive sequence of the fundamental
	SU1                         float64 // fundamental unbalance power
	PFe                         float64
	Arithmetic, Vector          float64 // the two older apparent powers, for comparison
}

// Unbalance is in per cent of the positive sequence of the fundamental. NaN where it could not be measured.
type Unbalance struct {
	U2, U0 float64
	I2, I0 float64
	U2Line float64 // u2 again, from the three line-to-line magnitudes alone (IEC 61000-4-30)
}

// SequenceLevels are the symmetrical components of one order, rms, in V and A. NaN where not measured.
type SequenceLevels struct {
	Order             int
	VPos, VNeg, VZero float64
	IPos, INeg, IZero float64
}

// NeutralCurrent is the current in the neutral conductor.
type NeutralCurrent struct {
	RMS        float64   // A
	TriplenRMS float64   // A: orders 3, 9, 15 …
	H          []float64 // [order], A
	Computed   bool      // from the sum of the phase currents, not measured
	// Mismatch is the rms of measured minus computed, fundamental only, A; NaN unless both are there.
	Mismatch float64
}
