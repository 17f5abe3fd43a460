package csv

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"runtime"
	"sync"
)

const (
	minChunk = 64 << 10
	maxChunk = 512 << 10
	maxLine  = 1 << 20 // bytes in one line; longer ones are no rows

	maxWorkers = 8 // more would cost memory and find nothing to do: reading and measuring are slower
)

// chunkSize aims at about one block's rows.
func chunkSize(rowLength int) int {
	return min(max(4096*rowLength, minChunk), maxChunk)
}

var errLongLine = errors.New("long line")

// A cutter cuts a text into chunks at line ends.
type cutter struct {
	r     io.Reader
	size  int
	carry []byte // begun line, for the next chunk
	done  bool
}

// fill puts the next lines into c. It reports false when there are none.
func (k *cutter) fill(c *chunk) bool {
	c.reset()
	if k.done {
		return false
	}
	size := max(k.size, 2*len(k.carry))
	if cap(c.text) < size+1 {
		c.text = make([]byte, size+1)
	}
	b := c.text[:size]
	n := copy(b, k.carry)
	for {
		m, err := io.ReadFull(k.r, b[n:])
		n += m
		if err != nil {
			return k.last(c, b[:n], err)
		}
		if end := lastLineEnd(b); end > 0 {
			k.carry = append(k.carry[:0], b[end:]...)
			c.text = b[:end]
			return true
		}
		if len(b) > maxLine {
			c.err, c.text, k.done = errLongLine, b[:0], true
			return true
		}
		b = append(b, make([]byte, len(b))...)
	}
}

// last hands over what is left when reading has ended with err.
func (k *cutter) last(c *chunk, b []byte, err error) bool {
	k.done = true
	if err != io.EOF && err != io.ErrUnexpectedEOF {
		c.err = err
		b = b[:lastLineEnd(b)]
	}
	if len(b) > maxLine && lastLineEnd(b) == 0 {
		c.err, b = errLongLine, b[:0]
	}
	if n := len(b); n > 0 && b[n-1] != '\n' && b[n-1] != '\r' {
		c.open = true
		b = append(b, '\n')
	}
	c.text = b
	return len(b) > 0 || c.err != nil
}

// lastLineEnd is the length of b's whole lines. In a text with lone CR as its line end, a CR at the very end could be
// half of a CR LF and is not taken.
func lastLineEnd(b []byte) int {
	if n := bytes.LastIndexByte(b, '\n'); n >= 0 {
		return n + 1
	}
	if len(b) == 0 {
		return 0
	}
	return bytes.LastIndexByte(b[:len(b)-1], '\r') + 1
}

// A feed parses chunks on all processors and hands them over in the file's order.
type feed struct {
	ordered chan *chunk
	free    chan *chunk
	stop    chan struct{}
	wait    sync.WaitGroup
}

func startFeed(k *cutter, p *plan) *feed {
	workers := min(runtime.GOMAXPROCS(0), maxWorkers)
	depth := workers + 2
	f := &feed{ordered: make(chan *chunk, depth), free: make(chan *chunk, depth), stop: make(chan struct{})}
	jobs := make(chan *chunk, depth)
	for range depth {
		f.free <- newChunk(p.channels)
	}
	f.wait.Add(1 + workers)
	go f.read(k, jobs)
	for range workers {
		go func() {
			defer f.wait.Done()
			for c := range jobs {
				c.parse(p)
				c.parsed <- struct{}{}
			}
		}()
	}
	return f
}

func (f *feed) read(k *cutter, jobs chan<- *chunk) {
	defer f.wait.Done()
	defer close(f.ordered)
	defer close(jobs)
	for {
		select {
		case <-f.stop:
			return
		case c := <-f.free:
			if !k.fill(c) {
				return
			}
			jobs <- c // both have room for every chunk there is
			f.ordered <- c
		}
	}
}

// next returns the next chunk, parsed, or nil at the end.
func (f *feed) next() *chunk {
	c, ok := <-f.ordered
	if !ok {
		return nil
	}
	<-c.parsed
	return c
}

// release gives a chunk back.
func (f *feed) release(c *chunk) { f.free <- c }

// close ends all work. The file may be closed after it.
func (f *feed) close() {
	close(f.stop)
	f.wait.Wait()
}

// skip reads past n bytes.
func skip(r io.Reader, n int64) error {
	if _, err := io.CopyN(io.Discard, r, n); err != nil {
		return fmt.Errorf("reading past the header: %w", err)
	}
	return nil
}
