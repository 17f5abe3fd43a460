package main

import (
	"context"
	"errors"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func text(name, content string) document {
	return document{name, func(w io.Writer) error { _, err := io.WriteString(w, content); return err }}
}

var errBroken = errors.New("broken on purpose")

func half(name string) document {
	return document{name, func(w io.Writer) error {
		if _, err := io.WriteString(w, "half a docu"); err != nil {
			return err
		}
		return errBroken
	}}
}

// holds checks that dir holds exactly the given files with their content.
func holds(t *testing.T, dir string, want map[string]string) {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if _, expected := want[e.Name()]; !expected {
			t.Errorf("%s was left behind", e.Name())
		}
	}
	for name, content := range want {
		if got, err := os.ReadFile(filepath.Join(dir, name)); err != nil || string(got) != content {
			t.Errorf("%s holds %q, %v; want %q", name, got, err, content)
		}
	}
}

func TestAllDocumentsAppear(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "new")
	if err := writeAll(t.Context(), dir, []document{text("a", "1"), text("b", "2")}); err != nil {
		t.Fatal(err)
	}
	holds(t, dir, map[string]string{"a": "1", "b": "2"})
	if err := writeAll(t.Context(), dir, []document{text("a", "3")}); err != nil {
		t.Fatal(err)
	}
	holds(t, dir, map[string]string{"a": "3", "b": "2"})
}

func TestOneFailureLeavesAllAsItWas(t *testing.T) {
	dir := t.TempDir()
	if err := writeAll(t.Context(), dir, []document{text("a", "old")}); err != nil {
		t.Fatal(err)
	}
	err := writeAll(t.Context(), dir, []document{text("a", "new"), half("b"), text("c", "new")})
	if !errors.Is(err, errBroken) || !strings.HasPrefix(err.Error(), "b: ") {
		t.Errorf("error %v, want one that names b", err)
	}
	holds(t, dir, map[string]string{"a": "old"})
}

func TestFailureRemovesTheFoldersItMade(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "new")
	if err := writeAll(t.Context(), filepath.Join(dir, "deep"), []document{half("a")}); err == nil {
		t.Fatal("no error")
	}
	if _, err := os.Stat(dir); !errors.Is(err, os.ErrNotExist) {
		t.Errorf("the folder is still there: %v", err)
	}
}

// Where the last file cannot be put in place, those before it are taken back.
func TestRenamesAreUndone(t *testing.T) {
	dir := t.TempDir()
	if err := writeAll(t.Context(), dir, []document{text("a", "old")}); err != nil {
		t.Fatal(err)
	}
	s := staged{}
	for _, d := range []document{text("a", "new"), text("b", "new")} {
		if err := s.add(t.Context(), dir, d); err != nil {
			t.Fatal(err)
		}
	}
	if err := os.Remove(s[1].beside); err != nil { // somebody tidied up
		t.Fatal(err)
	}
	if err := s.place(); err == nil || !strings.Contains(err.Error(), "b: cannot be put in place") {
		t.Errorf("error %v, want one about b", err)
	}
	s.clean()
	holds(t, dir, map[string]string{"a": "old"})
}

func TestStoppingLeavesNothing(t *testing.T) {
	dir := t.TempDir()
	ctx, stop := context.WithCancel(t.Context())
	stopping := document{"b", func(w io.Writer) error {
		stop()
		for range 3 { // a writer that goes on is told at its next write
			if _, err := io.WriteString(w, "more"); err != nil {
				return err
			}
		}
		return nil
	}}
	if err := writeAll(ctx, dir, []document{text("a", "1"), stopping}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
	holds(t, dir, nil)
	if err := writeAll(ctx, dir, []document{text("a", "1")}); !errors.Is(err, context.Canceled) {
		t.Errorf("error %v, want that of the context", err)
	}
	holds(t, dir, nil)
}

func TestIntoAFile(t *testing.T) {
	path := filepath.Join(t.TempDir(), "file")
	if err := os.WriteFile(path, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if err := writeAll(t.Context(), path, []document{text("a", "1")}); err == nil || !strings.Contains(err.Error(), "is a file; --into wants a folder") {
		t.Errorf("error %v", err)
	}
}
