package output

import (
	"cmp"
	"maps"
	"slices"
	"strings"

	"busloom/decode"
	"busloom/frame"
	"busloom/schema"
)

// summary gathers what a capture holds and writes it at the end: for each
// message its count and periods, for each signal its values' range, greatest
// step, codes and states, and what wasn't decoded.
type summary struct {
	plan     *decode.Plan
	json     bool
	messages []messageSummary // by Message.Index
	signals  []signalSummary  // by Signal.Index
	first    int64
	last     int64
	any      bool

	classes     [decode.NumClasses]int64
	undescribed map[foreignID]int64
	errors      map[errorReport]int64
}

// foreignID is an identifier that nothing describes.
type foreignID struct {
	bus      uint16
	extended bool
	id       uint32
}

// errorReport is what an interface said, without its counters.
type errorReport struct {
	bus  uint16
	text string
}

type messageSummary struct {
	count            int64
	last             int64            // time of the last frame
	lasts            map[uint32]int64 // by identifier; nil unless a family
	shortest         int64            // ns between frames of one identifier
	longest          int64
	total            int64
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
	beforeID uint32 // whose it was: steps are within one identifier
	had      bool

	words   []int64 // by word
	codes   []int64 // by code
	unknown int64
	missing int64
	nothing int64 // not finite, beyond the curve
	texts   int64
}

func newSummary(plan *decode.Plan, asJSON bool) *summary {
	s := &summary{
		plan: plan, json: asJSON, messages: make([]messageSummary, len(plan.Messages)), signals: make([]signalSummary, len(plan.Signals)),
		undescribed: map[foreignID]int64{}, errors: map[errorReport]int64{},
	}
	for i, m := range plan.Messages {
		if isFamily(m) {
			s.messages[i].lasts = map[uint32]int64{}
		}
	}
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
	s.classes[r.Class]++
	switch r.Class {
	case decode.Decoded:
	case decode.Undescribed:
		s.undescribed[foreignID{r.Frame.Bus, r.Frame.Has(frame.Extended), r.Frame.ID}]++
		return dst
	case decode.ErrorFrame:
		report := r.Frame.Report()
		report.Counters = false
		s.errors[errorReport{r.Frame.Bus, report.String()}]++
		return dst
	default:
		return dst
	}
	s.messages[r.Message.Index].add(r, t)
	for i := range r.Values {
		v := &r.Values[i]
		s.signals[v.Signal.Index].add(v, t, r.Frame.ID)
	}
	return dst
}

func (m *messageSummary) add(r *decode.Record, t int64) {
	last, seen := m.last, m.count > 0
	if m.lasts != nil {
		last, seen = m.lasts[r.Frame.ID]
		m.lasts[r.Frame.ID] = t
	}
	if seen {
		d := t - last
		if m.periods == 0 || d < m.shortest {
			m.shortest = d
		}
		if m.periods == 0 || d > m.longest {
			m.longest = d
		}
		m.total += d
		m.periods++
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

func (x *signalSummary) add(v *decode.Value, t int64, id uint32) {
	switch v.State {
	case decode.Number:
		x.number(v, t, id)
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

func (x *signalSummary) number(v *decode.Value, t int64, id uint32) {
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
	if x.had && v.Raw != x.before.Raw && id == x.beforeID && s.Model != nil && !isProtection(s) {
		if !x.steps || s.CompareDistance(v, &x.before, &x.to, &x.from) > 0 {
			x.from, x.to, x.stepAt, x.steps = x.before, *v, t, true
		}
	}
	x.before, x.beforeID, x.had = *v, id, true
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

// foreign lists the undescribed identifiers by interface and identifier.
func (s *summary) foreign() []foreignID {
	return slices.SortedFunc(maps.Keys(s.undescribed), func(a, b foreignID) int {
		if a.extended != b.extended {
			if b.extended {
				return -1
			}
			return 1
		}
		return cmp.Or(cmp.Compare(a.bus, b.bus), cmp.Compare(a.id, b.id))
	})
}

// reports lists what error frames said, by interface.
func (s *summary) reports() []errorReport {
	return slices.SortedFunc(maps.Keys(s.errors), func(a, b errorReport) int {
		return cmp.Or(cmp.Compare(a.bus, b.bus), cmp.Compare(a.text, b.text))
	})
}

// lateness says in words how far a message's periods are from the described
// ones; "" if they are near. Frames sent on a change may come sooner.
func (n *messageSummary) lateness(t schema.Timing) string {
	if n.periods == 0 {
		return ""
	}
	var parts []string
	if p := int64(t.Period); p > 0 {
		switch off := n.total - p*n.periods; {
		case off > p*n.periods/10:
			parts = append(parts, "sent more rarely than described")
		case -off > p*n.periods/10 && !t.OnChange:
			parts = append(parts, "sent more often than described")
		}
	}
	if lost := int64(t.LostAfter); lost > 0 && n.longest > lost {
		parts = append(parts, "silent for "+millis(n.longest)+" ms, lost after "+millis(lost)+" ms")
	}
	return strings.Join(parts, ", ")
}
