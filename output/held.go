package output

import (
	"time"

	"busloom/decode"
)

// held keeps the last value of each signal and writes them all as a row: at
// each frame that brings one, or at each step of time.
type held struct {
	step  int64 // ns; 0: a row for each frame
	cells [][]byte
	next  int64 // the time of the next row, with step
	begun bool

	head func(dst []byte) []byte
	cell func(dst []byte, v *decode.Value, r *decode.Record) []byte
	row  func(dst []byte, ns int64, cells [][]byte) []byte
}

// longestHole is how many rows without a frame are written in a row: a longer
// hole in the times is no recording.
const longestHole = 100_000

// newWide writes rows as CSV with a column for each signal.
func newWide(plan *decode.Plan, step time.Duration) *held {
	var c clock
	return &held{
		step: int64(step), cells: make([][]byte, len(plan.Signals)),
		head: func(dst []byte) []byte {
			dst = append(dst, "time"...)
			for i, label := range labels(plan) {
				if unit := plan.Signals[i].Unit.Symbol; unit != "" {
					label += " [" + unit + "]"
				}
				dst = append(append(dst, ','), csvField(label)...)
			}
			return append(dst, csvEnd...)
		},
		cell: func(dst []byte, v *decode.Value, r *decode.Record) []byte {
			dst = v.Signal.AppendText(dst, v, r.Frame)
			if v.State != decode.Number {
				dst = quoteTail(dst, 0)
			}
			return dst
		},
		row: func(dst []byte, ns int64, cells [][]byte) []byte {
			dst = c.append(dst, ns)
			for _, cell := range cells {
				dst = append(append(dst, ','), cell...)
			}
			return append(dst, csvEnd...)
		},
	}
}

// newStepTable writes rows as a table for people, one each step.
func newStepTable(plan *decode.Plan, step time.Duration, dates bool) *held {
	var (
		signals []*decode.Signal
		names   []string
		all     = labels(plan)
		places  = make([]int, len(plan.Signals)) // column + 1, 0 for none
	)
	for _, m := range plan.Messages {
		for _, s := range shown(m) {
			signals = append(signals, s)
			names = append(names, all[s.Index])
			places[s.Index] = len(signals)
		}
	}
	c := newColumns(signals, names, dates)
	row := make([][]byte, len(signals))
	return &held{
		step: int64(step), cells: make([][]byte, len(plan.Signals)),
		head: c.header,
		cell: func(dst []byte, v *decode.Value, r *decode.Record) []byte {
			if at := places[v.Signal.Index]; at > 0 {
				dst, _ = c.cells[at-1].appendCell(dst, v, r)
			}
			return dst
		},
		row: func(dst []byte, ns int64, cells [][]byte) []byte {
			for i, s := range signals {
				row[i] = cells[s.Index]
			}
			return c.appendRow(dst, ns, row, nil)
		},
	}
}

func (h *held) Header(dst []byte) []byte { return h.head(dst) }

func (h *held) Record(dst []byte, r *decode.Record) []byte {
	if len(r.Values) == 0 {
		return dst
	}
	t := r.Frame.Time
	if h.step > 0 {
		dst = h.due(dst, t)
	}
	for i := range r.Values {
		v := &r.Values[i]
		cell := &h.cells[v.Signal.Index]
		*cell = h.cell((*cell)[:0], v, r)
	}
	if h.step > 0 {
		return dst
	}
	return h.row(dst, t, h.cells)
}

// due writes the rows of the steps before t, with what was known then. Steps
// are whole multiples since the clock's zero, so that runs over parts of a
// capture have the same rows.
func (h *held) due(dst []byte, t int64) []byte {
	first := t - mod(t, h.step)
	if first < t {
		first += h.step
	}
	if !h.begun || (t > h.next && (t-h.next)/h.step > longestHole) {
		h.begun, h.next = true, first
	}
	for h.next < t {
		dst = h.row(dst, h.next, h.cells)
		h.next += h.step
	}
	return dst
}

func mod(a, b int64) int64 {
	if m := a % b; m >= 0 {
		return m
	}
	return a%b + b
}

// Trailer writes the row that is still due.
func (h *held) Trailer(dst []byte) []byte {
	if h.step > 0 && h.begun {
		dst = h.row(dst, h.next, h.cells)
	}
	return dst
}
