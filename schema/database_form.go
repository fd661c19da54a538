package schema

// The form of a database: what is written as JSON. Every field is documented
// in docs/database.md and in the published JSON Schema; a change of meaning
// raises DatabaseVersion.

// DatabaseFormat is the value of the "format" field.
const DatabaseFormat = "busloom-network"

// DatabaseVersion is the version of the form that this program writes and
// reads.
const DatabaseVersion = 1

type dbFile struct {
	Format      string    `json:"format"`
	Version     int       `json:"version"`
	Fingerprint string    `json:"fingerprint"`
	Network     dbNetwork `json:"network"`
}

type dbNetwork struct {
	Name      string       `json:"name"`
	Text      string       `json:"text,omitempty"`
	Buses     []dbBus      `json:"buses"`
	ECUs      []dbECU      `json:"ecus"`
	Units     []dbUnit     `json:"units"`
	UnitNames []dbUnitName `json:"declaredUnits,omitempty"`
	Curves    []dbCurve    `json:"curves,omitempty"`
	CodeSets  []dbCodeSet  `json:"codeSets,omitempty"`
	StateSets []dbStateSet `json:"stateSets,omitempty"`
	Messages  []dbMessage  `json:"messages"`
}

type dbBus struct {
	Name    string `json:"name"`
	Text    string `json:"text,omitempty"`
	BitRate int64  `json:"bitRate"`
	FDRate  int64  `json:"fdRate,omitempty"`
}

type dbECU struct {
	Name   string   `json:"name"`
	Text   string   `json:"text,omitempty"`
	Buses  []string `json:"buses"`
	Source *uint8   `json:"source,omitempty"`
}

// dbUnit is a unit that a signal or a curve uses: base = factor * pi^pi * x +
// zero.
type dbUnit struct {
	Symbol    string `json:"symbol"`
	Dimension string `json:"dimension,omitempty"`
	Factor    string `json:"factor"`
	Pi        int    `json:"pi,omitempty"`
	Zero      string `json:"zero,omitempty"`
	Point     bool   `json:"point,omitempty"`
}

type dbUnitName struct {
	Name  string `json:"name"`
	Text  string `json:"text,omitempty"`
	Value string `json:"value,omitempty"`
	Of    string `json:"of,omitempty"`
}

type dbCurve struct {
	Name    string      `json:"name"`
	Text    string      `json:"text,omitempty"`
	From    string      `json:"from"`
	To      string      `json:"to"`
	Outside string      `json:"outside"`
	Points  [][2]string `json:"points"`
}

type dbCodeSet struct {
	Name string `json:"name"`
	Text string `json:"text,omitempty"`
}

type dbStateSet struct {
	Name   string   `json:"name"`
	Text   string   `json:"text,omitempty"`
	States []dbWord `json:"states,omitempty"`
	Codes  []dbWord `json:"codes,omitempty"`
}

// dbWord is a state, or a code if Class is given.
type dbWord struct {
	Raw   string `json:"raw"` // 0x0F or 0xF0-0xFD
	Class string `json:"class,omitempty"`
	Name  string `json:"name,omitempty"`
	Text  string `json:"text,omitempty"`
}

type dbMessage struct {
	Name       string     `json:"name"`
	Text       string     `json:"text,omitempty"`
	Bus        string     `json:"bus"`
	ID         dbID       `json:"id"`
	FD         bool       `json:"fd,omitempty"`
	Size       int        `json:"size"`
	AtLeast    bool       `json:"atLeast,omitempty"`
	Senders    []string   `json:"senders,omitempty"`
	AnySender  bool       `json:"anySender,omitempty"`
	OneFitted  bool       `json:"oneFitted,omitempty"`
	Receivers  []string   `json:"receivers,omitempty"`
	Timing     *dbTiming  `json:"timing,omitempty"`
	Fill       *int       `json:"fill,omitempty"`
	Signals    []dbSignal `json:"signals,omitempty"`
	Selects    []dbSelect `json:"selects,omitempty"`
	Unused     []string   `json:"unused,omitempty"`
	Notes      []dbNote   `json:"notes,omitempty"`
	Deprecated *dbReplace `json:"deprecated,omitempty"`
	Relayed    *dbRelay   `json:"relayed,omitempty"`
}

type dbID struct {
	Extended bool        `json:"extended,omitempty"`
	Value    string      `json:"value"`
	Mask     string      `json:"mask"`
	Send     string      `json:"send"`
	Form     string      `json:"form,omitempty"`
	Fields   []dbIDField `json:"fields,omitempty"`
}

type dbIDField struct {
	Name    string `json:"name"`
	Shift   int    `json:"shift"`
	Width   int    `json:"width"`
	Open    bool   `json:"open,omitempty"`
	Usually bool   `json:"usually,omitempty"`
	Value   string `json:"value"`
}

// dbTiming has its times in nanoseconds.
type dbTiming struct {
	Period    int64 `json:"period,omitempty"`
	OnChange  bool  `json:"onChange,omitempty"`
	OnRequest bool  `json:"onRequest,omitempty"`
	Gap       int64 `json:"gap,omitempty"`
	LostAfter int64 `json:"lostAfter,omitempty"`
}

type dbSignal struct {
	Name       string      `json:"name"`
	Text       string      `json:"text,omitempty"`
	Place      string      `json:"place"`
	Kind       string      `json:"kind"`
	ToEnd      bool        `json:"toEnd,omitempty"`
	FillByte   *int        `json:"fillByte,omitempty"`
	Fixed      string      `json:"fixed,omitempty"`
	Factor     string      `json:"factor,omitempty"`
	Offset     string      `json:"offset,omitempty"`
	Curve      string      `json:"curve,omitempty"`
	Unit       string      `json:"unit,omitempty"`
	Low        string      `json:"low,omitempty"`
	High       string      `json:"high,omitempty"`
	Tolerance  string      `json:"tolerance,omitempty"`
	Codes      []dbWord    `json:"codes,omitempty"`
	States     []dbWord    `json:"states,omitempty"`
	CodeSet    string      `json:"codeSet,omitempty"`
	StateSet   string      `json:"stateSet,omitempty"`
	Initial    string      `json:"initial,omitempty"`
	Deprecated *dbReplace  `json:"deprecated,omitempty"`
	Notes      []dbNote    `json:"notes,omitempty"`
	Counter    *dbCounter  `json:"counter,omitempty"`
	Checksum   *dbChecksum `json:"checksum,omitempty"`
}

type dbNote struct {
	Key  string `json:"key"`
	Text string `json:"text"`
}

type dbReplace struct {
	ReplacedBy string `json:"replacedBy"`
}

type dbRelay struct {
	By      string `json:"by"`
	FromBus string `json:"fromBus"`
}

type dbCounter struct {
	Low             string `json:"low"`
	High            string `json:"high"`
	Step            string `json:"step"`
	AllowedLost     string `json:"allowedLost,omitempty"`
	AllowedRepeated string `json:"allowedRepeated,omitempty"`
}

type dbChecksum struct {
	Method  string   `json:"method"`
	CRC     *dbCRC   `json:"crc,omitempty"`
	Feed    []dbFeed `json:"feed"`
	Counter string   `json:"counter,omitempty"`
}

type dbCRC struct {
	Name       string `json:"name"`
	Width      int    `json:"width"`
	Polynomial string `json:"polynomial"`
	Initial    string `json:"initial"`
	ReflectIn  bool   `json:"reflectedInput,omitempty"`
	ReflectOut bool   `json:"reflectedOutput,omitempty"`
	Final      string `json:"final"`
}

// dbFeed is one of: a constant byte, payload bytes first..last (last -1: to
// the end), or a table indexed by the counter.
type dbFeed struct {
	Byte  *int  `json:"byte,omitempty"`
	First *int  `json:"first,omitempty"`
	Last  *int  `json:"last,omitempty"`
	Table []int `json:"table,omitempty"`
}

type dbSelect struct {
	Selector  string     `json:"selector"`
	Branches  []dbBranch `json:"branches"`
	Otherwise string     `json:"otherwise"` // exhausted, nothing, unknown, branch
	Else      *dbBranch  `json:"else,omitempty"`
}

type dbBranch struct {
	Values  []string   `json:"values,omitempty"`
	Signals []string   `json:"signals,omitempty"`
	Selects []dbSelect `json:"selects,omitempty"`
}
