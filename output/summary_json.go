package output

import (
	"encoding/json"
	"fmt"

	"busloom/decode"
)

type jsonSummary struct {
	From json.Number `json:"from,omitempty"`
	To   json.Number `json:"to,omitempty"`
	// Frames is by class; the numbers add up to the frames that were summed up.
	Frames      map[string]int64   `json:"frames"`
	Messages    []jsonMessage      `json:"messages"`
	Never       []jsonNeverMessage `json:"neverSeen,omitempty"`
	Undescribed []jsonForeign      `json:"undescribed,omitempty"`
	Errors      []jsonReport       `json:"errorFrames,omitempty"`
}

type jsonForeign struct {
	Interface string `json:"interface"`
	ID        string `json:"id"`
	Frames    int64  `json:"frames"`
}

type jsonReport struct {
	Interface string `json:"interface"`
	Report    string `json:"report"`
	Frames    int64  `json:"frames"`
}

type jsonNeverMessage struct {
	Bus     string `json:"bus"`
	Message string `json:"message"`
	ID      string `json:"id"`
}

// jsonMessage has its periods in milliseconds.
type jsonMessage struct {
	Bus              string       `json:"bus"`
	Message          string       `json:"message"`
	ID               string       `json:"id"`
	Family           bool         `json:"family,omitempty"` // of identifiers; ID is the one to send
	Frames           int64        `json:"frames"`
	Least            json.Number  `json:"leastPeriod,omitempty"`
	Mean             json.Number  `json:"meanPeriod,omitempty"`
	Greatest         json.Number  `json:"greatestPeriod,omitempty"`
	Described        json.Number  `json:"describedPeriod,omitempty"`
	WrongChecksums   int64        `json:"wrongChecksums,omitempty"`
	BadCounters      int64        `json:"countersRepeatedOrOutOfRange,omitempty"`
	LostSteps        int64        `json:"lostCounterSteps,omitempty"`
	Short            int64        `json:"shortFrames,omitempty"`
	Long             int64        `json:"longFrames,omitempty"`
	Timing           string       `json:"timing,omitempty"`
	UnknownSelection int64        `json:"unknownSelections,omitempty"`
	Signals          []jsonSignal `json:"signals"`
}

type jsonSignal struct {
	Name         string           `json:"name"`
	Unit         string           `json:"unit,omitempty"`
	Numbers      int64            `json:"numbers,omitempty"`
	Least        json.Number      `json:"least,omitempty"`
	LeastAt      json.Number      `json:"leastAt,omitempty"`
	Greatest     json.Number      `json:"greatest,omitempty"`
	GreatestAt   json.Number      `json:"greatestAt,omitempty"`
	GreatestStep json.Number      `json:"greatestStep,omitempty"`
	StepAt       json.Number      `json:"greatestStepAt,omitempty"`
	Words        map[string]int64 `json:"words,omitempty"`
	Codes        map[string]int64 `json:"codes,omitempty"`
	Texts        int64            `json:"texts,omitempty"`
	Unknown      int64            `json:"unknown,omitempty"`
	Missing      int64            `json:"missing,omitempty"`
	WithoutValue int64            `json:"withoutValue,omitempty"`
}

func jsonTime(ns int64) json.Number { return json.Number(appendTime(nil, ns)) }

func (s *summary) appendJSON(dst []byte) []byte {
	seen, never := s.shown()
	out := jsonSummary{Frames: map[string]int64{}, Messages: []jsonMessage{}}
	if s.any {
		out.From, out.To = jsonTime(s.first), jsonTime(s.last)
	}
	for c := decode.Decoded; c < decode.NumClasses; c++ {
		out.Frames[className(c)] = s.classes[c]
	}
	for _, m := range seen {
		out.Messages = append(out.Messages, s.jsonMessage(m))
	}
	for _, m := range never {
		out.Never = append(out.Never, jsonNeverMessage{m.Bus, m.Model.Name, idDigits(m.Model.ID.Send, m.Model.ID.Extended)})
	}
	for _, x := range s.foreign() {
		out.Undescribed = append(out.Undescribed, jsonForeign{s.plan.Interface(x.bus), idDigits(x.id, x.extended), s.undescribed[x]})
	}
	for _, x := range s.reports() {
		out.Errors = append(out.Errors, jsonReport{s.plan.Interface(x.bus), x.text, s.errors[x]})
	}
	text, err := json.MarshalIndent(out, "", "  ")
	if err != nil {
		// Numbers that AppendNumber writes are JSON numbers.
		return fmt.Appendf(dst, "%q\n", err.Error())
	}
	return append(append(dst, text...), '\n')
}

func (s *summary) jsonMessage(m *decode.Message) jsonMessage {
	n := &s.messages[m.Index]
	j := jsonMessage{
		Bus: m.Bus, Message: m.Model.Name, ID: idDigits(m.Model.ID.Send, m.Model.ID.Extended), Family: isFamily(m), Frames: n.count, WrongChecksums: n.checksum, BadCounters: n.counter,
		LostSteps: n.lost, Short: n.short, Long: n.long, UnknownSelection: n.unknownSelection, Timing: n.lateness(m.Model.Timing), Signals: []jsonSignal{},
	}
	if n.periods > 0 {
		j.Least, j.Greatest = json.Number(millis(n.shortest)), json.Number(millis(n.longest))
		j.Mean = json.Number(fraction(n.total, n.periods, 1_000_000, 3))
	}
	if p := m.Model.Timing.Period; p > 0 {
		j.Described = json.Number(millis(int64(p)))
	}
	for _, sig := range m.Signals {
		j.Signals = append(j.Signals, s.signals[sig.Index].json(sig))
	}
	return j
}

func (x *signalSummary) json(s *decode.Signal) jsonSignal {
	j := jsonSignal{Name: s.Path, Unit: s.Unit.Symbol, Numbers: x.numbers, Texts: x.texts, Unknown: x.unknown, Missing: x.missing, WithoutValue: x.nothing}
	if x.numbers > 0 {
		j.Least, j.LeastAt = json.Number(s.AppendNumber(nil, &x.min)), jsonTime(x.minAt)
		j.Greatest, j.GreatestAt = json.Number(s.AppendNumber(nil, &x.max)), jsonTime(x.maxAt)
		if x.steps {
			j.GreatestStep, j.StepAt = json.Number(s.Difference(&x.to, &x.from)), jsonTime(x.stepAt)
		}
	}
	add := func(to *map[string]int64, word string, n int64) {
		if n == 0 {
			return
		}
		if *to == nil {
			*to = map[string]int64{}
		}
		(*to)[word] += n
	}
	for i, n := range x.words {
		add(&j.Words, s.Words[i], n)
	}
	for i, n := range x.codes {
		add(&j.Codes, decode.CodeWord(s.Model.Codes[i]), n)
	}
	return j
}
