package diag

import "sort"

// Info is what the catalogue knows of a code.
type Info struct {
	Code     Code
	Severity Severity
	// Title is a few words naming the kind of problem.
	Title string
}

// Codes of syntax (SY): the text can't be read.
const (
	Unreadable       Code = "SY01" // bytes that are no token
	UnclosedText     Code = "SY02" // a text without its closing quote
	BadNumber        Code = "SY03" // a number that can't be written so
	UnexpectedWord   Code = "SY04" // something else was expected here
	UnclosedBlock    Code = "SY05" // { without }
	MissingVersion   Code = "SY06" // the first line isn't "busloom 1"
	UnknownVersion   Code = "SY07" // a language version this program doesn't know
	NestedTooDeep    Code = "SY08" // more nesting than the language allows
	UnitNeedsOwnLine Code = "SY09" // a division by a name glued to raw, or the like
	TooManyErrors    Code = "SY10" // note: the rest of the problems isn't shown
	RepeatedClause   Code = "SY11" // a clause given twice
	ClauseNotAllowed Code = "SY12" // a clause that can't stand on this kind of thing
)

// Codes of names (NA).
const (
	UnknownName      Code = "NA01"
	DuplicateName    Code = "NA02"
	NameCaseClash    Code = "NA03" // names that differ in case only
	GeneratedClash   Code = "NA04" // names that give one identifier in generated code
	ImportCycle      Code = "NA05"
	ImportUnreadable Code = "NA06"
	WrongKindOfName  Code = "NA07" // a name of another kind (a bus where an ECU is expected)
	UnusedImport     Code = "NA08"
	ImportNotUnder   Code = "NA09" // absolute path, backslash and the like
	ConstantCycle    Code = "NA10"
	UnusedName       Code = "NA11" // note: declared but never used
	ReplacedItself   Code = "NA12" // replaced by itself or by something that is replaced in a ring
)

// Codes of placement (PL).
const (
	BadPlace        Code = "PL01" // ends that can't be (bit 8, upside-down within a byte)
	Overlap         Code = "PL02"
	PastEnd         Code = "PL03"
	UnusedBits      Code = "PL04" // note
	WidthNotAllowed Code = "PL05" // 0 or more than 64 bits, not whole bytes or digits, not 16/32/64 for a float
	BadSize         Code = "PL06" // a length that no frame has
	RelativePlace   Code = "PL07" // + missing inside a shape, or present outside
	ShapePlacement  Code = "PL08" // keys, origin and step of a group that don't fit
	UnusedOverlap   Code = "PL09" // bits named unused that something uses
	ShapeCycle      Code = "PL10" // a shape that holds itself
)

// Codes of identifiers (ID).
const (
	BadID       Code = "ID01"
	IDClash     Code = "ID02"
	BadIDForm   Code = "ID03"
	BadIDFields Code = "ID04"
	NeedsOpenID Code = "ID05" // several senders need an open field
)

// Codes of numbers, formulas and units (UN).
const (
	UnknownUnit       Code = "UN01"
	DimensionMistake  Code = "UN02"
	PointArithmetic   Code = "UN03" // adding two temperatures, scaling a temperature
	NotAffine         Code = "UN04" // the formula isn't a * raw + b
	NoUnit            Code = "UN05" // the result's unit isn't written
	BadCurve          Code = "UN06" // not monotone, too few points
	DivisionByZero    Code = "UN07"
	ConstantFormula   Code = "UN08" // raw doesn't occur, or its factor is zero
	BadUnitDefinition Code = "UN09"
	CurveReach        Code = "UN10" // warning: raw values outside a curve that says none
	TooPrecise        Code = "UN11" // numbers too large to be kept exactly at run time
)

// Codes of values (VA).
const (
	RangeUnreachable Code = "VA01" // raw bits can't reach the range
	RangeCutByCodes  Code = "VA02" // codes lie within the range
	CoarseResolution Code = "VA03" // coarser than the stated tolerance
	CodeClash        Code = "VA04" // codes that overlap
	CodeTooWide      Code = "VA05" // a code or state the width can't hold
	BadInitial       Code = "VA06"
	EmptyRange       Code = "VA07" // lower end above upper end
	NothingLeft      Code = "VA08" // codes leave no number
	BadFill          Code = "VA09" // fill byte out of range
)

// Codes of selection (SE).
const (
	SelectorCycle    Code = "SE01"
	SelectorAbsent   Code = "SE02" // the selector isn't present whenever the select is
	ChoiceClash      Code = "SE03" // one value in two branches
	ChoiceTooWide    Code = "SE04"
	OtherwiseMissing Code = "SE05"
	OtherwiseDead    Code = "SE06" // warning: every value is listed already
	BadSelector      Code = "SE07" // a kind that can't select
)

// Codes of protection (PR).
const (
	CounterUnfit      Code = "PR01"
	ChecksumSelf      Code = "PR02" // the checksum covers itself
	ChecksumWidth     Code = "PR03"
	ChecksumRange     Code = "PR04" // bytes outside the message
	UnknownMethod     Code = "PR05"
	BadCRC            Code = "PR06"
	ProfileLayout     Code = "PR07" // E2E profile with another layout than it allows
	CounterMissing    Code = "PR08"
	ChecksumNotAlways Code = "PR09" // inside a selection
	TwoCounters       Code = "PR10"
	CRCCheckFails     Code = "PR11" // the stated check value isn't what the parameters give
)

// Codes of the network (NE).
const (
	SenderNotOnBus   Code = "NE01"
	ReceiverNotOnBus Code = "NE02"
	NobodyListens    Code = "NE03" // warning
	SenderMissing    Code = "NE04"
	TimingMistake    Code = "NE05" // lost after shorter than the period, and the like
	BusMistake       Code = "NE06" // FD on a classic bus, bit rates
	RelayMistake     Code = "NE07"
	SenderListens    Code = "NE08" // warning: a sender receives its own message
	SourceClash      Code = "NE09" // two ECUs of one bus with one source address
	BusOverbooked    Code = "NE10" // warning: cyclic messages alone need more than the bus carries
)

// Codes of compiled databases (DB).
const (
	DatabaseUnreadable  Code = "DB01"
	DatabaseVersion     Code = "DB02"
	DatabaseFingerprint Code = "DB03"
	DatabaseContent     Code = "DB04"
)

var catalogue = []Info{
	{Unreadable, Error, "bytes that are no word of the language"},
	{UnclosedText, Error, "a text without its closing quote"},
	{BadNumber, Error, "a number that can't be written so"},
	{UnexpectedWord, Error, "something else was expected"},
	{UnclosedBlock, Error, "a brace without its partner"},
	{MissingVersion, Error, "the language version is missing"},
	{UnknownVersion, Error, "an unknown language version"},
	{NestedTooDeep, Error, "nested too deep"},
	{UnitNeedsOwnLine, Error, "a unit glued to something that isn't a number"},
	{TooManyErrors, Note, "more problems than are shown"},
	{RepeatedClause, Error, "a clause given twice"},
	{ClauseNotAllowed, Error, "a clause that can't stand here"},

	{UnknownName, Error, "an unknown name"},
	{DuplicateName, Error, "a name declared twice"},
	{NameCaseClash, Error, "names that differ in case only"},
	{GeneratedClash, Error, "names that are one in generated code"},
	{ImportCycle, Error, "files that use each other in a ring"},
	{ImportUnreadable, Error, "a used file that can't be read"},
	{WrongKindOfName, Error, "a name of another kind"},
	{UnusedImport, Note, "a used file that nothing refers to"},
	{ImportNotUnder, Error, "a path that isn't relative"},
	{ConstantCycle, Error, "constants defined by each other"},
	{UnusedName, Note, "a declaration that nothing refers to"},
	{ReplacedItself, Error, "a replacement that leads back to itself"},

	{BadPlace, Error, "a place whose ends can't be"},
	{Overlap, Error, "two members on the same bits"},
	{PastEnd, Error, "a place past the end"},
	{UnusedBits, Note, "bits that nothing uses"},
	{WidthNotAllowed, Error, "a width that this kind can't have"},
	{BadSize, Error, "a length that no frame has"},
	{RelativePlace, Error, "a plus sign missing or misplaced"},
	{ShapePlacement, Error, "a group that can't be placed so"},
	{UnusedOverlap, Error, "unused bits that are used"},
	{ShapeCycle, Error, "a shape that holds itself"},

	{BadID, Error, "an identifier that can't be"},
	{IDClash, Error, "two messages with the same identifier"},
	{BadIDForm, Error, "an id form that doesn't add up"},
	{BadIDFields, Error, "id fields that don't fit their form"},
	{NeedsOpenID, Error, "several senders on one fixed identifier"},

	{UnknownUnit, Error, "an unknown unit"},
	{DimensionMistake, Error, "units of different dimensions"},
	{PointArithmetic, Error, "arithmetic that a temperature point can't do"},
	{NotAffine, Error, "a formula that isn't a straight line"},
	{NoUnit, Error, "a result whose unit isn't written"},
	{BadCurve, Error, "a curve that can't be followed"},
	{DivisionByZero, Error, "a division by zero"},
	{ConstantFormula, Error, "a formula that doesn't depend on raw"},
	{BadUnitDefinition, Error, "a unit that can't be defined so"},
	{CurveReach, Warning, "raw values beyond the curve"},
	{TooPrecise, Error, "numbers too large to be kept exactly"},

	{RangeUnreachable, Error, "a range that raw bits can't reach"},
	{RangeCutByCodes, Error, "codes that cut into the range"},
	{CoarseResolution, Error, "a resolution coarser than the tolerance"},
	{CodeClash, Error, "codes or states that overlap"},
	{CodeTooWide, Error, "a code or state that the width can't hold"},
	{BadInitial, Error, "an initial value that can't be sent"},
	{EmptyRange, Error, "a range upside down"},
	{NothingLeft, Warning, "codes that leave no number"},
	{BadFill, Error, "a fill byte that is none"},

	{SelectorCycle, Error, "selections that depend on each other"},
	{SelectorAbsent, Error, "a selector that may be absent"},
	{ChoiceClash, Error, "one selector value in two branches"},
	{ChoiceTooWide, Error, "a choice that the selector can't have"},
	{OtherwiseMissing, Error, "selector values that nothing is said of"},
	{OtherwiseDead, Warning, "an otherwise that never applies"},
	{BadSelector, Error, "a member that can't select"},

	{CounterUnfit, Error, "a counter that can't count so"},
	{ChecksumSelf, Error, "a checksum that covers itself"},
	{ChecksumWidth, Error, "a checksum of another width"},
	{ChecksumRange, Error, "a checksum over bytes that aren't there"},
	{UnknownMethod, Error, "an unknown checksum method"},
	{BadCRC, Error, "CRC parameters that can't be"},
	{ProfileLayout, Error, "a layout that the protection profile forbids"},
	{CounterMissing, Error, "a checksum without its counter"},
	{ChecksumNotAlways, Error, "protection inside a selection"},
	{TwoCounters, Error, "more than one counter or checksum where one is allowed"},
	{CRCCheckFails, Error, "a check value that the CRC doesn't give"},

	{SenderNotOnBus, Error, "a sender that isn't on the bus"},
	{ReceiverNotOnBus, Error, "a receiver that isn't on the bus"},
	{NobodyListens, Warning, "a message that nobody listens to"},
	{SenderMissing, Error, "a message without a sender"},
	{TimingMistake, Error, "times that contradict each other"},
	{BusMistake, Error, "a bus that can't carry this"},
	{RelayMistake, Error, "a relay that can't be"},
	{SenderListens, Warning, "a message heard by its own sender"},
	{SourceClash, Error, "one source address for two ECUs"},
	{BusOverbooked, Warning, "more traffic than the bus carries"},

	{DatabaseUnreadable, Error, "a database that can't be read"},
	{DatabaseVersion, Error, "a database of another version"},
	{DatabaseFingerprint, Error, "a database whose fingerprint is wrong"},
	{DatabaseContent, Error, "a database whose content can't be"},
}

// Lookup returns what the catalogue knows of a code.
func Lookup(code Code) (Info, bool) {
	for _, i := range catalogue {
		if i.Code == code {
			return i, true
		}
	}
	return Info{}, false
}

// Codes returns the whole catalogue, sorted by code.
func Codes() []Info {
	out := append([]Info(nil), catalogue...)
	sort.Slice(out, func(i, j int) bool { return out[i].Code < out[j].Code })
	return out
}
