package decode

import (
	"busloom/frame"
	"busloom/schema"
)

// Tracker does what needs the order of frames: it follows counters and counts
// what became of the records. It belongs to one goroutine.
type Tracker struct {
	plan    *Plan
	totals  Totals
	record  int64                      // number of the last record
	last    []counterState             // by message
	senders []map[uint32]*counterState // by message, for identifiers with open fields
}

type counterState struct {
	seen    bool
	raw     uint64
	next    uint64 // what follows raw
	repeats uint64
}

// Totals is the accounting of a run.
type Totals struct {
	Classes   [NumClasses]int64 // by Class; index 0 is unused
	Malformed int64             // records that the source rejected
	Short     int64             // decoded frames shorter than described
	Long      int64             // decoded frames longer than described
	Messages  []MessageTotals   // by Message.Index
	// Undescribed counts the frames of identifiers that nothing describes.
	Undescribed map[FrameID]int64
	// Unmapped counts the frames of interfaces that no bus is tied to.
	Unmapped map[string]int64
}

// FrameID names an identifier on an interface.
type FrameID struct {
	Interface string
	ID        uint32
	Extended  bool
}

// MessageTotals count the frames of one message.
type MessageTotals struct {
	Frames           int64
	Short, Long      int64
	ChecksumBad      int64
	CounterBad       int64 // values outside the counter's range
	CounterRepeated  int64
	CounterLost      int64 // gaps
	LostSteps        int64 // steps missing in the gaps
	UnknownSelection int64
}

// NewTracker starts with nothing seen.
func NewTracker(p *Plan) *Tracker {
	return &Tracker{
		plan: p, last: make([]counterState, len(p.Messages)), senders: make([]map[uint32]*counterState, len(p.Messages)),
		totals: Totals{Messages: make([]MessageTotals, len(p.Messages)), Undescribed: map[FrameID]int64{}, Unmapped: map[string]int64{}},
	}
}

// Totals is the accounting so far.
func (t *Tracker) Totals() *Totals { return &t.totals }

// Observe takes the next record: it judges its counter and counts it.
func (t *Tracker) Observe(r *Record) {
	if r.Frame.Record == 1 && t.record > 0 {
		// Record numbers begin anew with each file: what its counters were
		// before says nothing.
		clear(t.last)
		clear(t.senders)
	}
	t.record = r.Frame.Record
	t.totals.Classes[r.Class]++
	m := r.Message
	switch r.Class {
	case Decoded:
	case Undescribed:
		t.totals.Undescribed[FrameID{t.plan.Interface(r.Frame.Bus), r.Frame.ID, r.Frame.Has(frame.Extended)}]++
		return
	case Unmapped:
		t.totals.Unmapped[t.plan.Interface(r.Frame.Bus)]++
		return
	default:
		return
	}
	n := &t.totals.Messages[m.Index]
	n.Frames++
	if r.Fit != FitExact {
		if r.Fit == FitShort {
			t.totals.Short++
			n.Short++
		} else {
			t.totals.Long++
			n.Long++
		}
	}
	if r.Checksum == Bad {
		n.ChecksumBad++
	}
	if r.UnknownSelection {
		n.UnknownSelection++
	}
	if r.Counter != Unchecked {
		t.judge(r, m, n)
	}
}

// judge compares a counter with the sender's last one.
func (t *Tracker) judge(r *Record, m *Message, n *MessageTotals) {
	state := &t.last[m.Index]
	if len(m.Model.ID.Fields) > 0 {
		state = t.sender(m.Index, r.Frame.ID)
	}
	rule := m.rule
	raw := r.CounterRaw
	if state.seen && raw == state.next {
		state.follow(raw, rule)
		state.repeats = 0
		r.Counter = Good
		return
	}
	if raw < rule.Low || raw > rule.High || (raw-rule.Low)%rule.Step != 0 {
		// What isn't a count can't be followed: the next one starts anew.
		r.Counter = Bad
		n.CounterBad++
		state.seen = false
		return
	}
	if !state.seen {
		*state = counterState{seen: true}
		state.follow(raw, rule)
		r.Counter = First
		return
	}
	states := (rule.High-rule.Low)/rule.Step + 1
	delta := ((raw-rule.Low)/rule.Step + states - (state.raw-rule.Low)/rule.Step) % states
	state.follow(raw, rule)
	r.Counter = Good
	switch {
	case delta == 0:
		if state.repeats++; state.repeats > rule.AllowRepeated {
			r.Counter = Repeated
			n.CounterRepeated++
		}
	default:
		state.repeats = 0
		r.Steps = delta - 1
		if r.Steps > rule.AllowLost {
			r.Counter = Lost
			n.CounterLost++
			n.LostSteps += int64(r.Steps)
		}
	}
}

// follow notes a count and what is to come after it.
func (s *counterState) follow(raw uint64, rule *schema.CounterRule) {
	s.raw, s.next = raw, raw+rule.Step
	if raw >= rule.High {
		s.next = rule.Low
	}
}

// sender is the state of one identifier of a family.
func (t *Tracker) sender(message int, id uint32) *counterState {
	if t.senders[message] == nil {
		t.senders[message] = map[uint32]*counterState{}
	}
	state := t.senders[message][id]
	if state == nil {
		state = &counterState{}
		t.senders[message][id] = state
	}
	return state
}

// Sum is the number of records that are accounted for.
func (t *Totals) Sum() int64 {
	sum := t.Malformed
	for _, n := range t.Classes {
		sum += n
	}
	return sum
}

// ProtectionFailures is the number of failed checks of checksums and counters.
func (t *Totals) ProtectionFailures() int64 {
	sum := int64(0)
	for i := range t.Messages {
		m := &t.Messages[i]
		sum += m.ChecksumBad + m.CounterBad + m.CounterRepeated + m.CounterLost
	}
	return sum
}
