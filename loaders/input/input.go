// Package input holds what every loader is told about a recording besides its path. It is apart from package loaders
// so that each format's package can import it without importing the others.
package input

import (
	"errors"
	"io/fs"
	"os"
	"time"

	"wavetally/harmonics/site"
)

// ErrCut is what reading a packed file gives where the file ends too early: what came before it is good.
var ErrCut = errors.New("the packed file is cut short")

// A Refusal is a reason not to go on reading, with what to do instead, in words for the user.
type Refusal string

func (r Refusal) Error() string { return string(r) }

// Options says what the user declared about the files. The zero value declares nothing.
type Options struct {
	File site.File      // overrules what a loader guesses about a table of text
	Zone *time.Location // of stamps without an offset; nil is UTC
	Rate float64        // samples per second, for files that do not say; 0: not declared

	// FS is where paths lead: nil is the disk, else the inside of an archive that is read in place. Loaders reach
	// files only through [Options.Open] and [Options.ReadDir], so that they need not know which it is.
	FS fs.FS
}

// Open opens the file at path for reading from its start. The size that its Stat gives is -1 when only reading the
// whole file would tell (inside .gz).
func (o Options) Open(path string) (fs.File, error) {
	if o.FS != nil {
		return o.FS.Open(path)
	}
	return os.Open(path)
}

// ReadDir lists a folder, sorted by name; it serves to find a companion file whatever its letter case.
func (o Options) ReadDir(dir string) ([]fs.DirEntry, error) {
	if o.FS != nil {
		return fs.ReadDir(o.FS, dir)
	}
	return os.ReadDir(dir)
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
	if o.File.SamplingRate != 0 {
		return o.File.SamplingRate
	}
	return o.Rate
}
