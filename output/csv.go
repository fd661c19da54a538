package output

import (
	"strings"

	"busloom/decode"
)

// csvWriter writes a row for each value: time, bus, message, signal, value,
// unit, word, code, check. Everything that is the same in each row of a signal
// is prepared.
type csvWriter struct {
	clock clock
	rows  []csvRow // by Signal.Index
	time  []byte
	check []byte
}

// csvRow is what a signal's rows are made of. A row is time, head, number and
// numberTail, or time and one of the others.
type csvRow struct {
	head   []byte   // ,bus,message,signal,
	number []byte   // ,unit,,, behind the number
	words  [][]byte // head and all that follows, by word; without check
	codes  [][]byte // by code
}

const csvEnd = "\r\n"

func newCSV(plan *decode.Plan) *csvWriter {
	w := &csvWriter{rows: make([]csvRow, len(plan.Signals))}
	for i, s := range plan.Signals {
		row := &w.rows[i]
		head := "," + csvField(s.Message.Bus) + "," + csvField(s.Message.Model.Name) + "," + csvField(s.Path) + ","
		unit := csvField(s.Unit.Symbol)
		row.head = []byte(head)
		row.number = []byte("," + unit + ",,,")
		for _, word := range s.Words {
			row.words = append(row.words, []byte(head+",,"+csvField(word)+",,"))
		}
		if s.Model != nil {
			for _, c := range s.Model.Codes {
				row.codes = append(row.codes, []byte(head+","+unit+",,"+csvField(decode.CodeWord(c))+","))
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

func (w *csvWriter) Header(dst []byte) []byte {
	return append(dst, "time,bus,message,signal,value,unit,word,code,check"+csvEnd...)
}

func (w *csvWriter) Trailer(dst []byte) []byte { return dst }

func (w *csvWriter) Record(dst []byte, r *decode.Record) []byte {
	if len(r.Values) == 0 {
		return dst
	}
	w.time = w.clock.append(w.time[:0], r.Frame.Time)
	w.check = append(appendCheck(w.check[:0], r), csvEnd...)
	for i := range r.Values {
		v := &r.Values[i]
		row := &w.rows[v.Signal.Index]
		dst = append(dst, w.time...)
		switch v.State {
		case decode.Number:
			dst = append(dst, row.head...)
			dst = v.Signal.AppendNumber(dst, v)
			dst = append(dst, row.number...)
		case decode.Word:
			dst = append(dst, row.words[v.Index]...)
		case decode.Coded:
			dst = append(dst, row.codes[v.Index]...)
		case decode.Text, decode.Octets:
			dst = append(append(dst, row.head...), ",,"...)
			start := len(dst)
			dst = v.Signal.AppendText(dst, v, r.Frame)
			dst = append(quoteTail(dst, start), ",,"...)
		default:
			dst = append(append(dst, row.head...), ",,,"...)
			dst = append(v.Signal.AppendText(dst, v, r.Frame), ',')
		}
		dst = append(dst, w.check...)
	}
	return dst
}

// quoteTail quotes what was appended from start on, where RFC 4180 wants it.
func quoteTail(dst []byte, start int) []byte {
	text := string(dst[start:])
	if quoted := csvField(text); len(quoted) != len(text) {
		return append(dst[:start], quoted...)
	}
	return dst
}
