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

// Options of the formats.
type Options struct {
	Changes bool          // only values that differ from the signal's last one
	Step    time.Duration // wide: a row each step
	All     bool          // table and jsonl: undescribed, unmapped and remote frames too
	JSON    bool          // summary: as JSON
	Dates   bool          // table: times as dates in UTC
}

// Formats are the names that New takes.
var formats = []string{"table", "csv", "wide", "jsonl", "summary", "none"}

// New makes the formatter of a name; nil for none.
func New(name string, plan *decode.Plan, o Options) (Formatter, error) {
	refuse := func(given bool, option, format string) error {
		if given && name != format {
			return fmt.Errorf("--%s goes with --format %s", option, format)
		}
		return nil
	}
	for _, err := range []error{refuse(o.Step != 0, "step", "wide"), refuse(o.JSON, "json", "summary"), refuse(o.Dates, "dates", "table")} {
		if err != nil {
			return nil, err
		}
	}
	if o.Step < 0 {
		return nil, fmt.Errorf("--step is below zero")
	}
	if o.Changes && (name == "summary" || name == "wide" && o.Step != 0) {
		return nil, fmt.Errorf("--changes doesn't go with %s", name)
	}
	var f Formatter
	switch name {
	case "table":
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
