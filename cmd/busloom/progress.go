package main

import (
	"fmt"
	"io"
	"os"
	"time"

	"busloom/frame"

	"golang.org/x/term"
)

// progress shows how far a long reading has come, on a terminal only.
type progress struct {
	w     io.Writer
	start time.Time
	last  time.Time
	shown bool
	calls int
}

// Long work is told only after a moment, and then a few times a second.
const (
	progressAfter = time.Second
	progressEvery = 200 * time.Millisecond
)

func newProgress(w io.Writer) *progress {
	p := &progress{start: time.Now()}
	if f, ok := w.(*os.File); ok && term.IsTerminal(int(f.Fd())) && os.Getenv("TERM") != "dumb" {
		p.w = w
	}
	return p
}

func (p *progress) update(c frame.Counts) {
	// The clock is asked once in a while: the call comes for every batch.
	if p.calls++; p.w == nil || p.calls%64 != 0 {
		return
	}
	now := time.Now()
	if now.Sub(p.start) < progressAfter || now.Sub(p.last) < progressEvery {
		return
	}
	p.last, p.shown = now, true
	rate := float64(c.Records) / now.Sub(p.start).Seconds()
	fmt.Fprintf(p.w, "\r%d records, %.1f MB, %.1f million records/s ", c.Records, float64(c.Bytes)/1e6, rate/1e6)
}

// done removes the line.
func (p *progress) done() {
	if p.shown {
		fmt.Fprintf(p.w, "\r%60s\r", "")
	}
}
