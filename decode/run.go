package decode

import (
	"encoding/binary"
	"math"
	mathbits "math/bits"

	"busloom/bits"
	"busloom/frame"
	"busloom/schema"
)

// Decode makes of a frame what the plan says. It keeps no state and allocates
// nothing once the record has room; several goroutines may run it, each with
// its own record. The record refers to the frame.
func (p *Plan) Decode(f *frame.Frame, r *Record) {
	r.Frame, r.Message = f, nil
	r.Values = r.Values[:0]
	r.Fit, r.Checksum, r.Counter = FitExact, Unchecked, Unchecked
	r.UnknownSelection, r.Steps = false, 0
	if f.Flags&frame.Error != 0 {
		r.Class = ErrorFrame
		return
	}
	var bus *lookup
	if int(f.Bus) < len(p.bound) {
		bus = p.bound[f.Bus]
	}
	if bus == nil {
		r.Class = Unmapped
		return
	}
	m := bus.find(f.ID, f.Flags&frame.Extended != 0)
	if f.Flags&frame.Remote != 0 {
		r.Class, r.Message = RemoteFrame, m
		return
	}
	if m == nil {
		r.Class = Undescribed
		return
	}
	r.Class, r.Message = Decoded, m
	length := int(f.Len)
	if length != m.size {
		if length < m.size {
			r.Fit = FitShort
		} else if !m.atLeast {
			r.Fit = FitLong
		}
	}
	if cap(r.Values) < p.widest {
		r.Values = make([]Value, 0, p.widest)
	}
	word := binary.LittleEndian.Uint64(f.Data[:8])
	c := run{frame: f, record: r, meanings: p.meanings, le: word, be: mathbits.ReverseBytes64(word), length: uint8(length)}
	values := r.Values[:cap(r.Values)]
	n := c.steps(m.program, values, 0)
	for _, s := range m.ids {
		raw := uint64(f.ID) >> s.idShift & (1<<s.width - 1)
		values[n] = Value{Signal: s, Raw: raw, Num: int64(raw), State: Number}
		n++
	}
	r.Values = values[:n]
	if m.checksum != nil {
		r.Checksum = m.checksum.check(f)
	}
	if m.counter != nil && m.counter.Need() <= length {
		r.Counter, r.CounterRaw = First, m.counter.Raw(f.Data[:])
	}
}

// run is what the steps of one frame need.
type run struct {
	frame    *frame.Frame
	record   *Record
	meanings []meaning
	le, be   uint64 // the first 8 bytes
	length   uint8
}

// steps runs a program; the values go into values from n on. It returns the
// number of values then.
func (c *run) steps(program []step, values []Value, n int) int {
	words := [2]uint64{c.le, c.be}
	meanings, length := c.meanings, c.length
	for i := range program {
		st := &program[i]
		if st.op == opSelect {
			n = c.choose(st, values, n)
			continue
		}
		v := &values[n]
		n++
		v.Signal = st.signal
		if st.need > length {
			v.Raw, v.Num, v.State, v.Index = 0, 0, Missing, 0
			continue
		}
		word := words[st.from&1]
		if st.from == fromElsewhere {
			word = st.far.extract.Raw(c.frame.Data[:])
		}
		raw := word << (st.left & 63) >> (st.right & 63)
		v.Raw = raw
		switch st.op {
		case opPlain:
			m := meanings[st.table+uint32(uint8(raw)&st.mask)]
			num := (int64(raw^st.sign)-int64(st.sign))*st.mul + st.add
			if raw-st.coded <= st.span {
				if m = st.signal.search(raw); m.state() != Number {
					num = 0
				}
			}
			v.Num, v.State, v.Index = num, m.state(), m.index()
		case opText:
			v.Raw, v.Num, v.State, v.Index = 0, 0, Text, 0
		case opOctets:
			v.Raw, v.Num, v.State, v.Index = 0, 0, Octets, 0
		default:
			st.signal.general(v)
		}
	}
	return n
}

func (c *run) choose(st *step, values []Value, n int) int {
	if st.need > c.length {
		return n
	}
	choose := st.far.choose
	program, listed := choose.program(choose.selector.Raw(c.frame.Data[:]))
	if !listed && choose.unknown {
		c.record.UnknownSelection = true
	}
	return c.steps(program, values, n)
}

// general fills in a value of any kind from its raw bits.
func (s *Signal) general(v *Value) {
	m := s.search(v.Raw)
	v.Num, v.State, v.Index = 0, m.state(), m.index()
	if m.state() != Number {
		return
	}
	if s.kind == schema.Float {
		if x := bits.Float(v.Raw, s.width); math.IsNaN(x) || math.IsInf(x, 0) {
			v.State = NotFinite
		}
		return
	}
	x, ok := s.integer(v.Raw)
	if !ok {
		v.State = Unknown
		return
	}
	switch {
	case s.curve != nil:
		piece := s.curve.find(x)
		if piece.none {
			v.State = NoValue
			return
		}
		v.Num = piece.of(x)
	case s.round != nil:
		if s.round.r == 1 {
			v.Num = x*s.round.p + s.round.q
		} else {
			v.Num = s.round.of(x)
		}
	case s.pieces != nil:
		if s.pieceOf(s.bigInteger(v.Raw)).digits < 0 {
			v.State = NoValue
		}
	}
}
