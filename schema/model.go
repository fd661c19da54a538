package schema

import (
	"math/big"
	"time"

	"busloom/bits"
	"busloom/crc"
	"busloom/diag"
	"busloom/unit"
)

// Network is a whole checked description. Nothing in it changes after Compile
// or Load; slices are in the order of the text unless said otherwise.
type Network struct {
	Name      string
	Text      string
	Buses     []*Bus
	ECUs      []*ECU
	Messages  []*Message
	Curves    []*Curve
	CodeSets  []*CodeSet        // named code tables
	StateSets []*StateSet       // named state tables
	Units     []unit.Definition // units that the description defines
}

// Bus is one CAN network.
type Bus struct {
	Name    string
	Text    string
	BitRate int64 // bit/s
	FDRate  int64 // bit/s of the FD data phase; 0 for a classic bus
	Span    diag.Span
}

// ECU is a control unit.
type ECU struct {
	Name   string
	Text   string
	Buses  []*Bus
	Source *uint8 // the source address of its 29-bit messages
	Span   diag.Span
}

// Note is a free-form remark with a key.
type Note struct {
	Key  string
	Text string
}

// Message is one message on one bus. A relayed message is a Message of its own
// for each bus it is relayed to.
type Message struct {
	Name       string
	Text       string
	Span       diag.Span
	Bus        *Bus
	ID         ID
	FD         bool
	Size       int  // payload bytes
	AtLeast    bool // longer frames are as described
	Senders    []*ECU
	AnySender  bool // from any
	OneFitted  bool // A or B: variants of which one is fitted
	Receivers  []*ECU
	Timing     Timing
	Fill       *byte     // value of bits that nothing describes; nil is unstated
	Signals    []*Signal // flat, in text order, those of selections included
	Selects    []*Select // outermost selections
	Unused     []bits.Place
	Notes      []Note
	Deprecated *Deprecation
	Relayed    *Relay // not nil for a copy on another bus
}

// Relay tells where a relayed message comes from.
type Relay struct {
	By   *ECU
	From *Message
}

// Deprecation marks what is to be replaced.
type Deprecation struct {
	ReplacedBy string // path of the replacement
}

// ID is an identifier or a family of them: a received id matches when
// id&Mask == Value. For a fixed id, Mask has all 11 or 29 bits.
type ID struct {
	Extended bool
	Value    uint32 // fixed bits; 0 where Mask is 0
	Mask     uint32
	Send     uint32    // the id to send: Value with the "usually" values in it
	Form     string    // name of the id form, "" if written as a number
	Fields   []IDField // heaviest first; empty without a form
}

// IDField is a named part of a 29-bit (or 11-bit) identifier. An open field is
// a decoded value of its own.
type IDField struct {
	Name    string
	Shift   int // of its lightest bit within the identifier
	Width   int
	Open    bool
	Usually bool   // open, with a value to send
	Value   uint32 // the fixed or usual value
}

// Timing is when a message is sent.
type Timing struct {
	Period    time.Duration // 0: not cyclic
	OnChange  bool
	OnRequest bool
	Gap       time.Duration // at least this far apart; 0 unstated
	LostAfter time.Duration // 0 unstated
}

// Kind is how raw bits are read.
type Kind uint8

// The kinds of value.
const (
	Unsigned      Kind = iota + 1
	Signed             // two's complement
	SignMagnitude      // heaviest bit is the sign
	Float              // IEEE 754 half, single or double, by the width
	PackedDecimal      // four bits a digit, heaviest first
	Flag               // one bit
	States             // an enumeration with gaps
	TextASCII
	TextUTF8
	Bytes
	Counter
	Checksum
)

// Signal is one value of a message.
type Signal struct {
	Name  string // path within the message, such as wheel[front_left].speed
	Text  string
	Span  diag.Span
	Place bits.Place
	Width int // bits
	Kind  Kind
	// ToEnd marks text or bytes that go on to the payload's end.
	ToEnd    bool
	FillByte *byte   // of text
	Fixed    *uint64 // always this raw value

	// Conversion from the integer (or float) that Kind gives to the physical
	// value: Affine, or Curve of Affine. Nil for kinds that aren't numbers.
	Affine *Affine
	Curve  *Curve
	Unit   unit.Unit // of the physical value

	// Range is the stated range of the physical value; nil if unstated.
	Range *Range
	// Tolerance is the stated greatest step; nil if unstated.
	Tolerance *big.Rat
	// Codes are the raw values that aren't numbers, sorted, disjoint.
	Codes []Code
	// States are the words of States signals (codes are in Codes), sorted.
	States []State
	// CodeSet and StateSet name the table they come from, "" if in place.
	CodeSet, StateSet string

	Initial    *uint64 // raw
	Deprecated *Deprecation
	Notes      []Note

	// When lists the choices that must all hold for the signal to exist; empty
	// for a signal that is always there.
	When []Choice

	Counter  *CounterRule
	Checksum *ChecksumRule
}

// Affine is physical = A * raw + B, exactly.
type Affine struct {
	A, B *big.Rat
}

// Range is a closed range of the physical value.
type Range struct {
	Low, High *big.Rat
}

// RawRange is a closed range of raw bit patterns.
type RawRange struct {
	Low, High uint64
}

// CodeClass says what a coded raw value means.
type CodeClass uint8

// The classes of codes.
const (
	Absent CodeClass = iota + 1 // not fitted, not available, not ready
	Fault
	Reserved
)

// Code is a range of raw values that aren't numbers.
type Code struct {
	Raw   RawRange
	Class CodeClass
	Name  string // "" if the class says it all
	Text  string
}

// State is one word of an enumeration.
type State struct {
	Raw  RawRange
	Name string
	Text string
}

// CodeSet is a named table of codes as it was declared. Its codes are computed
// for each width when a signal uses it.
type CodeSet struct {
	Name string
	Text string
	Span diag.Span
}

// StateSet is a named table of states as it was declared.
type StateSet struct {
	Name   string
	Text   string
	States []State
	Codes  []Code
	Span   diag.Span
}

// Outside says what a curve gives beyond its points.
type Outside uint8

// The ways of extrapolation.
const (
	Hold   Outside = iota + 1 // the end point's value
	Extend                    // the last straight piece goes on
	None                      // no value
)

// Curve is a piecewise linear, strictly monotone function. Points are sorted
// by X.
type Curve struct {
	Name    string
	Text    string
	From    unit.Unit
	To      unit.Unit
	Outside Outside
	Points  []Point
	Span    diag.Span
}

// Point is one corner of a curve, in the curve's units.
type Point struct {
	X, Y *big.Rat
}

// Select is a selection: its branches are the values of one selector.
type Select struct {
	Selector  *Signal
	Branches  []Branch
	Otherwise OtherwiseRule
	Else      *Branch // for OtherwiseBody
	Span      diag.Span
}

// OtherwiseRule says what an unlisted selector value means.
type OtherwiseRule uint8

// What happens to unlisted selector values.
const (
	Exhausted        OtherwiseRule = iota // every value is listed
	OtherwiseNothing                      // the selection carries nothing
	OtherwiseUnknown                      // counted as unknown
	OtherwiseBody                         // a branch of its own
)

// Branch is what one set of selector values brings.
type Branch struct {
	Values  []RawRange // sorted; empty for the else branch
	Signals []*Signal  // of this branch itself, not of nested selections
	Selects []*Select
}

// Choice is a condition on a selector: its raw value lies in one of Values, or
// in none of them when Not is set (the otherwise branch).
type Choice struct {
	Selector *Signal
	Values   []RawRange
	Not      bool
}

// CounterRule is how a counter runs: Low, Low+Step, ... up to High, then Low.
type CounterRule struct {
	Low, High, Step uint64
	// AllowLost and AllowRepeated are how many lost steps, or repeats in a
	// row, are no failure.
	AllowLost, AllowRepeated uint64
}

// ChecksumRule is how a checksum is computed.
type ChecksumRule struct {
	// Method is the name in the text: crc8_j1850, xor8, e2e_1_both, ...
	Method string
	CRC    *crc.Params // nil for xor8 and sum8
	// Feed is what is run through, in order.
	Feed []Feed
	// Counter is the counter that selects among data ids, nil if none.
	Counter *Signal
}

// Feed is one item that a checksum runs over: a constant byte, bytes of the
// payload, or a byte chosen by the counter.
type Feed struct {
	Kind FeedKind
	Byte byte // FeedConst
	// First and Last are payload bytes, both included (FeedBytes). In an
	// at-least message Last may be -1: to the end.
	First, Last int
	// Table has the byte for each counter value modulo its length
	// (FeedByCounter).
	Table []byte
}

// FeedKind tells feeds apart.
type FeedKind uint8

// The kinds of feed.
const (
	FeedConst FeedKind = iota + 1
	FeedBytes
	FeedByCounter
)
