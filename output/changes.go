package output

import (
	"bytes"

	"busloom/decode"
)

// changes lets through only values that differ from the signal's last one, and
// records whose protection failed.
type changes struct {
	to     Formatter
	last   []lastValue // by Signal.Index
	record decode.Record
	text   []byte
}

type lastValue struct {
	state decode.State
	raw   uint64
	text  []byte
}

func newChanges(plan *decode.Plan, to Formatter) *changes {
	return &changes{to: to, last: make([]lastValue, len(plan.Signals))}
}

func (c *changes) Header(dst []byte) []byte  { return c.to.Header(dst) }
func (c *changes) Trailer(dst []byte) []byte { return c.to.Trailer(dst) }

func (c *changes) Record(dst []byte, r *decode.Record) []byte {
	if r.Class != decode.Decoded {
		return c.to.Record(dst, r)
	}
	values := c.record.Values[:0]
	for i := range r.Values {
		v := &r.Values[i]
		last := &c.last[v.Signal.Index]
		same := last.state == v.State && last.raw == v.Raw
		if v.State == decode.Text || v.State == decode.Octets {
			c.text = v.Signal.AppendText(c.text[:0], v, r.Frame)
			same = last.state == v.State && bytes.Equal(last.text, c.text)
			last.text = append(last.text[:0], c.text...)
		}
		last.state, last.raw = v.State, v.Raw
		if !same {
			values = append(values, *v)
		}
	}
	c.record = *r
	c.record.Values = values
	if len(values) == 0 && !wrong(r) {
		return dst
	}
	return c.to.Record(dst, &c.record)
}
