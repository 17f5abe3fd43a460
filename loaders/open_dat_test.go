package loaders_test

import (
	"os"
	"path/filepath"
	"testing"

	"wavetally/loaders"
)

// The data file of a pair is often all that was copied.
func TestDataWithoutConfiguration(t *testing.T) {
	path := filepath.Join(t.TempDir(), "board.dat")
	if err := os.WriteFile(path, make([]byte, 4096), 0o666); err != nil {
		t.Fatal(err)
	}
	const want = "board.dat: not a recording by itself: the data of a COMTRADE recording are read with their configuration; put the .cfg file of the same name into the same folder"
	if _, err := loaders.Open([]string{path}, loaders.Options{}); err == nil || err.Error() != want {
		t.Errorf("got %v\nwant %s", err, want)
	}
}
