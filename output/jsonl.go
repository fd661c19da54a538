package output

import (
	"encoding/json"
	"fmt"
	"strconv"

	"busloom/decode"
	"busloom/frame"
)

// jsonLines writes one JSON object for each frame.
type jsonLines struct {
	plan  *decode.Plan
	all   bool
	heads [][]byte // by Message.Index: ,"bus":...,"message":...
	names [][]byte // by Signal.Index: {"name":...
	units [][]byte // by Signal.Index: ,"unit":...}
	clock clock
	text  []byte
}

func newJSONLines(plan *decode.Plan, all bool) *jsonLines {
	w := &jsonLines{plan: plan, all: all}
	for _, m := range plan.Messages {
		w.heads = append(w.heads, []byte(`,"bus":`+jsonText(m.Bus)+`,"message":`+jsonText(m.Model.Name)))
	}
	for _, s := range plan.Signals {
		w.names = append(w.names, []byte(`{"name":`+jsonText(s.Path)))
		end := "}"
		if s.Unit.Symbol != "" {
			end = `,"unit":` + jsonText(s.Unit.Symbol) + "}"
		}
		w.units = append(w.units, []byte(end))
	}
	return w
}

// jsonText quotes a text for JSON.
func jsonText(text string) string {
	b, err := json.Marshal(text)
	if err != nil {
		return `""` // a string can always be written
	}
	return string(b)
}

func (w *jsonLines) Header(dst []byte) []byte  { return dst }
func (w *jsonLines) Trailer(dst []byte) []byte { return dst }

func (w *jsonLines) Record(dst []byte, r *decode.Record) []byte {
	switch r.Class {
	case decode.Decoded:
		if len(r.Values) == 0 && !r.Message.Wanted {
			return dst
		}
		return w.decoded(dst, r)
	case decode.ErrorFrame:
		dst = w.open(dst, r)
		dst = append(dst, `,"error":`...)
		return append(append(dst, jsonText(r.Frame.Report().String())...), "}\n"...)
	}
	if !w.all {
		return dst
	}
	dst = w.open(dst, r)
	dst = append(dst, `,"class":`...)
	dst = append(dst, jsonText(className(r.Class))...)
	dst = append(dst, `,"id":"`...)
	dst = appendID(dst, r.Frame)
	if r.Class != decode.RemoteFrame {
		dst = append(dst, `","data":"`...)
		dst = appendData(dst, r.Frame)
	}
	return append(dst, "\"}\n"...)
}

func (w *jsonLines) open(dst []byte, r *decode.Record) []byte {
	dst = append(dst, `{"time":`...)
	dst = w.clock.append(dst, r.Frame.Time)
	dst = append(dst, `,"interface":`...)
	return append(dst, jsonText(w.plan.Interface(r.Frame.Bus))...)
}

func (w *jsonLines) decoded(dst []byte, r *decode.Record) []byte {
	dst = append(dst, `{"time":`...)
	dst = w.clock.append(dst, r.Frame.Time)
	dst = append(dst, w.heads[r.Message.Index]...)
	dst = append(dst, `,"signals":[`...)
	for i := range r.Values {
		if i > 0 {
			dst = append(dst, ',')
		}
		v := &r.Values[i]
		s := v.Signal
		dst = append(dst, w.names[s.Index]...)
		switch v.State {
		case decode.Number:
			dst = append(dst, `,"value":`...)
			dst = s.AppendNumber(dst, v)
		case decode.Word:
			dst = append(append(dst, `,"word":`...), jsonText(s.Text(v))...)
		case decode.Coded:
			dst = append(append(dst, `,"code":`...), jsonText(s.Text(v))...)
		case decode.Text:
			w.text = s.AppendString(w.text[:0], r.Frame)
			dst = append(append(dst, `,"text":`...), jsonText(string(w.text))...)
		case decode.Octets:
			dst = append(dst, `,"bytes":"`...)
			dst = append(s.AppendText(dst, v, r.Frame), '"')
		default:
			dst = append(dst, `,"code":"`...)
			dst = append(s.AppendText(dst, v, r.Frame), '"')
		}
		dst = append(dst, w.units[s.Index]...)
	}
	dst = append(dst, ']')
	if check := appendCheck(nil, r); len(check) > 0 {
		dst = append(append(dst, `,"check":`...), jsonText(string(check))...)
	}
	return append(dst, "}\n"...)
}

var classNames = [decode.NumClasses]string{
	decode.Decoded: "decoded", decode.Undescribed: "undescribed", decode.RemoteFrame: "remote",
	decode.ErrorFrame: "error frame", decode.Unmapped: "unmapped",
}

// className is the word for a class in outputs and in the accounting.
func className(c decode.Class) string { return classNames[c] }

func appendID(dst []byte, f *frame.Frame) []byte {
	if f.Has(frame.Extended) {
		return fmt.Appendf(dst, "%08X", f.ID)
	}
	return fmt.Appendf(dst, "%03X", f.ID)
}

func appendData(dst []byte, f *frame.Frame) []byte {
	for _, b := range f.Payload() {
		if b < 16 {
			dst = append(dst, '0')
		}
		dst = append(dst, upper(strconv.AppendUint(nil, uint64(b), 16))...)
	}
	return dst
}

func upper(hex []byte) []byte {
	for i, c := range hex {
		if c >= 'a' {
			hex[i] = c - 'a' + 'A'
		}
	}
	return hex
}
