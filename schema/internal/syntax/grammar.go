package syntax

import (
	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// The grammar of the pieces that split.go cuts, for the parser library. Tokens
// are kept whole, so that every word has its span. These types don't leave
// this package: lower.go makes the tree of them.

type token = lexer.Token

type gTexts struct {
	Strings []token `parser:"@String*"`
}

type gQuantity struct {
	Minus  token `parser:"@\"-\"?"`
	Number token `parser:"@Number"`
	Unit   token `parser:"@Unit?"`
}

type gStep struct {
	Name token `parser:"@Word"`
	Key  token `parser:"( \"[\" @(Word | Number) \"]\" )?"`
}

type gPath struct {
	Steps []*gStep `parser:"@@ ( \".\" @@ )*"`
}

type gVersion struct {
	Word   token `parser:"@\"busloom\""`
	Number token `parser:"@Number"`
}

type gNetwork struct {
	Name  token   `parser:"\"network\" @Word"`
	Texts []token `parser:"@String*"`
}

type gUse struct {
	Path token `parser:"\"use\" @String"`
	As   token `parser:"( \"as\" @Word )?"`
}

type gBus struct {
	Name  token      `parser:"\"bus\" @Word"`
	Rate  gQuantity  `parser:"@@"`
	FD    *gQuantity `parser:"( \"fd\" @@ )?"`
	Texts []token    `parser:"@String*"`
}

type gECU struct {
	Name   token   `parser:"\"ecu\" @Word"`
	Buses  []token `parser:"\"on\" @Word ( \",\" @Word )*"`
	Source token   `parser:"( \"with\" \"source\" @Number )?"`
	Texts  []token `parser:"@String*"`
}

type gUnit struct {
	Name  token      `parser:"\"unit\" @Word"`
	Value *gQuantity `parser:"( \"=\" @@ )?"`
	Texts []token    `parser:"@String*"`
}

type gConst struct {
	Name  token   `parser:"\"const\" @Word"`
	Expr  gExpr   `parser:"\"=\" @@"`
	Texts []token `parser:"@String*"`
}

// gTableHead is codes or states up to the brace.
type gTableHead struct {
	Word  token   `parser:"@( \"codes\" | \"states\" )"`
	Name  token   `parser:"@Word"`
	ByTop token   `parser:"( @\"by\" \"top\" \"byte\" )?"`
	Texts []token `parser:"@String*"`
}

type gRaw struct {
	Ones  token `parser:"(   @\"ones\""`
	Less  token `parser:"    ( \"-\" @Number )?"`
	Value token `parser:"  | @Number )"`
}

type gRawRange struct {
	Low  gRaw  `parser:"@@"`
	High *gRaw `parser:"( \"..\" @@ )?"`
}

type gEntry struct {
	Raws  gRawRange `parser:"@@ \":\""`
	First token     `parser:"@Word"`
	Name  token     `parser:"@Word?"`
	Texts []token   `parser:"@String*"`
}

type gCurveHead struct {
	Name    token   `parser:"\"curve\" @Word"`
	From    token   `parser:"\"from\" @Unit"`
	To      token   `parser:"\"to\" @Unit"`
	Outside token   `parser:"\"outside\" @( \"hold\" | \"extend\" | \"none\" )"`
	Texts   []token `parser:"@String*"`
}

type gPoint struct {
	X gQuantity `parser:"@@ \":\""`
	Y gQuantity `parser:"@@"`
}

type gIDForm struct {
	Name   token           `parser:"\"idform\" @Word"`
	Bits   token           `parser:"@Number \"bits\""`
	Texts  []token         `parser:"@String*"`
	Fields []*gIDFormField `parser:"\"{\" @@ ( \",\" @@ )* \"}\""`
}

type gIDFormField struct {
	Name  token `parser:"@Word"`
	Width token `parser:"@Number"`
}

type gCRC struct {
	Name  token      `parser:"\"crc\" @Word"`
	Bits  token      `parser:"@Number \"bits\""`
	Texts []token    `parser:"@String*"`
	Items []*gCRCKey `parser:"\"{\" @@* \"}\""`
}

type gCRCKey struct {
	Key       token `parser:"(   @( \"polynomial\" | \"initial\" | \"final\" | \"check\" )"`
	Value     token `parser:"    @Number"`
	Reflected token `parser:"  | \"reflected\" @( \"input\" | \"output\" ) )"`
}

type gShapeHead struct {
	Name  token   `parser:"\"shape\" @Word"`
	Size  token   `parser:"@Number ( \"bytes\" | \"byte\" )"`
	Texts []token `parser:"@String*"`
}

type gID struct {
	Number token       `parser:"(   @Number"`
	Form   *gPath      `parser:"  | @@"`
	Fields []*gIDField `parser:"    \"(\" ( @@ ( \",\" @@ )* )? \")\" )"`
}

type gIDField struct {
	Name    token `parser:"@Word"`
	Usually token `parser:"@\"usually\"?"`
	Value   token `parser:"@Number"`
}

type gMessageHead struct {
	Name  token   `parser:"\"message\" @Word"`
	ID    gID     `parser:"@@"`
	Bus   token   `parser:"\"on\" @Word \",\""`
	FD    token   `parser:"@\"fd\"?"`
	Least token   `parser:"( @\"at\" \"least\" )?"`
	Size  token   `parser:"@Number ( \"bytes\" | \"byte\" )"`
	Texts []token `parser:"@String*"`
}

type gRun struct {
	Plus  token `parser:"@\"+\"?"`
	Heavy token `parser:"@Number"`
	To    token `parser:"( @\"..\""`
	Light token `parser:"  ( @Number | "`
	End   token `parser:"    @\"end\" ) )?"`
}

type gMember struct {
	Name    token      `parser:"@Word \"at\""`
	Runs    []*gRun    `parser:"@@ ( \"then\" @@ )*"`
	Clauses []*gClause `parser:"@@*"`
}

type gClause struct {
	Text      token       `parser:"(   @String"`
	Expr      *gExpr      `parser:"  | \"=\" @@"`
	In        token       `parser:"  | \"in\" @Unit"`
	Within    *gWithin    `parser:"  | @@"`
	Table     *gTable     `parser:"  | @@"`
	Initial   *gInitial   `parser:"  | @@"`
	Tolerance *gTolerance `parser:"  | @@"`
	Replaced  *gReplaced  `parser:"  | @@"`
	Note      *gNote      `parser:"  | @@"`
	Kind      *gKind      `parser:"  | @@ )"`
}

type gWithin struct {
	Word token     `parser:"@\"within\""`
	Low  gQuantity `parser:"@@ \"..\""`
	High gQuantity `parser:"@@"`
}

type gTable struct {
	Word    token     `parser:"@( \"codes\" | \"states\" )"`
	Open    token     `parser:"(   @\"{\""`
	Entries []*gEntry `parser:"    @@* \"}\""`
	Path    *gPath    `parser:"  | @@ )"`
}

type gInitial struct {
	Word  token      `parser:"@\"initial\""`
	Name  token      `parser:"(   @Word"`
	Value *gQuantity `parser:"  | @@ )"`
}

type gTolerance struct {
	Word  token     `parser:"@\"tolerance\""`
	Value gQuantity `parser:"@@"`
}

type gReplaced struct {
	Word token `parser:"@\"replaced\" \"by\""`
	Path gPath `parser:"@@"`
}

type gNote struct {
	Word token `parser:"@\"note\""`
	Key  token `parser:"@Word"`
	Text token `parser:"@String"`
}

type gKind struct {
	Simple   token     `parser:"(   @( \"signed\" | \"float\" | \"flag\" | \"bytes\" )"`
	Sign     token     `parser:"  | @\"sign\" \"magnitude\""`
	Packed   token     `parser:"  | @\"packed\" \"decimal\""`
	Text     token     `parser:"  | @\"text\""`
	Encoding token     `parser:"    @( \"ascii\" | \"utf8\" )"`
	Fill     token     `parser:"    ( \"fill\" @Number )?"`
	AlwaysAt token     `parser:"  | @\"always\""`
	Always   token     `parser:"    @Number"`
	Counter  *gCounter `parser:"  | @@"`
	Checksum *gMethod  `parser:"  | @@ )"`
}

type gCounter struct {
	Word     token `parser:"@\"counter\""`
	Low      token `parser:"@Number \"..\""`
	High     token `parser:"@Number"`
	Step     token `parser:"( \"step\" @Number )?"`
	Lost     token `parser:"( \"lost\" @Number \"allowed\" )?"`
	Repeated token `parser:"( \"repeated\" @Number \"allowed\" )?"`
}

type gMethod struct {
	Word    token    `parser:"@\"checksum\""`
	E2E     token    `parser:"(   @\"e2e\""`
	Profile token    `parser:"    \"profile\" @Number"`
	Mode    token    `parser:"    @Word? \",\""`
	IDs     []token  `parser:"    \"id\" @Number+ \",\""`
	Counter *gPath   `parser:"    \"counter\" @@"`
	Name    *gPath   `parser:"  | @@ \"over\""`
	Feeds   []*gFeed `parser:"    @@ ( \",\" @@ )* )"`
}

type gFeed struct {
	Const token `parser:"(   @Number"`
	Word  token `parser:"  | @( \"bytes\" | \"byte\" )"`
	First token `parser:"    @Number"`
	Last  token `parser:"    ( \"..\" ( @Number | "`
	End   token `parser:"             @\"end\" ) )? )"`
}

type gGroup struct {
	Name   token   `parser:"@Word"`
	Keys   []token `parser:"( \"[\" ( @Word ( \",\" @Word )* |"`
	Low    token   `parser:"        @Number"`
	High   token   `parser:"        \"..\" @Number ) \"]\" )?"`
	Shape  gPath   `parser:"\"is\" @@"`
	Origin token   `parser:"\"from\" \"byte\" @Number"`
	Step   token   `parser:"( \"step\" @Number )?"`
	Texts  []token `parser:"@String*"`
}

type gSelectHead struct {
	Word token `parser:"@\"select\""`
	Path gPath `parser:"@@"`
}

type gChoice struct {
	Name token      `parser:"(   @Word"`
	Raws *gRawRange `parser:"  | @@ )"`
}

type gWhenHead struct {
	Word    token      `parser:"@\"when\""`
	Choices []*gChoice `parser:"@@ ( \",\" @@ )*"`
}

type gOtherwise struct {
	Word token `parser:"\"otherwise\" @( \"nothing\" | \"unknown\" )"`
}

// gFact is any line of a body that begins with a word of its own.
type gFact struct {
	From     *gFrom     `parser:"(   @@"`
	Timing   *gTiming   `parser:"  | @@"`
	Fill     token      `parser:"  | \"fill\" @Number"`
	Default  *gPath     `parser:"  | \"default\" \"codes\" @@"`
	Unused   *gUnused   `parser:"  | @@"`
	Holds    *gHolds    `parser:"  | @@"`
	Relayed  *gRelayed  `parser:"  | @@"`
	Replaced *gReplaced `parser:"  | @@"`
	Note     *gNote     `parser:"  | @@ )"`
}

type gFrom struct {
	First     token   `parser:"\"from\" @Word"`
	Join      []token `parser:"( @( \",\" | \"or\" )"`
	Senders   []token `parser:"  @Word )*"`
	Receivers []token `parser:"( \"to\" @Word ( \",\" @Word )* )?"`
}

type gTiming struct {
	Every   *gQuantity `parser:"(   \"every\" @@"`
	OrWord  token      `parser:"    ( \"or\" \"on\" @( \"change\" | \"request\" ) )?"`
	OnWord  token      `parser:"  | \"on\" @( \"change\" | \"request\" ) )"`
	Clauses []*gWait   `parser:"( \",\" @@ )*"`
}

type gWait struct {
	Gap  *gQuantity `parser:"(   \"at\" \"least\" @@ \"apart\""`
	Lost *gQuantity `parser:"  | \"lost\" \"after\" @@ )"`
}

type gUnused struct {
	Runs []*gRun `parser:"\"unused\" @@ ( \",\" @@ )*"`
}

type gHolds struct {
	Shape  gPath `parser:"\"holds\" @@"`
	Origin token `parser:"\"from\" \"byte\" @Number"`
}

type gRelayed struct {
	By token `parser:"\"relayed\" \"by\" @Word"`
	To token `parser:"\"to\" @Word"`
	As *gID  `parser:"( \"as\" @@ )?"`
}

// whole names every production once, so that the library builds them all.
type whole struct {
	Version    *gVersion     `parser:"  @@"`
	Network    *gNetwork     `parser:"| @@"`
	Use        *gUse         `parser:"| @@"`
	Bus        *gBus         `parser:"| @@"`
	ECU        *gECU         `parser:"| @@"`
	Unit       *gUnit        `parser:"| @@"`
	Const      *gConst       `parser:"| @@"`
	TableHead  *gTableHead   `parser:"| @@"`
	Entry      *gEntry       `parser:"| @@"`
	CurveHead  *gCurveHead   `parser:"| @@"`
	Point      *gPoint       `parser:"| @@"`
	IDForm     *gIDForm      `parser:"| @@"`
	CRC        *gCRC         `parser:"| @@"`
	ShapeHead  *gShapeHead   `parser:"| @@"`
	Message    *gMessageHead `parser:"| @@"`
	Member     *gMember      `parser:"| @@"`
	Group      *gGroup       `parser:"| @@"`
	SelectHead *gSelectHead  `parser:"| @@"`
	When       *gWhenHead    `parser:"| @@"`
	Otherwise  *gOtherwise   `parser:"| @@"`
	Fact       *gFact        `parser:"| @@"`
}

// parsers has one parser for each kind of piece.
type parsers struct {
	version   *participle.Parser[gVersion]
	network   *participle.Parser[gNetwork]
	use       *participle.Parser[gUse]
	bus       *participle.Parser[gBus]
	ecu       *participle.Parser[gECU]
	unit      *participle.Parser[gUnit]
	constant  *participle.Parser[gConst]
	table     *participle.Parser[gTableHead]
	entry     *participle.Parser[gEntry]
	curve     *participle.Parser[gCurveHead]
	point     *participle.Parser[gPoint]
	idform    *participle.Parser[gIDForm]
	crc       *participle.Parser[gCRC]
	shape     *participle.Parser[gShapeHead]
	message   *participle.Parser[gMessageHead]
	member    *participle.Parser[gMember]
	group     *participle.Parser[gGroup]
	selectP   *participle.Parser[gSelectHead]
	when      *participle.Parser[gWhenHead]
	otherwise *participle.Parser[gOtherwise]
	fact      *participle.Parser[gFact]
}

func newParsers() (*parsers, error) {
	p, err := participle.Build[whole](participle.Lexer(definition{}), participle.UseLookahead(1), participle.Elide("Comment"))
	if err != nil {
		return nil, err
	}
	out := &parsers{}
	for _, e := range []error{
		production(p, &out.version), production(p, &out.network), production(p, &out.use), production(p, &out.bus),
		production(p, &out.ecu), production(p, &out.unit), production(p, &out.constant), production(p, &out.table),
		production(p, &out.entry), production(p, &out.curve), production(p, &out.point), production(p, &out.idform),
		production(p, &out.crc), production(p, &out.shape), production(p, &out.message), production(p, &out.member),
		production(p, &out.group), production(p, &out.selectP), production(p, &out.when), production(p, &out.otherwise),
		production(p, &out.fact),
	} {
		if e != nil {
			return nil, e
		}
	}
	return out, nil
}

func production[T any](p *participle.Parser[whole], to **participle.Parser[T]) (err error) {
	*to, err = participle.ParserForProduction[T](p)
	return err
}
