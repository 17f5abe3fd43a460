package site

import (
	"strconv"
	"strings"

	"wavetally/harmonics/wave"
)

// Find returns the index of the recording's channel that a site sheet calls source: its name, or its number from 1, or
// its name in other letter case; -1 when there is none.
func Find(h wave.Header, source string) int {
	for i, c := range h.Channels {
		if c.Name == source {
			return i
		}
	}
	if n, err := strconv.Atoi(source); err == nil && n >= 1 && n <= len(h.Channels) {
		return n - 1
	}
	for i, c := range h.Channels {
		if strings.EqualFold(strings.TrimSpace(c.Name), strings.TrimSpace(source)) {
			return i
		}
	}
	return -1
}
