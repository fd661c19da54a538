package output

import (
	"strconv"

	"busloom/decode"
)

// appendCheck appends what is wrong with a record's protection or length, in
// words joined by a semicolon and a blank; nothing if all is well.
func appendCheck(dst []byte, r *decode.Record) []byte {
	start := len(dst)
	say := func(text string) {
		if len(dst) > start {
			dst = append(dst, "; "...)
		}
		dst = append(dst, text...)
	}
	if r.Checksum == decode.Bad {
		say("checksum wrong")
	}
	switch r.Counter {
	case decode.Bad:
		say("counter out of range")
	case decode.Repeated:
		say("counter repeated")
	case decode.Lost:
		say("counter lost ")
		dst = strconv.AppendUint(dst, r.Steps, 10)
	}
	switch r.Fit {
	case decode.FitShort:
		say("frame short")
	case decode.FitLong:
		say("frame long")
	}
	if r.UnknownSelection {
		say("unknown selection")
	}
	return dst
}
