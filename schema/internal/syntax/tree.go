package syntax

import (
	"math/big"

	"busloom/diag"
)

// File is the tree of one description file. Declarations that could not be
// read are missing from it; their problems are in the diagnostics.
type File struct {
	Source  *diag.File
	Version Number
	Network *Network // nil in files that are only used by others
	Uses    []*Use
	Decls   []Decl
}

// Network is the line that names the network.
type Network struct {
	Span diag.Span
	Name Name
	Text Text
}

// Use imports another file.
type Use struct {
	Span diag.Span
	Path Text  // the relative path
	As   *Name // nil: names are used as they are
}

// Name is one identifier.
type Name struct {
	Text string
	Span diag.Span
}

// Text is one or more adjacent quoted texts, joined. Given is false if none
// was written.
type Text struct {
	Value string
	Given bool
	Parts []string // as written one by one, joined in Value
	Span  diag.Span
}

// Number is an exact unsigned number (decimal, 0x, 0b, _, exponent) or a glued
// fraction such as 100/255.
type Number struct {
	Raw   string // as written
	Value *big.Rat
	Span  diag.Span
}

// UnitRef is a unit as written: km/h, m/s^2.
type UnitRef struct {
	Text string
	Span diag.Span
}

// Quantity is a signed number with an optional unit.
type Quantity struct {
	Negative bool
	Number   Number
	Unit     *UnitRef
	Span     diag.Span
}

// Value is the quantity's signed number.
func (q *Quantity) Value() *big.Rat {
	v := new(big.Rat).Set(q.Number.Value)
	if q.Negative {
		v.Neg(v)
	}
	return v
}

// Path is a reference such as WheelSpeeds.wheel[front_left].speed or
// ranges.Top.
type Path struct {
	Steps []Step
	Span  diag.Span
}

// Step is one name of a path with an optional key in brackets.
type Step struct {
	Name Name
	Key  *Key
}

// Key is what stands in brackets: a name or a whole number.
type Key struct {
	Text   string
	Number bool
	Span   diag.Span
}

// Decl is one declaration of a file.
type Decl interface {
	// Head is the span from the declaration's word to the end of its name.
	Head() diag.Span
	// Whole is the span of the whole declaration.
	Whole() diag.Span
}

// Spans gives a declaration its two spans.
type Spans struct {
	HeadSpan, WholeSpan diag.Span
}

// Head implements Decl.
func (s Spans) Head() diag.Span { return s.HeadSpan }

// Whole implements Decl.
func (s Spans) Whole() diag.Span { return s.WholeSpan }

// BusDecl: bus chassis 500 kbit/s fd 2 Mbit/s "text".
type BusDecl struct {
	Spans
	Name Name
	Rate Quantity
	FD   *Quantity
	Text Text
}

// ECUDecl: ecu Engine on powertrain with source 0x00 "text".
type ECUDecl struct {
	Spans
	Name   Name
	Buses  []Name
	Source *Number
	Text   Text
}

// UnitDecl: unit tooth, unit lap = 400 m.
type UnitDecl struct {
	Spans
	Name  Name
	Value *Quantity // nil: a new base unit
	Text  Text
}

// ConstDecl: const circumference = 1.935 m.
type ConstDecl struct {
	Spans
	Name Name
	Expr Expr
	Text Text
}

// TableDecl: codes Pickup { ... }, states Direction { ... }.
type TableDecl struct {
	Spans
	States    bool // states, not codes
	Name      Name
	ByTopByte bool
	Entries   []*Entry
	Text      Text
}

// Entry is one line of a table of codes or states.
type Entry struct {
	Span diag.Span
	Raws RawRange
	// Class is absent, fault or reserved; empty for a state.
	Class Name
	// Name is the state's word, or a code's own name (may be empty).
	Name Name
	Text Text
}

// RawRange is a raw value or a closed range of them.
type RawRange struct {
	Low  Raw
	High *Raw // nil: one value
	Span diag.Span
}

// Raw is a raw bit pattern: a number, or ones (all bits one) less a number.
type Raw struct {
	Ones   bool
	Number *Number // the value, or what is subtracted from ones; nil: ones itself
	Span   diag.Span
}

// CurveDecl: curve CoolantNtc from ohm to degC outside hold { 45313: -40 ... }.
type CurveDecl struct {
	Spans
	Name     Name
	From, To UnitRef
	Outside  Name // hold, extend, none
	Points   []*CurvePoint
	Text     Text
}

// CurvePoint is one x: y of a curve.
type CurvePoint struct {
	X, Y Quantity // without units
	Span diag.Span
}

// IDFormDecl: idform Broadcast 29 bits { priority 3, page 2, ... }.
type IDFormDecl struct {
	Spans
	Name   Name
	Bits   Number
	Fields []*IDFormField
	Text   Text
}

// IDFormField is a named width.
type IDFormField struct {
	Name  Name
	Width Number
}

// CRCDecl: crc Body 8 bits { polynomial 0x1D  initial 0xFF  final 0xFF
// reflected input  reflected output  check 0x4B }.
type CRCDecl struct {
	Spans
	Name       Name
	Bits       Number
	Polynomial *Number
	Initial    *Number
	Final      *Number // xor at the end
	ReflectIn  bool
	ReflectOut bool
	Check      *Number // CRC of the ASCII digits 1 to 9
	Text       Text
}

// ShapeDecl: shape Wheel 3 bytes { ... }.
type ShapeDecl struct {
	Spans
	Name Name
	Size Number
	Text Text
	Body *Body
}

// MessageDecl: message WheelSpeeds 0x1A0 on chassis, fd 16 bytes { ... }.
type MessageDecl struct {
	Spans
	Name    Name
	ID      IDRef
	Bus     Name
	FD      bool
	AtLeast bool
	Size    Number
	Text    Text
	Body    *Body
}

// IDRef is an identifier: a number, or an id form with its fields.
type IDRef struct {
	Number *Number // nil for a form
	Form   *Path
	Fields []*IDFieldValue
	Span   diag.Span
}

// IDFieldValue is priority 3 or priority usually 3.
type IDFieldValue struct {
	Name    Name
	Usually bool
	Value   Number
}

// Body is what stands in braces: items in the order of the text.
type Body struct {
	Items []Item
	Span  diag.Span
}

// Item is *Member, *Group, *Select or one of the facts.
type Item interface{ ItemSpan() diag.Span }

// At gives an item its span.
type At struct{ Span diag.Span }

// ItemSpan implements Item.
func (a At) ItemSpan() diag.Span { return a.Span }

// Member is a value: name at place clauses text.
type Member struct {
	At
	Name  Name
	Place Place
	Text  Text

	Kind      *KindClause // nil: unsigned, or what codes/states/formula imply
	Expr      Expr        // after =; nil if none
	In        *UnitRef    // in unit
	Within    *WithinClause
	Table     *TableClause // codes or states, by name or in place
	Initial   *InitialClause
	Tolerance *Quantity
	Replaced  *Path
	Notes     []*Note
}

// Place is what stands after at: runs, heaviest first.
type Place struct {
	Runs []PlaceRun
	Span diag.Span
}

// PlaceRun is one run. Numbers are as written; legality is checked later.
type PlaceRun struct {
	Relative bool // +
	Heavy    BitRef
	Light    *BitRef // nil: one bit
	End      bool    // ..end
	Span     diag.Span
}

// BitRef is byte.bit.
type BitRef struct {
	Byte, Bit int
	Bad       bool // not of that form; told already
	Span      diag.Span
}

// KindClause is how bits are read.
type KindClause struct {
	Span diag.Span
	// Word is signed, sign magnitude, float, packed decimal, flag, bytes,
	// text, always, counter or checksum.
	Word string

	Encoding string  // text: ascii or utf8
	Fill     *Number // text
	Always   *Number

	Low, High     *Number // counter
	Step          *Number
	AllowLost     *Number
	AllowRepeated *Number

	Method *MethodRef // checksum
}

// MethodRef is what stands after checksum.
type MethodRef struct {
	Span diag.Span
	// E2E profile n [mode], id numbers, counter name.
	E2E     bool
	Profile Number
	Mode    Name // both, alternating, low, nibble; empty if unstated
	IDs     []Number
	Counter *Path
	// or: a CRC's name, over feeds.
	Name  Path
	Feeds []FeedRef
}

// FeedRef is a constant byte or bytes a..b.
type FeedRef struct {
	Span  diag.Span
	Const *Number
	First *Number
	Last  *Number // nil with End or for a single byte
	End   bool    // ..end
}

// WithinClause is within low..high unit.
type WithinClause struct {
	Span      diag.Span
	Low, High Quantity // a unit written on either end holds for both
}

// TableClause is codes X, states X or a table in place.
type TableClause struct {
	Span    diag.Span
	States  bool
	Path    *Path
	Entries []*Entry
}

// InitialClause is a quantity, or a state's or code's name.
type InitialClause struct {
	Span     diag.Span
	Quantity *Quantity
	Name     *Name
}

// Note is note key "text".
type Note struct {
	At
	Key  Name
	Text Text
}

// Group places a shape: wheel[front_left, front_right] is Wheel from byte 2
// step 3.
type Group struct {
	At
	Name   Name
	Keys   []Key   // empty: one group without a key
	Low    *Number // or a range of numbers low..high
	High   *Number
	Shape  Path
	Origin Number
	Step   *Number
	Text   Text
}

// Select is a selection.
type Select struct {
	At
	Word      diag.Span // the word select
	Selector  Path
	Whens     []*When
	Otherwise *Otherwise
}

// When is one branch.
type When struct {
	Span    diag.Span
	Choices []ChoiceRef
	Body    *Body
}

// ChoiceRef is a raw value, a range of them, or a state's name.
type ChoiceRef struct {
	Raws *RawRange
	Name *Name
	Span diag.Span
}

// Otherwise is what unlisted selector values mean.
type Otherwise struct {
	Span  diag.Span // the word otherwise
	Whole diag.Span
	Word  string // nothing, unknown; empty with a body
	Body  *Body
}

// FromFact: from Brake to Cluster, Gateway.
type FromFact struct {
	At
	Any       bool
	OneFitted bool // joined by or
	Senders   []Name
	Receivers []Name
}

// TimingFact: every 10 ms or on change, at least 2 ms apart, lost after 50 ms.
type TimingFact struct {
	At
	Every     *Quantity
	OnChange  bool
	OnRequest bool
	Gap       *Quantity
	Lost      *Quantity
}

// FillFact: fill 0xFF.
type FillFact struct {
	At
	Value Number
}

// DefaultCodesFact: default codes ranges.Top.
type DefaultCodesFact struct {
	At
	Path Path
}

// UnusedFact: unused 1.7..1.6, 14.7..15.0.
type UnusedFact struct {
	At
	Runs []PlaceRun
}

// HoldsFact merges the members of a shape: holds Wheel from byte 2.
type HoldsFact struct {
	At
	Shape  Path
	Origin Number
}

// RelayedFact: relayed by Gateway to chassis as 0x3C0.
type RelayedFact struct {
	At
	By Name
	To Name
	As *IDRef
}

// ReplacedFact marks a whole message: replaced by WheelSpeeds.
type ReplacedFact struct {
	At
	Path Path
}

// Expr is a formula.
type Expr interface{ ExprSpan() diag.Span }

// Operation is left op right, op one of + - * /.
type Operation struct {
	Op          byte
	Left, Right Expr
	Span        diag.Span
}

// Negation is -operand.
type Negation struct {
	Operand Expr
	Span    diag.Span
}

// Literal is a number with an optional unit.
type Literal struct {
	Number Number
	Unit   *UnitRef
	Span   diag.Span
}

// RawRef is the word raw.
type RawRef struct{ Span diag.Span }

// Reference is a constant's name, or a curve applied to an operand.
type Reference struct {
	Path    Path
	Operand Expr // nil: a constant
	Span    diag.Span
}

// ExprSpan implements Expr.
func (e *Operation) ExprSpan() diag.Span { return e.Span }

// ExprSpan implements Expr.
func (e *Negation) ExprSpan() diag.Span { return e.Span }

// ExprSpan implements Expr.
func (e *Literal) ExprSpan() diag.Span { return e.Span }

// ExprSpan implements Expr.
func (e *RawRef) ExprSpan() diag.Span { return e.Span }

// ExprSpan implements Expr.
func (e *Reference) ExprSpan() diag.Span { return e.Span }
