package pipeline

import (
	"context"
	"errors"
	"fmt"
	"io"

	"busloom/decode"
	"busloom/frame"
	"busloom/output"
)

// batchSize is how many frames are read at once: enough to spread the cost of
// a call, few enough to stay in the first-level cache.
const batchSize = 256

// flushAt is how much output is gathered before it is written.
const flushAt = 256 << 10

// Window is a part of a capture's time, both ends included; nil is open.
type Window struct {
	From, To *Moment
}

// Moment is a time in nanoseconds, of the capture's clock or after its first
// record.
type Moment struct {
	Time      int64
	SinceZero bool
}

// Config is one run.
type Config struct {
	Source frame.Source
	Plan   *decode.Plan
	Window Window
	// Format writes the records; nil writes nothing.
	Format output.Formatter
	Out    io.Writer
	// Progress is called now and then with what was read; nil for none.
	Progress func(frame.Counts)
}

// Result is what became of a run.
type Result struct {
	Totals *decode.Totals
	// Skipped counts the frames outside of the window.
	Skipped int64
	// Read is the error that ended the source early, Write the one that ended
	// the output; nil if all went well.
	Read, Write error
	Interrupted bool
}

// Run decodes the whole source. It always returns the accounting of what was
// read, whatever went wrong.
func Run(ctx context.Context, c Config) Result {
	var (
		res     Result
		record  decode.Record
		tracker = decode.NewTracker(c.Plan)
		batch   = make([]frame.Frame, batchSize)
		buffer  []byte
		bound   int
		window  = c.Window
		first   = true
	)
	flush := func(limit int) bool {
		if len(buffer) <= limit {
			return true
		}
		if _, err := c.Out.Write(buffer); err != nil {
			res.Write = err
			return false
		}
		buffer = buffer[:0]
		return true
	}
	if c.Format != nil {
		buffer = c.Format.Header(buffer)
	}
	for res.Write == nil {
		if ctx.Err() != nil {
			res.Interrupted = true
			break
		}
		n, err := c.Source.Read(batch)
		if names := c.Source.Interfaces(); len(names) > bound {
			c.Plan.Bind(names)
			bound = len(names)
		}
		for i := range batch[:n] {
			f := &batch[i]
			if first {
				first = false
				window = window.absolute(f.Time)
			}
			if !window.holds(f.Time) {
				res.Skipped++
				continue
			}
			c.Plan.Decode(f, &record)
			tracker.Observe(&record)
			if c.Format != nil {
				buffer = c.Format.Record(buffer, &record)
			}
		}
		if !flush(flushAt) {
			break
		}
		if c.Progress != nil {
			c.Progress(c.Source.Counts())
		}
		if err != nil {
			switch {
			case ctx.Err() != nil:
				res.Interrupted = true
			case !errors.Is(err, io.EOF):
				res.Read = err
			}
			break
		}
	}
	res.Totals = tracker.Totals()
	res.Totals.Malformed = c.Source.Counts().Malformed
	if c.Format != nil && res.Write == nil {
		buffer = c.Format.Trailer(buffer)
		flush(0)
	}
	return res
}

func (w Window) absolute(zero int64) Window {
	at := func(m *Moment) *Moment {
		if m == nil || !m.SinceZero {
			return m
		}
		return &Moment{Time: zero + m.Time}
	}
	return Window{at(w.From), at(w.To)}
}

func (w Window) holds(t int64) bool {
	return (w.From == nil || t >= w.From.Time) && (w.To == nil || t <= w.To.Time)
}

// Check proves that the accounting adds up: every record that was read is in
// exactly one class.
func (r *Result) Check(counts frame.Counts) error {
	if sum := r.Totals.Sum() + r.Skipped; sum != counts.Records {
		return fmt.Errorf("internal mistake: %d records were read but %d are accounted for", counts.Records, sum)
	}
	return nil
}
