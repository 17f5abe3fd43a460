package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
)

// A document is a file to write.
type document struct {
	name  string
	write func(io.Writer) error
}

// writeAll writes documents into dir, all or none: each is written beside its place first, and they are put in place
// only when every one is complete. A file that is replaced is kept until then, and put back when something fails.
func writeAll(ctx context.Context, dir string, documents []document) (err error) {
	made, err := makeDir(dir)
	if err != nil {
		return err
	}
	s := staged{}
	defer func() {
		s.clean()
		if err != nil {
			removeEmpty(made)
		}
	}()
	for _, d := range documents {
		if err := s.add(ctx, dir, d); err != nil {
			return err
		}
	}
	if err := ctx.Err(); err != nil {
		return err
	}
	return s.place()
}

// makeDir makes the folder and returns those that were not there, the deepest first.
func makeDir(dir string) (made []string, err error) {
	if info, err := os.Stat(dir); err == nil && !info.IsDir() {
		return nil, fmt.Errorf("%s: is a file; --into wants a folder", dir)
	}
	for d := filepath.Clean(dir); ; d = filepath.Dir(d) {
		if _, err := os.Stat(d); !errors.Is(err, fs.ErrNotExist) {
			return made, os.MkdirAll(dir, 0o777)
		}
		made = append(made, d)
	}
}

// removeEmpty removes the folders that are empty.
func removeEmpty(dirs []string) {
	for _, d := range dirs {
		_ = os.Remove(d) // fails where something is in it
	}
}

// A pending file is complete beside its place.
type pending struct {
	beside, final string
	old           string // where the file that it replaces was moved
	placed        bool
}

type staged []*pending

func (s *staged) add(ctx context.Context, dir string, d document) error {
	beside := filepath.Join(dir, fmt.Sprintf(".%s.%d.part", d.name, os.Getpid()))
	f, err := os.OpenFile(beside, os.O_CREATE|os.O_TRUNC|os.O_WRONLY, 0o666)
	if err != nil {
		return err
	}
	*s = append(*s, &pending{beside: beside, final: filepath.Join(dir, d.name)})
	err = d.write(stoppable{ctx, f})
	if e := f.Close(); err == nil {
		err = e
	}
	if err != nil {
		return fmt.Errorf("%s: could not be written: %w", d.name, err)
	}
	return nil
}

// place renames all, and undoes it when one fails.
func (s staged) place() error {
	for _, p := range s {
		if _, err := os.Lstat(p.final); err == nil {
			old := p.beside + ".old"
			if err := os.Rename(p.final, old); err != nil {
				s.undo()
				return fmt.Errorf("%s: cannot be replaced; close the program that has it open: %w", p.final, err)
			}
			p.old = old
		}
		if err := os.Rename(p.beside, p.final); err != nil {
			s.undo()
			return fmt.Errorf("%s: cannot be put in place: %w", p.final, err)
		}
		p.placed = true
	}
	for _, p := range s {
		if p.old != "" {
			_ = os.Remove(p.old)
		}
	}
	return nil
}

func (s staged) undo() {
	for _, p := range s {
		if p.placed {
			_ = os.Remove(p.final)
		}
		if p.old != "" {
			_ = os.Rename(p.old, p.final)
		}
		p.placed = false
	}
}

// clean removes what is still beside its place.
func (s staged) clean() {
	for _, p := range s {
		if !p.placed {
			_ = os.Remove(p.beside)
		}
	}
}

// A stoppable writer fails once the context is done, so that a long document stops soon after Ctrl-C.
type stoppable struct {
	ctx context.Context
	io.Writer
}

func (w stoppable) Write(p []byte) (int, error) {
	if err := w.ctx.Err(); err != nil {
		return 0, err
	}
	return w.Writer.Write(p)
}
