package decode

import (
	"math/big"
	"slices"

	"busloom/bits"
	"busloom/schema"
	"busloom/unit"
)

// Signal is a signal of the plan, or an open field of an identifier (Model is
// nil then).
type Signal struct {
	Model   *schema.Signal
	Message *Message
	Path    string // within the message; id.source for a field of the identifier
	Index   int    // in Plan.Signals
	Unit    unit.Unit
	// Words are the words of states and flags; Value.Index tells which.
	Words []string
	// Scaled is set if Value.Num has the value times 10^Decimals. It is exact
	// if a finite decimal writes every value of the signal, otherwise rounded
	// half to even by the rule of unit.RoundDigits.
	Scaled   bool
	Decimals int
	Exact    bool

	kind    schema.Kind
	width   int
	line    *line  // of signals that aren't Scaled
	codes   []code // sorted
	states  []schema.State
	place   bits.Place
	toEnd   bool
	rest    int    // toEnd: the first byte behind place
	fill    []byte // the fill byte of text, if any
	fixed   *uint64
	idShift int // of an open field
	curve   *curve
	round   *rounding
	// pieces and starts are a curve that is too large for 64 bits.
	pieces []line
	starts []*big.Int
}

// line is physical = a * x + b for big arithmetic.
type line struct {
	a, b   *big.Rat
	digits int
	exact  bool
}

type code struct{ low, high uint64 }

// meaning is what one raw value is, packed: the state in the low four bits,
// the index above them.
type meaning uint16

func mean(s State, index int) meaning { return meaning(s) | meaning(index)<<4 }

func (m meaning) state() State  { return State(m & 15) }
func (m meaning) index() uint16 { return uint16(m >> 4) }

// tableWidth is the widest signal with words whose meanings are kept in a
// table.
const tableWidth = 8

// Name is Message.path.
func (s *Signal) Name() string { return s.Message.Model.Name + "." + s.Path }

// IsNumber reports whether values of the signal can be numbers.
func (s *Signal) IsNumber() bool {
	switch s.kind {
	case schema.Flag, schema.States, schema.TextASCII, schema.TextUTF8, schema.Bytes:
		return false
	}
	return true
}

// search finds what a raw value is: a code, a state, unknown, or a number.
func (s *Signal) search(raw uint64) meaning {
	if i, ok := slices.BinarySearchFunc(s.codes, raw, func(c code, raw uint64) int {
		switch {
		case c.high < raw:
			return -1
		case c.low > raw:
			return 1
		}
		return 0
	}); ok {
		return mean(Coded, i)
	}
	if s.fixed != nil && raw != *s.fixed {
		return mean(Unknown, 0)
	}
	switch s.kind {
	case schema.Flag:
		return mean(Word, int(raw))
	case schema.States:
		for i, st := range s.states {
			if raw >= st.Raw.Low && raw <= st.Raw.High {
				return mean(Word, i)
			}
		}
		return mean(Unknown, 0)
	}
	return mean(Number, 0)
}

// Text is the word of a coded value, of a state or of a flag; "" for any other.
func (s *Signal) Text(v *Value) string {
	switch v.State {
	case Word:
		return s.Words[v.Index]
	case Coded:
		return CodeWord(s.Model.Codes[v.Index])
	}
	return ""
}

// CodeWord is how a code is shown: its class, and its name if it has one.
func CodeWord(c schema.Code) string {
	if c.Name == "" {
		return c.Class.String()
	}
	return c.Class.String() + " " + c.Name
}
