package report

import "time"

// A Table is rows of cells under named columns. PDF, XLSX and terminal show the same tables.
type Table struct {
	Key     string // unique within a survey, stable, such as "verdict"; names sheets and ranges
	Title   string // states the finding
	Columns []Column
	Rows    [][]Cell // each as long as Columns
	Notes   []string // what a reader must know to read the numbers
}

// A Column says what its cells hold.
type Column struct {
	Key   string // stable, such as "share_pct"
	Head  string // for people, without unit
	Unit  string // of the numbers in base units, such as "V", "%"; "" for text and counts
	Right bool   // numbers stand right
	Wide  bool   // text that wraps
}

// A Cell is one value. A cell that holds a number keeps it as measured: the XLSX writes the number, the PDF and the
// terminal write Text, which is rounded for people.
type Cell struct {
	Text   string
	Number Number // meaningful when IsNumber
	IsNum  bool
	Unit   string    // of Number, where the column has none because its rows differ
	Time   time.Time // the moment, where the cell is one and the recording's start is known; else zero
	Result string    // "within", "exceeds", "undecided" or "not assessed" where the cell is a verdict; else ""
}
