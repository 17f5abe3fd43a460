package wav

import (
	"bytes"
	"testing"

	"wavetally/harmonics/synth"
)

// A file beyond 4 GB becomes an RF64 whose lengths are in its ds64 chunk.
func TestLargeFilesBecomeRF64(t *testing.T) {
	src := synth.New(synth.Recording{Rate: 8000, Seconds: 1, Frequency: synth.Frequency{Hz: 50}, Channels: []synth.Channel{{Name: "a"}, {Name: "b"}}})
	for frames, id := range map[int64]string{1<<30 - 10: "RIFF", 1<<30 + 1: "RF64"} {
		w := &writer{src: src, width: 2, frames: frames}
		head := w.opening()
		c, err := readChunks(bytes.NewReader(head), "x.wav")
		if err != nil || string(head[:4]) != id || c.length != 4*frames || c.dataAt != int64(len(head)) {
			t.Errorf("%d frames: %.4s, %d bytes of samples from %d, %v; want %s, %d, from %d", frames, head, c.length, c.dataAt, err, id, 4*frames, len(head))
		}
	}
}
