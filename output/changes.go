package output

import (
	"bytes"

	"busloom/decode"
)

// changes lets through only values that differ from the signal's last one, and
// records whose protection failed. Counters and checksums don't count. Identifiers of a family have last values of
// their own.
type changes struct {
	to     Formatter
	last   []lastValue              // by Signal.Index
	family []map[uint32][]lastValue // by Message.Index; nil without open fields
	record decode.Record
	text   []byte
}

type lastValue struct {
	state decode.State
	raw   uint64
	text  []byte
}

func newChanges(plan *decode.Plan, to Formatter) *changes {
	c := &changes{to: to, last: make([]lastValue, len(plan.Signals)), family: make([]map[uint32][]lastValue, len(plan.Messages))}
	for i, m := range plan.Messages {
		if isFamily(m) {
			c.family[i] = map[uint32][]lastValue{}
		}
	}
	return c
}

// isFamily reports whether frames with several identifiers are the message.
func isFamily(m *decode.Message) bool {
	for _, f := range m.Model.ID.Fields {
		if f.Open {
			return true
		}
	}
	return false
}

// lastOf gives the last values of a message's sender, by place among the
// message's signals.
func (c *changes) lastOf(m *decode.Message, id uint32) []lastValue {
	if len(m.Signals) == 0 {
		return nil
	}
	if c.family[m.Index] == nil {
		first := m.Signals[0].Index
		return c.last[first : first+len(m.Signals)]
	}
	last := c.family[m.Index][id]
	if last == nil {
		last = make([]lastValue, len(m.Signals))
		c.family[m.Index][id] = last
	}
	return last
}

func (c *changes) Header(dst []byte) []byte  { return c.to.Header(dst) }
func (c *changes) Trailer(dst []byte) []byte { return c.to.Trailer(dst) }

func (c *changes) Record(dst []byte, r *decode.Record) []byte {
	if r.Class != decode.Decoded {
		return c.to.Record(dst, r)
	}
	values, changed := c.record.Values[:0], false
	lasts := c.lastOf(r.Message, r.Frame.ID)
	for i := range r.Values {
		v := &r.Values[i]
		last := &lasts[v.Signal.Index-r.Message.Signals[0].Index]
		same := last.state == v.State && last.raw == v.Raw
		if isProtection(v.Signal) {
			continue // it changes by its nature
		}
		if v.State == decode.Text || v.State == decode.Octets {
			c.text = v.Signal.AppendText(c.text[:0], v, r.Frame)
			same = last.state == v.State && bytes.Equal(last.text, c.text)
			last.text = append(last.text[:0], c.text...)
		}
		last.state, last.raw = v.State, v.Raw
		// The fields of an identifier say whose values the others are.
		if !same || v.Signal.Model == nil {
			values = append(values, *v)
		}
		changed = changed || !same
	}
	c.record = *r
	c.record.Values = values
	if !changed && !wrong(r) {
		return dst
	}
	return c.to.Record(dst, &c.record)
}
