package output

import (
	"strconv"

	"busloom/decode"
)

// wrong reports whether appendCheck has anything to say.
func wrong(r *decode.Record) bool {
	return r.Checksum == decode.Bad || r.Counter == decode.Bad || r.Counter == decode.Repeated || r.Counter == decode.Lost ||
		r.Fit != decode.FitExact || r.UnknownSelection
}

// appendCheck appends what is wrong with a record's protection or length, in
// phrases joined by between; nothing if all is well.
func appendCheck(dst []byte, r *decode.Record, between string) []byte {
	if !wrong(r) {
		return dst
	}
	start := len(dst)
	if r.Checksum == decode.Bad {
		dst = append(dst, "checksum wrong"...)
	}
	gap := func(dst []byte) []byte {
		if len(dst) > start {
			dst = append(dst, between...)
		}
		return dst
	}
	switch r.Counter {
	case decode.Bad:
		dst = append(gap(dst), "counter out of range"...)
	case decode.Repeated:
		dst = append(gap(dst), "counter repeated"...)
	case decode.Lost:
		dst = append(gap(dst), "counter lost "...)
		dst = strconv.AppendUint(dst, r.Steps, 10)
	}
	switch r.Fit {
	case decode.FitShort:
		dst = append(gap(dst), "frame short"...)
	case decode.FitLong:
		dst = append(gap(dst), "frame long"...)
	}
	if r.UnknownSelection {
		dst = append(gap(dst), "unknown selection"...)
	}
	return dst
}

// phrases joins what is wrong in CSV and in the table.
const phrases = "; "

// idle reports whether a decoded record has nothing to show: nothing of its
// message is wanted, or a selection left out what is, and nothing is wrong. A
// message without signals shows that it came.
func idle(r *decode.Record) bool {
	if !r.Message.Wanted {
		return true
	}
	return len(r.Values) == 0 && len(r.Message.Signals) > 0 && !wrong(r)
}
