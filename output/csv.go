package output

import (
	"slices"
	"strings"

	"busloom/decode"
)

// csvWriter writes a row for each value: time, bus, message, signal, value,
// unit, word, code, check. Everything that is the same in each row of a signal
// is prepared, so that a row is four copies and a number.
type csvWriter struct {
	rows  []csvRow // by Signal.Index
	clock clock
	time  [chunk]byte
	check []byte
}

// csvRow is what a signal's rows are made of, without the time: head, number
// and tail, or one of the words or codes. All of them are fields with their
// commas and end where the check begins.
type csvRow struct {
	head  [2 * chunk]byte // ,bus,message,signal,
	tail  [chunk]byte     // ,unit,,, and the line's end
	heads uint8           // length of head; 0 if head or tail is too long for it
	tails uint8
	words [][]byte // by word
	codes [][]byte // by code
	long  struct{ head, unit string }
}

// chunk is what is copied at once: a copy of constant length needs no call,
// and what is too much is overwritten by what follows.
const chunk = 32

// roomForRow is more than a row of short parts and a number needs.
const roomForRow = 8 * chunk

const csvEnd = "\r\n"

func newCSV(plan *decode.Plan) *csvWriter {
	w := &csvWriter{rows: make([]csvRow, len(plan.Signals))}
	for i, s := range plan.Signals {
		row := &w.rows[i]
		head := "," + csvField(s.Message.Bus) + "," + csvField(s.Message.Model.Name) + "," + csvField(s.Path) + ","
		unit := csvField(s.Unit.Symbol)
		row.long.head, row.long.unit = head, unit
		if tail := "," + unit + ",,," + csvEnd; len(head) <= len(row.head) && len(tail) <= len(row.tail) {
			row.heads, row.tails = uint8(copy(row.head[:], head)), uint8(copy(row.tail[:], tail))
		}
		for _, word := range s.Words {
			row.words = append(row.words, []byte(head+",,"+csvField(word)+",,"+csvEnd))
		}
		if s.Model != nil {
			for _, c := range s.Model.Codes {
				row.codes = append(row.codes, []byte(head+","+unit+",,"+csvField(decode.CodeWord(c))+","+csvEnd))
			}
		}
	}
	return w
}

// csvField quotes a field where RFC 4180 wants it.
func csvField(text string) string {
	if !strings.ContainsAny(text, ",\"\r\n") {
		return text
	}
	return `"` + strings.ReplaceAll(text, `"`, `""`) + `"`
}

// Fork implements Forker: the rows are shared.
func (w *csvWriter) Fork() Formatter { return &csvWriter{rows: w.rows} }

func (w *csvWriter) Header(dst []byte) []byte {
	return append(dst, "time,bus,message,signal,value,unit,word,code,check"+csvEnd...)
}

func (w *csvWriter) Trailer(dst []byte) []byte { return dst }

func (w *csvWriter) Record(dst []byte, r *decode.Record) []byte {
	if len(r.Values) == 0 {
		return dst
	}
	times := len(w.clock.append(w.time[:0], r.Frame.Time))
	w.check = appendCheck(w.check[:0], r, phrases)
	for i := range r.Values {
		v := &r.Values[i]
		row := &w.rows[v.Signal.Index]
		if cap(dst)-len(dst) < roomForRow {
			dst = slices.Grow(dst, len(r.Values)*roomForRow)
		}
		n := len(dst)
		room := dst[n : n+3*chunk]
		*(*[chunk]byte)(room) = w.time
		if v.State == decode.Number && row.heads > 0 {
			*(*[2 * chunk]byte)(room[times:]) = row.head
			dst = v.Signal.AppendNumber(dst[:n+times+int(row.heads)], v)
			if cap(dst)-len(dst) < chunk {
				dst = slices.Grow(dst, roomForRow)
			}
			n = len(dst)
			*(*[chunk]byte)(dst[n : n+chunk]) = row.tail
			dst = dst[:n+int(row.tails)]
		} else {
			dst = row.appendOther(dst[:n+times], r, v)
		}
		if len(w.check) > 0 {
			dst = append(append(dst[:len(dst)-len(csvEnd)], w.check...), csvEnd...)
		}
	}
	return dst
}

// appendOther appends the fields of what isn't a number, or is a long row.
func (row *csvRow) appendOther(dst []byte, r *decode.Record, v *decode.Value) []byte {
	switch v.State {
	case decode.Word:
		return append(dst, row.words[v.Index]...)
	case decode.Coded:
		return append(dst, row.codes[v.Index]...)
	}
	dst = append(dst, row.long.head...)
	switch v.State {
	case decode.Number:
		dst = append(v.Signal.AppendNumber(dst, v), ',')
		dst = append(append(dst, row.long.unit...), ",,,"...)
	case decode.Text, decode.Octets:
		dst = append(dst, ",,"...)
		start := len(dst)
		dst = append(quoteTail(v.Signal.AppendText(dst, v, r.Frame), start), ",,"...)
	default:
		dst = append(dst, ',')
		dst = append(append(dst, row.long.unit...), ",,"...)
		dst = append(v.Signal.AppendText(dst, v, r.Frame), ',')
	}
	return append(dst, csvEnd...)
}

// quoteTail quotes what was appended from start on, where RFC 4180 wants it.
func quoteTail(dst []byte, start int) []byte {
	quotes, wanted := 0, false
	for _, c := range dst[start:] {
		switch c {
		case '"':
			quotes++
			wanted = true
		case ',', '\r', '\n':
			wanted = true
		}
	}
	if !wanted {
		return dst
	}
	// From the back, so that it can be done in place.
	from := len(dst)
	dst = slices.Grow(dst, quotes+2)[:from+quotes+2]
	to := len(dst) - 1
	dst[to] = '"'
	for from--; from >= start; from-- {
		to--
		dst[to] = dst[from]
		if dst[from] == '"' {
			to--
			dst[to] = '"'
		}
	}
	dst[start] = '"'
	return dst
}
