package output

import (
	"slices"

	"busloom/decode"
	"busloom/schema"
)

// summary gathers what a capture holds and writes it at the end: for each
// message its count and periods, for each signal its values' range, greatest
// step, codes and states.
type summary struct {
	plan     *decode.Plan
	json     bool
	messages []messageSummary // by Message.Index
	signals  []signalSummary  // by Signal.Index
	first    int64
	last     int64
	any      bool
}

type messageSummary struct {
	count            int64
	first, last      int64
	shortest         int64 // ns between frames
	longest          int64
	periods          int64
	checksum         int64
	counter          int64 // repeated, out of range
	lost             int64 // lost steps
	short, long      int64
	unknownSelection int64
}

// signalSummary keeps copies of values: they hold all that is needed to print
// them again.
type signalSummary struct {
	numbers      int64
	min, max     decode.Value
	minAt, maxAt int64
	// step is the greatest distance between two numbers in a row: from -> to.
	from, to decode.Value
	stepAt   int64
	steps    bool
	before   decode.Value
	had      bool

	words   []int64 // by word
	codes   []int64 // by code
	unknown int64
	missing int64
	nothing int64 // not finite, beyond the curve
	texts   int64
}

func newSummary(plan *decode.Plan, asJSON bool) *summary {
	s := &summary{plan: plan, json: asJSON, messages: make([]messageSummary, len(plan.Messages)), signals: make([]signalSummary, len(plan.Signals))}
	for i, x := range plan.Signals {
		s.signals[i].words = make([]int64, len(x.Words))
		if x.Model != nil {
			s.signals[i].codes = make([]int64, len(x.Model.Codes))
		}
	}
	return s
}

func (s *summary) Header(dst []byte) []byte { return dst }

func (s *summary) Record(dst []byte, r *decode.Record) []byte {
	t := r.Frame.Time
	if !s.any {
		s.first, s.last, s.any = t, t, true
	}
	s.first, s.last = min(s.first, t), max(s.last, t)
	if r.Class != decode.Decoded {
		return dst
	}
	s.messages[r.Message.Index].add(r, t)
	for i := range r.Values {
		v := &r.Values[i]
		s.signals[v.Signal.Index].add(v, t)
	}
	return dst
}

func (m *messageSummary) add(r *decode.Record, t int64) {
	if m.count > 0 {
		d := t - m.last
		if m.periods == 0 || d < m.shortest {
			m.shortest = d
		}
		if m.periods == 0 || d > m.longest {
			m.longest = d
		}
		m.periods++
	} else {
		m.first = t
	}
	m.last = t
	m.count++
	if r.Checksum == decode.Bad {
		m.checksum++
	}
	switch r.Counter {
	case decode.Bad, decode.Repeated:
		m.counter++
	case decode.Lost:
		m.lost += int64(r.Steps)
	}
	switch r.Fit {
	case decode.FitShort:
		m.short++
	case decode.FitLong:
		m.long++
	}
	if r.UnknownSelection {
		m.unknownSelection++
	}
}

func (x *signalSummary) add(v *decode.Value, t int64) {
	switch v.State {
	case decode.Number:
		x.number(v, t)
		return
	case decode.Word:
		x.words[v.Index]++
	case decode.Coded:
		x.codes[v.Index]++
	case decode.Unknown:
		x.unknown++
	case decode.Missing:
		x.missing++
	case decode.Text, decode.Octets:
		x.texts++
	default:
		x.nothing++
	}
	// A step is between neighbours: a code in between breaks it off.
	x.had = false
}

func (x *signalSummary) number(v *decode.Value, t int64) {
	s := v.Signal
	if x.numbers == 0 {
		x.min, x.minAt, x.max, x.maxAt = *v, t, *v, t
	} else if v.Raw != x.before.Raw || !x.had {
		if s.Compare(v, &x.min) < 0 {
			x.min, x.minAt = *v, t
		} else if s.Compare(v, &x.max) > 0 {
			x.max, x.maxAt = *v, t
		}
	}
	x.numbers++
	if x.had && v.Raw != x.before.Raw && !isProtection(s) {
		if !x.steps || s.CompareDistance(v, &x.before, &x.to, &x.from) > 0 {
			x.from, x.to, x.stepAt, x.steps = x.before, *v, t, true
		}
	}
	x.before, x.had = *v, true
}

// Trailer writes it all.
func (s *summary) Trailer(dst []byte) []byte {
	if s.json {
		return s.appendJSON(dst)
	}
	return s.appendText(dst)
}

// shown lists the wanted messages that came, by bus and identifier, and those
// that never came.
func (s *summary) shown() (seen, never []*decode.Message) {
	for _, m := range s.plan.Messages {
		if !m.Wanted {
			continue
		}
		if s.messages[m.Index].count > 0 {
			seen = append(seen, m)
		} else {
			never = append(never, m)
		}
	}
	slices.SortStableFunc(seen, func(a, b *decode.Message) int {
		if a.Bus != b.Bus {
			return busOrder(s.plan, a.Bus) - busOrder(s.plan, b.Bus)
		}
		if x, y := a.Model.ID, b.Model.ID; x.Extended != y.Extended {
			if y.Extended {
				return -1
			}
			return 1
		}
		return int(int64(a.Model.ID.Send) - int64(b.Model.ID.Send))
	})
	return seen, never
}

func busOrder(p *decode.Plan, bus string) int {
	for i, b := range p.Network.Buses {
		if b.Name == bus {
			return i
		}
	}
	return len(p.Network.Buses)
}

// isProtection reports whether a signal is a counter, a checksum or a constant
// beside them: its values say nothing of the vehicle.
func isProtection(s *decode.Signal) bool {
	return s.Model != nil && (s.Model.Kind == schema.Counter || s.Model.Kind == schema.Checksum || s.Model.Fixed != nil)
}
