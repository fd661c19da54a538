package decode

import (
	"busloom/frame"
)

// Class is what became of one record. Every record that a source hands out
// ends in exactly one class; malformed records are counted by the source.
type Class uint8

// The classes of a record.
const (
	Decoded     Class = iota + 1 // described, its values are in the Record
	Undescribed                  // no message of the bus has this identifier
	RemoteFrame                  // a remote request
	ErrorFrame                   // an error report of the interface
	Unmapped                     // an interface that no bus was tied to
	NumClasses  = iota + 1
)

// Fit compares a frame's length with the described one.
type Fit uint8

// How the length fits.
const (
	FitExact Fit = iota
	FitShort     // values that need the missing bytes are Missing
	FitLong
)

// Check is the outcome of one kind of protection.
type Check uint8

// Outcomes of protection checks.
const (
	Unchecked Check = iota // the message has none, or it is out of reach of a short frame
	Good
	Bad      // checksum differs; counter outside its range
	Repeated // counter: the same value again
	Lost     // counter: steps are missing
	First    // counter: nothing to compare with yet
)

// State says what a value is.
type State uint8

// The states of a value.
const (
	Number    State = iota + 1 // Num/Raw hold it; Signal.AppendNumber prints it
	Coded                      // one of Signal.Model.Codes: Index
	Word                       // one of Signal.Model.States: Index
	Unknown                    // a state or selector value that nothing describes, a digit above 9
	Text                       // text: the payload's bytes
	Octets                     // raw bytes
	NotFinite                  // a float that is no number (fault): NaN, +inf, -inf
	NoValue                    // beyond a curve that ends
	Missing                    // the frame is too short
)

// Value is one signal's value in one frame.
type Value struct {
	Signal *Signal
	// Raw is the bit pattern, right-aligned (not for Text and Octets).
	Raw uint64
	// Num is the physical value times 10^Signal.Decimals if Signal.Scaled.
	Num   int64
	State State
	Index uint16
}

// Record is one frame and what the plan made of it. It is reused from frame to
// frame: sinks keep copies, not references.
type Record struct {
	Frame   *frame.Frame
	Class   Class
	Message *Message // nil unless Decoded
	Values  []Value  // of the signals that exist in this frame, in text order
	Fit     Fit
	// UnknownSelection is set if a selector had a value that its select calls
	// unknown.
	UnknownSelection bool
	Checksum         Check
	Counter          Check
	CounterRaw       uint64 // the counter's bits, unless Counter is Unchecked
	Steps            uint64 // lost steps, for Lost
}
