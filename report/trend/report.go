package trend

import (
	"encoding/json"
	"io"
	"time"

	"wavetally/report"
)

// Schema names the form of trend.json.
const Schema = "wavetally.trend/1"

// A Report is what the months of one site tell.
type Report struct {
	Schema  string         `json:"schema"`
	Program report.Program `json:"program"`
	MadeAt  time.Time      `json:"made_at"`
	Site    string         `json:"site"`
	Zone    string         `json:"timezone"`
	From    string         `json:"from"` // month, 2006-01
	To      string         `json:"to"`
	Months  []MonthInfo    `json:"months"`
	Breaks  []Break        `json:"breaks"`
	Events  []Event        `json:"events"`
	Answers []Answer       `json:"answers"`
	Series  []Series       `json:"series"`
	Notes   []string       `json:"notes"`
}

// An Event is something dated that may have changed the harmonics.
type Event struct {
	Date string `json:"date"` // 2006-01-02
	Text string `json:"text"`
}

// MonthInfo says what a month's values rest on.
type MonthInfo struct {
	Month    string        `json:"month"`
	Surveys  int           `json:"surveys"`
	Valid    int           `json:"valid_10min"`
	Coverage report.Number `json:"coverage_pct"` // valid intervals over those the recordings span
	Weekday  report.Number `json:"weekday_pct"`  // share of valid intervals from Monday to Friday
	Hollow   bool          `json:"hollow"`       // too little for a fair comparison: shown, not tested
	Config   string        `json:"config"`
}

// A Break is a change of configuration: values on either side are not compared.
type Break struct {
	Month string `json:"month"` // the first month of the new configuration
	What  string `json:"what"`
}

// An Answer is one of the four questions of the first page, in one line.
type Answer struct {
	Question string `json:"question"`
	Text     string `json:"text"`
}

// A Series is one quantity of one channel over the months of one configuration.
type Series struct {
	Channel  string        `json:"channel"`
	Quantity string        `json:"quantity"` // harmonic, thd, tdd, rms or k
	Order    int           `json:"order"`
	Unit     string        `json:"unit"`
	Config   string        `json:"config"`
	Limit    report.Number `json:"limit"` // in Unit, of the latest month that has one
	RuleSet  string        `json:"rule_set"`
	Months   []Month       `json:"months"`

	Kendall  *Kendall      `json:"mann_kendall"`
	Seasonal bool          `json:"seasonal"`   // the test compared months of the same name only
	Adjusted report.Number `json:"p_adjusted"` // for the number of series tested, Benjamini and Hochberg
	Sen      *Sen          `json:"theil_sen"`
	Answer   string        `json:"answer"`    // rising, falling, no change shown, too few months
	Material bool          `json:"material"`  // more than a tenth of the limit a year
	SameLoad *SameLoad     `json:"same_load"` // currents: the same at equal load; nil where the months share no load
	Step     *Step         `json:"step"`
	Steps    []Step        `json:"events"` // before and after each dated event with enough months on both sides
	Reaches  *Reaches      `json:"reaches_limit"`
	NoDate   string        `json:"no_date_why"`
}

// A Month holds one month's values in the series' unit.
type Month struct {
	Month    string        `json:"month"`
	N        int           `json:"n"`
	Coverage report.Number `json:"coverage_pct"`
	P50      report.Number `json:"p50"`
	P95      report.Number `json:"p95"`
	P99      report.Number `json:"p99"`
	Max      report.Number `json:"max"`
	Load     report.Number `json:"load_p95"`  // A, fundamental of the phase's current
	SameLoad report.Number `json:"same_load"` // level at the load all months share; null where there is none
	Merged   int           `json:"surveys"`
	Hollow   bool          `json:"hollow"`
}

// Kendall is a Mann–Kendall test of the months' 95th percentiles.
type Kendall struct {
	S     int           `json:"s"`
	Var   report.Number `json:"var"`
	Z     report.Number `json:"z"`
	P     report.Number `json:"p"`
	Exact bool          `json:"exact"`
}

// Sen is a Theil–Sen slope with its 95 % confidence interval, in the series' unit a year.
type Sen struct {
	Slope report.Number `json:"slope_per_year"`
	Low   report.Number `json:"low"`
	High  report.Number `json:"high"`
	Level report.Number `json:"level"` // of the line at the latest month
}

// SameLoad is the trend at equal load.
type SameLoad struct {
	Kendall Kendall `json:"mann_kendall"`
	Sen     Sen     `json:"theil_sen"`
	Answer  string  `json:"answer"`
}

// A Step is a change of level.
type Step struct {
	Month  string        `json:"month"` // the first month after it
	Dated  bool          `json:"dated"` // by an event in the logbook; else apparent, found by search
	Event  string        `json:"event"`
	Before report.Number `json:"before"` // median
	After  report.Number `json:"after"`
	Change report.Number `json:"change"`
	P      report.Number `json:"p"`
	Shown  bool          `json:"shown"` // P adjusted for the number of series is 5 % or less
}

// Reaches says between which months the limit is reached if the present rate continues.
type Reaches struct {
	Earliest string `json:"earliest"` // 2006-01
	Latest   string `json:"latest"`   // "" beyond the horizon
}

// WriteJSON writes trend.json.
func WriteJSON(w io.Writer, r *Report) error {
	b, err := json.MarshalIndent(r, "", "  ")
	if err != nil {
		return err
	}
	_, err = w.Write(append(b, '\n'))
	return err
}
