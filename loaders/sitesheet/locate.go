package sitesheet

import (
	"os"
	"strings"

	"github.com/BurntSushi/toml"

	"wavetally/harmonics/site"
)

// LineOfSource returns the line, from 1, in which the sheet at path names the channel source; 0 when it cannot be told.
func LineOfSource(path, source string) int {
	text, err := os.ReadFile(path)
	if err != nil {
		return 0
	}
	var s site.Sheet
	if _, err := toml.Decode(strings.TrimPrefix(string(text), "\ufeff"), &s); err != nil {
		return 0
	}
	for n, c := range s.Channels {
		if c.Source == source {
			return indexLines(string(text)).of("channel", n, "source")
		}
	}
	return 0
}
