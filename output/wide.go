package output

import (
	"time"

	"busloom/decode"
)

// wide writes CSV with a column for each signal: a row for each frame that
// brings one, or for each step of time, with the last values held.
type wide struct {
	plan  *decode.Plan
	step  int64 // ns; 0: a row for each frame
	cells [][]byte
	clock clock
	next  int64 // the time of the next row, with step
	begun bool
}

func newWide(plan *decode.Plan, step time.Duration) *wide {
	return &wide{plan: plan, step: int64(step), cells: make([][]byte, len(plan.Signals))}
}

func (w *wide) Header(dst []byte) []byte {
	dst = append(dst, "time"...)
	for i, label := range labels(w.plan) {
		if unit := w.plan.Signals[i].Unit.Symbol; unit != "" {
			label += " [" + unit + "]"
		}
		dst = append(append(dst, ','), csvField(label)...)
	}
	return append(dst, csvEnd...)
}

func (w *wide) Record(dst []byte, r *decode.Record) []byte {
	if len(r.Values) == 0 {
		return dst
	}
	t := r.Frame.Time
	if w.step > 0 {
		if !w.begun {
			w.begun = true
			// Steps are whole multiples since the clock's zero, so that runs
			// over parts of a capture have the same rows.
			w.next = t - mod(t, w.step)
			if w.next < t {
				w.next += w.step
			}
		}
		// A hole longer than that is no recording: its rows are left out.
		if (t-w.next)/w.step > longestHole {
			w.next = t - mod(t, w.step)
		}
		// Rows that are due show what was known before this frame.
		for w.next < t {
			dst = w.row(dst, w.next)
			w.next += w.step
		}
	}
	for i := range r.Values {
		v := &r.Values[i]
		cell := &w.cells[v.Signal.Index]
		*cell = v.Signal.AppendText((*cell)[:0], v, r.Frame)
		if v.State != decode.Number {
			*cell = quoteTail(*cell, 0)
		}
	}
	if w.step > 0 {
		return dst
	}
	return w.row(dst, t)
}

// longestHole is how many rows without a frame are written in a row.
const longestHole = 100_000

func mod(a, b int64) int64 {
	if m := a % b; m >= 0 {
		return m
	}
	return a%b + b
}

func (w *wide) row(dst []byte, t int64) []byte {
	dst = w.clock.append(dst, t)
	for _, cell := range w.cells {
		dst = append(append(dst, ','), cell...)
	}
	return append(dst, csvEnd...)
}

// Trailer writes the row that is still due.
func (w *wide) Trailer(dst []byte) []byte {
	if w.step > 0 && w.begun {
		dst = w.row(dst, w.next)
	}
	return dst
}
