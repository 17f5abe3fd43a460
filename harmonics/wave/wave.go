// Package wave holds recorded waveforms as plain data.
//
// Conventions, stated here once:
//
//   - Samples are float64 in base units (V, A); a loader converts kV, mA and the like at the door and keeps the
//     unit as written in [Channel.FileUnit].
//   - A sample that the file marks as missing, or that is not finite, is NaN. It is never 0.
//   - Times inside a recording are float64 seconds from [Header.Start]; a week is 604 800 s, where a float64 still
//     resolves 0.12 ns.
//   - A recording is a run of segments. Inside a segment samples are equally spaced and none is left out. A gap,
//     an overlap or another sampling rate starts a new segment.
package wave

import (
	"fmt"
	"iter"
	"time"
)

// A Channel describes one recorded quantity.
type Channel struct {
	Name     string // as the file has it; unique within a recording
	Unit     string // of the samples: "V", "A", or "" when the file does not say
	FileUnit string // as written in the file, such as "kV"; for display
	Phase    string // the file's own phase designation ("A", "L1", "AN"), "" when it has none

	// Step is the size of one digitising step in Unit, and Low and High the ends of the input range in Unit.
	// All are 0 when the file does not say.
	Step, Low, High float64

	// Skew is how much later than the block's time this channel was sampled, in seconds (a multiplexed converter
	// samples one channel after the other). Usually 0.
	Skew float64
}

// A File is one of the files a recording was read from.
type File struct {
	Name   string // base name, for display
	Path   string // as opened
	Format string // such as "COMTRADE 1999 BINARY" or "CSV"

	// Reading says in one line how the file was understood, where its format leaves that open (a table of text);
	// else "". For display.
	Reading string
}

// A Header is all that is known of a recording before its samples.
type Header struct {
	Files    []File
	Start    time.Time // instant of the first sample; zero when the file does not say
	HasZone  bool      // Start carries an offset to UTC or is UTC; if false, it is local time of an unknown zone
	Rate     float64   // samples per second of the first segment; need not be whole
	Samples  int64     // samples per channel announced by the file; 0 when it does not say
	Nominal  float64   // nominal mains frequency in Hz as the file says; 0 when it does not
	Channels []Channel
	Notes    []Note // oddities that did not stop loading
}

// A Note is something odd about a file that did not stop it from being read. Loaders hand notes over with the header
// and, for what only shows while reading, through [Source.Notes]. The report shows each as a doubt.
type Note struct {
	Code    string // short and stable, such as "gap", "truncated", "time-column-wrong"
	Channel string // the channel's name, or "" for the whole recording
	Text    string // one sentence: what, where (file and line or byte), and what it means for the numbers
}

// A Block is a run of consecutive samples of all channels. It is valid until the next one is asked for.
type Block struct {
	// Segment counts from 0. A new number says that the samples do not follow on from the block before.
	Segment int
	// At is the time of Data[c][0], in seconds from Header.Start, before the channel's skew.
	At float64
	// Rate is the sampling rate of this segment, in samples per second. All blocks of a segment have the same.
	Rate float64
	// Data is [channel][sample]; rows are of equal length, at least 1. NaN marks a missing sample.
	Data [][]float64
}

// Len returns the number of samples per channel.
func (b Block) Len() int {
	if len(b.Data) == 0 {
		return 0
	}
	return len(b.Data[0])
}

// A Source is a recording that can be read, from the start, any number of times but one reader at a time.
type Source interface {
	// Header returns what is known before reading samples.
	Header() Header
	// Blocks reads the recording from its start. Memory in use does not depend on its length. An error comes
	// last, with a zero Block; what came before it is good. Leaving the loop early releases the files.
	Blocks() iter.Seq2[Block, error]
	// Notes returns what the last complete run of Blocks found odd, beyond Header().Notes.
	Notes() []Note
}

// BlockLen is the number of samples per channel that sources aim at for one block: small enough to stay in cache with
// eight channels, large enough that the cost of handing blocks over vanishes.
const BlockLen = 4096

// BaseUnit splits a unit such as "kV", "mA", "V" or "µV" into its base unit and the factor that brings a value to it.
// Letter case counts for the prefix only where it must (m against M); "KV" is read as kV. It reports false for
// anything that is not a volt or an ampere.
func BaseUnit(unit string) (base string, factor float64, ok bool) {
	f, known := units[unit]
	return f.base, f.factor, known
}

var units = func() map[string]struct {
	base   string
	factor float64
} {
	m := map[string]struct {
		base   string
		factor float64
	}{}
	for _, base := range []string{"V", "A"} {
		lower := map[string]string{"V": "v", "A": "a"}[base]
		for prefix, factor := range map[string]float64{"": 1, "k": 1e3, "K": 1e3, "m": 1e-3, "M": 1e6,
			"u": 1e-6, "µ": 1e-6, "μ": 1e-6} {
			for _, b := range []string{base, lower} {
				m[prefix+b] = struct {
					base   string
					factor float64
				}{base, factor}
			}
		}
	}
	for word, base := range map[string]string{"volt": "V", "volts": "V", "Volt": "V", "Volts": "V", "VOLT": "V", "VOLTS": "V",
		"amp": "A", "amps": "A", "Amp": "A", "Amps": "A", "AMP": "A", "AMPS": "A", "ampere": "A", "Ampere": "A",
		"amperes": "A", "Amperes": "A"} {
		m[word] = struct {
			base   string
			factor float64
		}{base, 1}
	}
	return m
}()

// A ParseError says that a file is of a known format but breaks it, and where.
type ParseError struct {
	File   string // base name
	Line   int    // from 1; 0 when the place is a byte or unknown
	Offset int64  // byte from 0, meaningful when Line is 0 and HasOffset
	HasOff bool
	Msg    string // what is wrong; what to do
	Err    error  // cause, may be nil
}

func (e *ParseError) Error() string {
	switch {
	case e.Line > 0:
		return fmt.Sprintf("%s:%d: %s", e.File, e.Line, e.Msg)
	case e.HasOff:
		return fmt.Sprintf("%s: byte %d: %s", e.File, e.Offset, e.Msg)
	}
	return fmt.Sprintf("%s: %s", e.File, e.Msg)
}

func (e *ParseError) Unwrap() error { return e.Err }

// An UnsupportedError says that a file is well formed but uses a part of its format that this program does not read.
type UnsupportedError struct {
	File string
	Line int
	Msg  string // what it is; what to do
}

func (e *UnsupportedError) Error() string {
	if e.Line > 0 {
		return fmt.Sprintf("%s:%d: %s", e.File, e.Line, e.Msg)
	}
	return fmt.Sprintf("%s: %s", e.File, e.Msg)
}

// A NotThisFormatError says that a file is not of the format it was tried as. Sniffing goes on to the next format.
type NotThisFormatError struct {
	File   string
	Format string
	Msg    string
}

func (e *NotThisFormatError) Error() string {
	return fmt.Sprintf("%s: not %s: %s", e.File, e.Format, e.Msg)
}
