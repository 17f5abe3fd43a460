package main

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"os"
	"testing"

	"wavetally/harmonics/wave"
)

func TestExitCodesAndMessages(t *testing.T) {
	stopped, stop := context.WithCancel(t.Context())
	stop()
	_, missing := os.Open("no/such.csv")
	for _, c := range []struct {
		ctx  context.Context
		err  error
		code int
		text string
	}{
		{t.Context(), usageError{"unknown flag"}, 2, "unknown flag"},
		{t.Context(), fmt.Errorf("deeper: %w", usageError{"x"}), 2, "deeper: x"},
		{t.Context(), fmt.Errorf("deeper: %w", errExceeds), 3, "deeper: " + errExceeds.Error()},
		{t.Context(), &wave.ParseError{File: "a.csv", Line: 7, Msg: "is wrong;\ndo this"}, 1, "a.csv:7: is wrong; do this"},
		{t.Context(), missing, 1, "no/such.csv: there is no such file; check the path"},
		{t.Context(), &fs.PathError{Op: "open", Path: "a.csv", Err: fs.ErrPermission}, 1, "a.csv: may not be opened; check its permissions"},
		{stopped, fmt.Errorf("survey.pdf: could not be written: %w", context.Canceled), 1, "stopped before the end; nothing is left half written"},
		{t.Context(), errors.New("no luck"), 1, "no luck"},
	} {
		if code := exitCode(c.err); code != c.code {
			t.Errorf("%v: code %d, want %d", c.err, code, c.code)
		}
		if text := message(c.ctx, c.err); text != c.text {
			t.Errorf("message %q, want %q", text, c.text)
		}
	}
}
