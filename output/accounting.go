package output

import (
	"fmt"
	"sort"
	"strings"

	"busloom/decode"
)

// Accounting is the text that says what became of every record: the classes,
// which add up to what was read, and what was noticed about the decoded ones.
func Accounting(t *decode.Totals, skipped int64) string {
	var b strings.Builder
	fmt.Fprintf(&b, "%s read = %d decoded", counted(t.Sum()+skipped, "record", "records"), t.Classes[decode.Decoded])
	for _, c := range []decode.Class{decode.Undescribed, decode.RemoteFrame, decode.ErrorFrame, decode.Unmapped} {
		if n := t.Classes[c]; n > 0 || c == decode.Undescribed {
			fmt.Fprintf(&b, " + %d %s", n, plural(n, className(c)))
		}
	}
	fmt.Fprintf(&b, " + %d malformed", t.Malformed)
	if skipped > 0 {
		fmt.Fprintf(&b, " + %d outside of the time window", skipped)
	}
	b.WriteByte('\n')
	if t.Short+t.Long > 0 {
		fmt.Fprintf(&b, "of the decoded: %d shorter and %d longer than described\n", t.Short, t.Long)
	}
	var sum decode.MessageTotals
	for i := range t.Messages {
		m := &t.Messages[i]
		sum.ChecksumBad += m.ChecksumBad
		sum.CounterBad += m.CounterBad
		sum.CounterRepeated += m.CounterRepeated
		sum.CounterLost += m.CounterLost
		sum.LostSteps += m.LostSteps
		sum.UnknownSelection += m.UnknownSelection
	}
	if t.ProtectionFailures() > 0 {
		fmt.Fprintf(&b, "protection failures: %s, %s out of range, %d repeated, %s of %s\n",
			counted(sum.ChecksumBad, "wrong checksum", "wrong checksums"), counted(sum.CounterBad, "counter", "counters"),
			sum.CounterRepeated, counted(sum.CounterLost, "gap", "gaps"), counted(sum.LostSteps, "lost step", "lost steps"))
	}
	if sum.UnknownSelection > 0 {
		fmt.Fprintf(&b, "unknown selector values: %s\n", frames(sum.UnknownSelection))
	}
	if len(t.Unmapped) > 0 {
		var names []string
		for name, n := range t.Unmapped {
			names = append(names, fmt.Sprintf("%s (%d)", name, n))
		}
		sort.Strings(names)
		fmt.Fprintf(&b, "no bus is tied to %s: use --map INTERFACE=BUS\n", strings.Join(names, ", "))
	}
	return b.String()
}

func plural(n int64, word string) string {
	if word == "error frame" && n != 1 {
		return "error frames"
	}
	return word
}

func counted(n int64, one, more string) string {
	if n == 1 {
		more = one
	}
	return fmt.Sprintf("%d %s", n, more)
}
