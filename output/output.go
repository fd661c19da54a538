package output

import (
	"fmt"
	"strings"
	"time"

	"busloom/decode"
	"busloom/diag"
)

// Formatter appends what it writes to a buffer, so that it can be run on
// blocks of a capture and the results joined in order.
type Formatter interface {
	// Header is written first.
	Header(dst []byte) []byte
	// Record writes one record; it may be nothing.
	Record(dst []byte, r *decode.Record) []byte
	// Trailer is written after the last record.
	Trailer(dst []byte) []byte
}

// Forker is a Formatter that keeps nothing from one record to the next but
// scratch room: records may be cut into blocks, each formatted by a fork of its
// own at the same time, and the blocks joined in order. csv, jsonl and table
// without Options.Changes are Forkers.
type Forker interface {
	Formatter
	// Fork makes another one for another goroutine.
	Fork() Formatter
}

// Options of the formats.
type Options struct {
	Changes bool          // only values that differ from the signal's last one
	Step    time.Duration // table and wide: a row each step
	All     bool          // table and jsonl: undescribed, unmapped and remote frames too
	JSON    bool          // summary: as JSON
	Dates   bool          // table: times as dates in UTC
}

// formats are the names that New takes.
var formats = []string{"table", "csv", "wide", "jsonl", "summary", "none"}

// New makes the formatter of a name: table, csv, wide, jsonl or summary; nil for
// none. Its error says which option doesn't go with it, or the nearest name.
func New(name string, plan *decode.Plan, o Options) (Formatter, error) {
	switch {
	case o.Step < 0:
		return nil, fmt.Errorf("--step is below zero")
	case o.Step != 0 && name != "wide" && name != "table":
		return nil, fmt.Errorf("--step goes with --format table or wide")
	case o.JSON && name != "summary":
		return nil, fmt.Errorf("--json goes with --format summary")
	case o.Dates && name != "table":
		return nil, fmt.Errorf("--dates goes with --format table")
	case o.Changes && (name == "summary" || name == "none" || o.Step != 0):
		return nil, fmt.Errorf("--changes goes with rows of values: not with summary, none or --step")
	}
	var f Formatter
	switch name {
	case "table":
		if o.Step > 0 {
			return newStepTable(plan, o.Step, o.Dates), nil
		}
		f = newTable(plan, o)
	case "csv":
		f = newCSV(plan)
	case "wide":
		f = newWide(plan, o.Step)
	case "jsonl":
		f = newJSONLines(plan, o.All)
	case "summary":
		return newSummary(plan, o.JSON), nil
	case "none":
		return nil, nil
	default:
		near := diag.Nearest(name, formats)
		if near != "" {
			near = " (did you mean " + near + "?)"
		}
		return nil, fmt.Errorf("there is no format %s%s; there is %s", name, near, strings.Join(formats, ", "))
	}
	if o.Changes {
		f = newChanges(plan, f)
	}
	return f, nil
}

// labels names the signals of a plan for columns: Message.signal, with the bus
// where a message is on several.
func labels(plan *decode.Plan) []string {
	buses := map[string]int{}
	for _, m := range plan.Messages {
		buses[m.Model.Name]++
	}
	out := make([]string, len(plan.Signals))
	for i, s := range plan.Signals {
		out[i] = s.Name()
		if buses[s.Message.Model.Name] > 1 {
			out[i] += " on " + s.Message.Bus
		}
	}
	return out
}
