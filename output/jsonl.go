package output

import (
	"fmt"

	"busloom/decode"
	"busloom/frame"
)

// jsonLines writes one JSON object for each frame.
type jsonLines struct {
	*jsonParts
	clock clock
	text  []byte
}

// jsonParts are prepared once.
type jsonParts struct {
	plan    *decode.Plan
	all     bool
	heads   [][]byte     // by Message.Index: ,"bus":...,"message":...,"signals":[
	signals []jsonPieces // by Signal.Index
}

// jsonPieces are what a signal's object is made of, with the comma in front.
type jsonPieces struct {
	name  []byte   // ,{"name":"..."
	unit  []byte   // ,"unit":"..."}
	words [][]byte // the whole object, by word
	codes [][]byte // the whole object, by code
}

func newJSONLines(plan *decode.Plan, all bool) *jsonLines {
	p := &jsonParts{plan: plan, all: all}
	for _, m := range plan.Messages {
		head := appendJSONText([]byte(`,"bus":`), m.Bus)
		head = appendJSONText(append(head, `,"message":`...), m.Model.Name)
		p.heads = append(p.heads, append(head, `,"signals":[`...))
	}
	for _, s := range plan.Signals {
		x := jsonPieces{name: appendJSONText([]byte(`,{"name":`), s.Path), unit: []byte("}")}
		if s.Unit.Symbol != "" {
			x.unit = append(appendJSONText([]byte(`,"unit":`), s.Unit.Symbol), '}')
		}
		object := func(key, word string) []byte {
			dst := append(append([]byte(nil), x.name...), key...)
			return append(appendJSONText(dst, word), x.unit...)
		}
		for _, word := range s.Words {
			x.words = append(x.words, object(`,"word":`, word))
		}
		if s.Model != nil {
			for _, c := range s.Model.Codes {
				x.codes = append(x.codes, object(`,"code":`, decode.CodeWord(c)))
			}
		}
		p.signals = append(p.signals, x)
	}
	return &jsonLines{jsonParts: p}
}

// Fork implements Forker: the prepared parts are shared.
func (w *jsonLines) Fork() Formatter { return &jsonLines{jsonParts: w.jsonParts} }

func (w *jsonLines) Header(dst []byte) []byte  { return dst }
func (w *jsonLines) Trailer(dst []byte) []byte { return dst }

func (w *jsonLines) Record(dst []byte, r *decode.Record) []byte {
	switch r.Class {
	case decode.Decoded:
		if idle(r) {
			return dst
		}
		return w.decoded(dst, r)
	case decode.ErrorFrame:
		return appendJSONReport(w.open(dst, r), r.Frame)
	}
	if !w.all {
		return dst
	}
	dst = w.open(dst, r)
	dst = append(dst, `,"class":`...)
	dst = appendJSONText(dst, className(r.Class))
	dst = append(dst, `,"id":"`...)
	dst = appendID(dst, r.Frame)
	if r.Class != decode.RemoteFrame {
		dst = append(dst, `","data":"`...)
		dst = appendData(dst, r.Frame)
	}
	return append(dst, "\"}\n"...)
}

// open begins the object of a frame that isn't decoded.
func (w *jsonLines) open(dst []byte, r *decode.Record) []byte {
	dst = append(dst, `{"time":`...)
	dst = w.clock.append(dst, r.Frame.Time)
	dst = append(dst, `,"interface":`...)
	return appendJSONText(dst, w.plan.Interface(r.Frame.Bus))
}

func (w *jsonLines) decoded(dst []byte, r *decode.Record) []byte {
	dst = append(dst, `{"time":`...)
	dst = w.clock.append(dst, r.Frame.Time)
	dst = append(dst, w.heads[r.Message.Index]...)
	first := len(dst)
	for i := range r.Values {
		v := &r.Values[i]
		s := v.Signal
		x := &w.signals[s.Index]
		switch v.State {
		case decode.Word:
			dst = append(dst, x.words[v.Index]...)
			continue
		case decode.Coded:
			dst = append(dst, x.codes[v.Index]...)
			continue
		}
		dst = append(dst, x.name...)
		switch v.State {
		case decode.Number:
			dst = append(dst, `,"value":`...)
			dst = s.AppendNumber(dst, v)
		case decode.Text:
			w.text = s.AppendString(w.text[:0], r.Frame)
			dst = appendJSONText(append(dst, `,"text":`...), w.text)
		case decode.Octets:
			dst = append(dst, `,"bytes":"`...)
			dst = append(s.AppendText(dst, v, r.Frame), '"')
		default:
			dst = append(dst, `,"code":"`...)
			dst = append(s.AppendText(dst, v, r.Frame), '"')
		}
		dst = append(dst, x.unit...)
	}
	if len(dst) > first {
		// The first object has no comma in front.
		dst = append(dst[:first], dst[first+1:]...)
	}
	dst = append(dst, ']')
	if wrong(r) {
		dst = append(dst, `,"check":["`...)
		dst = append(appendCheck(dst, r, `","`), `"]`...)
	}
	return append(dst, "}\n"...)
}

// appendJSONReport ends the object of an error frame with what it says.
func appendJSONReport(dst []byte, f *frame.Frame) []byte {
	list := func(key string, texts []string) {
		dst = append(append(append(dst, `,"`...), key...), `":[`...)
		for i, text := range texts {
			if i > 0 {
				dst = append(dst, ',')
			}
			dst = appendJSONText(dst, text)
		}
		dst = append(dst, ']')
	}
	report := f.Report()
	list("error", report.Class)
	if len(report.Detail) > 0 {
		list("detail", report.Detail)
	}
	if report.Counters {
		dst = fmt.Appendf(dst, `,"transmitErrors":%d,"receiveErrors":%d`, report.TXErrors, report.RXErrors)
	}
	return append(dst, "}\n"...)
}

// appendJSONText appends a string of RFC 8259; text is valid UTF-8.
func appendJSONText[T string | []byte](dst []byte, text T) []byte {
	dst = append(dst, '"')
	for i := range len(text) {
		switch c := text[i]; {
		case c == '"', c == '\\':
			dst = append(dst, '\\', c)
		case c < ' ':
			dst = append(dst, `\u00`...)
			dst = append(dst, hexDigits[c>>4], hexDigits[c&15])
		default:
			dst = append(dst, c)
		}
	}
	return append(dst, '"')
}

var classNames = [decode.NumClasses]string{
	decode.Decoded: "decoded", decode.Undescribed: "undescribed", decode.RemoteFrame: "remote",
	decode.ErrorFrame: "error frame", decode.Unmapped: "unmapped",
}

// className is the word for a class in outputs and in the accounting.
func className(c decode.Class) string { return classNames[c] }

const hexDigits = "0123456789ABCDEF"

// appendID appends an identifier as captures show it: three digits for 11
// bits, eight for 29.
func appendID(dst []byte, f *frame.Frame) []byte {
	return append(dst, idDigits(f.ID, f.Has(frame.Extended))...)
}

func idDigits(id uint32, extended bool) string {
	if extended {
		return fmt.Sprintf("%08X", id)
	}
	return fmt.Sprintf("%03X", id)
}

func appendData(dst []byte, f *frame.Frame) []byte {
	for _, b := range f.Payload() {
		dst = append(dst, hexDigits[b>>4], hexDigits[b&15])
	}
	return dst
}
