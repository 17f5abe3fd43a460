package main

import (
	"context"
	"errors"
	"io/fs"
	"strings"
)

// Exit codes other than 0.
const (
	codeFailed  = 1
	codeUsage   = 2
	codeExceeds = 3
)

// A usageError is a command line that cannot be understood.
type usageError struct{ text string }

func (e usageError) Error() string { return e.text }

// errExceeds is what --fail-on-exceeds makes of a survey in which something exceeds its limit.
var errExceeds = errors.New("something exceeds its limit, and --fail-on-exceeds was given; the documents are written")

func exitCode(err error) int {
	var usage usageError
	switch {
	case errors.As(err, &usage):
		return codeUsage
	case errors.Is(err, errExceeds):
		return codeExceeds
	}
	return codeFailed
}

// message puts an error into one line that says where, what, and what to do.
func message(ctx context.Context, err error) string {
	var path *fs.PathError
	switch {
	case errors.Is(err, context.Canceled) && ctx.Err() != nil:
		return "stopped before the end; nothing is left half written"
	case errors.As(err, &path) && errors.Is(err, fs.ErrNotExist):
		return path.Path + ": there is no such file; check the path"
	case errors.As(err, &path) && errors.Is(err, fs.ErrPermission):
		return path.Path + ": may not be opened; check its permissions"
	}
	return strings.Join(strings.Fields(err.Error()), " ")
}
