// Package input holds what every loader is told about a recording besides its path. It is apart from package loaders
// so that each format's package can import it without importing the others.
package input

import (
	"time"

	"wavetally/harmonics/site"
)

// Options says what the user declared about the files. The zero value declares nothing.
type Options struct {
	File site.File      // overrules what a loader guesses about a table of text
	Zone *time.Location // of stamps without an offset; nil is UTC
	Rate float64        // samples per second, for files that do not say; 0: not declared
}

// Location is the zone of stamps without an offset, never nil.
func (o Options) Location() *time.Location {
	if o.Zone == nil {
		return time.UTC
	}
	return o.Zone
}

// DeclaredRate is the sampling rate that the user declared, in Hz: of the file table, else of the options; 0 if none.
func (o Options) DeclaredRate() float64 {
	if o.File.SamplingRate > 0 {
		return o.File.SamplingRate
	}
	return o.Rate
}
