package main

import (
	"context"
	"io"
)

// interruptible reads r until ctx ends: a read that waits for a pipe or a
// terminal must not keep Ctrl-C waiting. After that r is left alone.
type interruptible struct {
	ctx  context.Context
	r    io.Reader
	buf  []byte
	done chan readResult
}

type readResult struct {
	n   int
	err error
}

func newInterruptible(ctx context.Context, r io.Reader) *interruptible {
	return &interruptible{ctx: ctx, r: r, done: make(chan readResult, 1)}
}

func (i *interruptible) Read(p []byte) (int, error) {
	if err := i.ctx.Err(); err != nil {
		return 0, err
	}
	if len(i.buf) < len(p) {
		i.buf = make([]byte, len(p))
	}
	go func() {
		n, err := i.r.Read(i.buf[:len(p)])
		i.done <- readResult{n, err}
	}()
	select {
	case res := <-i.done:
		return copy(p, i.buf[:res.n]), res.err
	case <-i.ctx.Done():
		return 0, i.ctx.Err()
	}
}
