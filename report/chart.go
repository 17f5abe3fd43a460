package report

import "wavetally/harmonics/site"

// Kinds of chart.
const (
	SpectrumChart    = "spectrum"    // bars over orders, against a limit an order
	WaveformChart    = "waveform"    // lines over time within one window
	TrendChart       = "trend"       // lines over the recording
	HeatMapChart     = "heat map"    // orders over time
	SpectrogramChart = "spectrogram" // lines of about 5 Hz over time
	PhasorChart      = "phasor"      // arrows
)

// A Chart is a picture's numbers and words. The PDF draws it; the XLSX holds the same numbers as a table.
type Chart struct {
	Key     string // unique within a survey, stable, such as "spectrum-V"; names sheets, bookmarks and anchors
	Kind    string // one of the kinds of chart
	Title   string // states the finding
	Caption string // what is shown, over which time, from how many intervals

	X, Y   Axis
	Series []Series
	Limits []LimitLine
	Shades []Shade // stretches of X left out of statistics

	Grid *Grid // heat maps and spectrograms; else nil
}

// An Axis is one axis of a chart.
type Axis struct {
	Label string  // such as "harmonic order"
	Unit  string  // such as "%", "V", "ms", "h", "d"; "" for orders
	Low   float64 // ends that hold all that is drawn; equal scales are given to charts that will be compared
	High  float64
	Clock bool // X in seconds from the start of the recording; a renderer may label it in the site's clock time
}

// How a series is meant.
const (
	Measured = "measured"
	Highest  = "highest" // the whisker over a bar
	Rebuilt  = "rebuilt" // from the lines above the noise floor
	Residual = "residual"
	Other    = "other" // a companion, such as the load under a trend
)

// A Series is one line, one set of bars or one arrow. X and Y are of equal length; a NaN breaks a line.
// For a phasor X is the angle in degrees and Y the rms, one point a series.
type Series struct {
	Name string    // for the legend
	Role site.Role // decides colour and dash; "" for none
	Use  string    // how the series is meant
	Unit string    // of Y
	X, Y []float64
	Note string // small print beside the legend, such as "residual 0.8 V rms"
}

// A LimitLine is a limit: one value over all X when X is nil, else a value for each X.
type LimitLine struct {
	Name string // such as "IEEE 519-2022, 95th percentile over a week: 8 %"
	X, Y []float64
}

// A Shade is a stretch of the X axis that is marked, with the reason.
type Shade struct {
	From, To float64
	Why      string
}

// A Grid is a field of values over X and Y: Value[i][j] belongs to Xs[i] and Ys[j]. NaN is left blank.
type Grid struct {
	Xs, Ys []float64 // starts of the columns, and centres of the rows
	DX     float64   // width of a column
	Value  [][]float64
	Label  string  // what Value is, such as "share of limit"
	Unit   string  // "%"
	Low    float64 // ends of the colour scale
	High   float64
	Log    bool    // a logarithmic colour scale
	Mark   float64 // a value worth a mark in the scale, such as 100 % of the limit; NaN for none
}
