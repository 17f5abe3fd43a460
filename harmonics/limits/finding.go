package limits

import "wavetally/harmonics/site"

// Results of a finding.
const (
	Within      = "within"
	Exceeds     = "exceeds"
	Undecided   = "undecided"
	NotAssessed = "not assessed"
)

// A Finding is one limit applied to one value of one channel. Percentages are of Basis.
type Finding struct {
	RuleSet    string    // name, such as "ieee-519-2022"
	Clause     string    // clause and table in the document
	Channel    site.Role // the phase the value was measured on; phases are never pooled
	Quantity   string    // "harmonic", "thd", "tdd"
	Order      int       // 0 for totals
	Statistic  string    // such as "95th percentile of 10 min values over a week"
	Value      float64   // in Unit; NaN when there is none
	ValueLow   float64   // Value less and plus what is open about it, in Unit; the verdict rests on them: see the package comment. NaN when there is no value
	ValueHigh  float64
	SampleLow  float64 // distribution-free 95 % confidence bounds of the percentile, in Unit: how firm it is; NaN when unknown
	SampleHigh float64
	OverPct    float64 // share of the intervals behind Value that are above the limit, per cent; NaN when unknown
	From, To   float64 // s from the start of the recording: the week or day that governs, else all of it
	Level      float64 // the same value in the channel's unit (V or A); NaN when there is none
	Limit      float64 // in Unit; NaN when the rule set could not be applied
	Unit       string  // "%"
	Share      float64 // 100 × Value / Limit, per cent
	Result     string
	Why        string // for undecided and not assessed: the reason and what would settle it; else what weakens the verdict, "" for nothing
	Basis      string // what the percentage is of: "nominal voltage 230.9 V", "demand current 410 A", "fundamental"
	N          int    // intervals behind Value
	Indicative bool   // Value is not the statistic the rule asks for, but the nearest the record gives
	Unverified bool   // the limit's table is from memory, not corroborated

	// What a live spreadsheet formula needs to redo the verdict.
	LimitRow  string  // the row of the table the limit came from, such as "50 to <100"
	TableKey  string  // names the table, column and factor in the rule set: RuleSet/Table/Row/Column
	TablePct  float64 // the table's entry before even-order and statistic factors
	Factor    float64 // product of the factors: Limit = TablePct × Factor
	OfOrder   float64 // the part of Factor that the order brings (even orders of IEEE 519 currents)
	OfStat    float64 // the part of Factor that the statistic brings
	BasisSize float64 // the number behind Basis in the channel's unit; NaN for the fundamental
	Floor     float64 // what noise alone reads, in Unit; NaN when unknown
	Top       int     // highest order of a total; 0 for a single order
}
