package syntax

import (
	"github.com/alecthomas/participle/v2"
	"github.com/alecthomas/participle/v2/lexer"
)

// The grammar for the parser library. Tokens are kept whole, so that every
// word has its span. Words of the language are written with their token type:
// the same word as a member's name is of another type. The productions that
// occur most are read by hand (leaves.go, expr.go). None of these types leaves
// the package: lower.go makes the tree of them.

type token = lexer.Token

type gVersion struct {
	Number token `parser:"\"busloom\":Word @Number"`
}

type gNetwork struct {
	Name token  `parser:"\"network\":Word @Word"`
	Text gTexts `parser:"@@"`
}

type gUse struct {
	Path token `parser:"\"use\":Word @String"`
	As   token `parser:"( \"as\":Word @Word )?"`
}

type gDecl struct {
	Bus     *gBus     `parser:"(   @@"`
	ECU     *gECU     `parser:"  | @@"`
	Unit    *gUnit    `parser:"  | @@"`
	Const   *gConst   `parser:"  | @@"`
	Table   *gTable   `parser:"  | @@"`
	Curve   *gCurve   `parser:"  | @@"`
	IDForm  *gIDForm  `parser:"  | @@"`
	CRC     *gCRC     `parser:"  | @@"`
	Shape   *gShape   `parser:"  | @@"`
	Message *gMessage `parser:"  | @@ )"`
}

type gBus struct {
	Name token      `parser:"\"bus\":Word @Word"`
	Rate gQuantity  `parser:"@@"`
	FD   *gQuantity `parser:"( \"fd\":Word @@ )?"`
	Text gTexts     `parser:"@@"`
}

type gECU struct {
	Name   token  `parser:"\"ecu\":Word @Word"`
	Buses  gNames `parser:"\"on\":Word @@"`
	Source token  `parser:"( \"with\":Word \"source\":Word @Number )?"`
	Text   gTexts `parser:"@@"`
}

type gUnit struct {
	Name  token      `parser:"\"unit\":Word @Word"`
	Value *gQuantity `parser:"( \"=\" @@ )?"`
	Text  gTexts     `parser:"@@"`
}

type gConst struct {
	Name token  `parser:"\"const\":Word @Word"`
	Expr *gExpr `parser:"\"=\" @@"`
	Text gTexts `parser:"@@"`
}

type gTable struct {
	Word    token     `parser:"@( \"codes\":Word | \"states\":Word )"`
	Name    token     `parser:"@Word"`
	ByTop   token     `parser:"( @\"by\":Word \"top\":Word \"byte\":Word )?"`
	Text    gTexts    `parser:"@@"`
	Entries []*gEntry `parser:"\"{\" @@* \"}\""`
}

type gEntry struct {
	Raws  gRaws  `parser:"@@ \":\""`
	First token  `parser:"@Word"`
	Name  token  `parser:"@Word?"`
	Text  gTexts `parser:"@@"`
}

type gCurve struct {
	Name    token     `parser:"\"curve\":Word @Word"`
	From    gUnitRef  `parser:"\"from\":Word @@"`
	To      gUnitRef  `parser:"\"to\":Word @@"`
	Outside token     `parser:"\"outside\":Word @( \"hold\":Word | \"extend\":Word | \"none\":Word )"`
	Text    gTexts    `parser:"@@"`
	Points  []*gPoint `parser:"\"{\" @@* \"}\""`
}

type gPoint struct {
	X gValue `parser:"@@ \":\""`
	Y gValue `parser:"@@"`
}

type gIDForm struct {
	Name   token           `parser:"\"idform\":Word @Word"`
	Bits   token           `parser:"@Number \"bits\":Word"`
	Text   gTexts          `parser:"@@"`
	Fields []*gIDFormField `parser:"\"{\" @@ ( \",\" @@ )* \"}\""`
}

type gIDFormField struct {
	Name  token `parser:"@Word"`
	Width token `parser:"@Number"`
}

type gCRC struct {
	Name  token       `parser:"\"crc\":Word @Word"`
	Bits  token       `parser:"@Number \"bits\":Word"`
	Text  gTexts      `parser:"@@"`
	Items []*gCRCItem `parser:"\"{\" @@* \"}\""`
}

type gCRCItem struct {
	Key       token `parser:"(   @( \"polynomial\":Word | \"initial\":Word | \"final\":Word | \"check\":Word )"`
	Value     token `parser:"    @Number"`
	Reflected token `parser:"  | \"reflected\":Word @( \"input\":Word | \"output\":Word ) )"`
}

type gShape struct {
	Name token  `parser:"\"shape\":Word @Word"`
	Size token  `parser:"@Number ( \"bytes\":Word | \"byte\" )"`
	Text gTexts `parser:"@@"`
	Body gBody  `parser:"@@"`
}

type gMessage struct {
	Name  token  `parser:"\"message\":Word @Word"`
	ID    gID    `parser:"@@"`
	Bus   token  `parser:"\"on\":Word @Word \",\""`
	FD    token  `parser:"@\"fd\":Word?"`
	Least token  `parser:"( @\"at\" \"least\":Word )?"`
	Size  token  `parser:"@Number ( \"bytes\":Word | \"byte\" )"`
	Text  gTexts `parser:"@@"`
	Body  gBody  `parser:"@@"`
}

type gID struct {
	Number token       `parser:"(   @Number"`
	Form   *gPath      `parser:"  | @@"`
	Fields []*gIDField `parser:"    \"(\" ( @@ ( \",\" @@ )* )?"`
	Close  token       `parser:"    @\")\" )"`
}

type gIDField struct {
	Name    token `parser:"@Word"`
	Usually token `parser:"@\"usually\":Word?"`
	Value   token `parser:"@Number"`
}

type gBody struct {
	Open  token    `parser:"@\"{\""`
	Items []*gItem `parser:"@@*"`
	Close token    `parser:"@\"}\""`
}

type gItem struct {
	Begins   gItemBegins `parser:"@@"`
	Member   *gMember    `parser:"(   @@"`
	Group    *gGroup     `parser:"  | @@"`
	Select   *gSelect    `parser:"  | @@"`
	From     *gFrom      `parser:"  | @@"`
	Timing   *gTiming    `parser:"  | @@"`
	Unused   *gUnused    `parser:"  | @@"`
	Fill     *gFill      `parser:"  | @@"`
	Default  *gDefault   `parser:"  | @@"`
	Holds    *gHolds     `parser:"  | @@"`
	Relayed  *gRelayed   `parser:"  | @@"`
	Replaced *gReplaced  `parser:"  | @@"`
	Note     *gNote      `parser:"  | @@ )"`
}

type gMember struct {
	Name    token      `parser:"@Member \"at\":Keyword"`
	Place   gPlace     `parser:"@@"`
	Clauses []*gClause `parser:"@@*"`
	Text    gTexts     `parser:"@@"`
}

// gClause is any clause of a member, the usual ones first. Begins keeps its
// first token, so that most clauses need no more than their word to be told
// apart.
type gClause struct {
	Begins    gClauseBegins `parser:"@@"`
	Expr      *gExpr        `parser:"(   \"=\" @@"`
	Within    *gWithin      `parser:"  | \"within\":Word @@"`
	Table     *gUsed        `parser:"  | ( \"codes\":Word | \"states\":Word ) @@"`
	Initial   *gInitial     `parser:"  | \"initial\":Word @@"`
	In        *gUnitRef     `parser:"  | \"in\":Word @@"`
	Tolerance *gQuantity    `parser:"  | \"tolerance\":Word @@"`
	Replaced  *gPath        `parser:"  | \"replaced\":Word \"by\":Word @@"`
	Kind      *gKind        `parser:"  | @@"`
	Note      *gNote        `parser:"  | @@ )"`
}

type gWithin struct {
	Low  gQuantity `parser:"@@ \"..\""`
	High gQuantity `parser:"@@"`
}

// gUsed is a member's codes or states, behind that word.
type gUsed struct {
	Open    token     `parser:"(   @\"{\""`
	Entries []*gEntry `parser:"    @@*"`
	Close   token     `parser:"    @\"}\""`
	Path    *gPath    `parser:"  | @@ )"`
}

type gInitial struct {
	Name  token      `parser:"(   @Word"`
	Value *gQuantity `parser:"  | @@ )"`
}

type gReplaced struct {
	Word token `parser:"@\"replaced\":Word \"by\":Word"`
	Path gPath `parser:"@@"`
}

type gNote struct {
	Word token `parser:"@\"note\":Word"`
	Key  token `parser:"@Word"`
	Text token `parser:"@String"`
}

type gKind struct {
	Simple   token     `parser:"(   @( \"signed\":Word | \"float\":Word | \"flag\":Word | \"bytes\":Word )"`
	Two      token     `parser:"  | @\"sign\":Word"`
	Second   token     `parser:"    @\"magnitude\":Word"`
	Packed   token     `parser:"  | @\"packed\":Word"`
	Decimal  token     `parser:"    @\"decimal\":Word"`
	Counter  *gCounter `parser:"  | @@"`
	Checksum *gMethod  `parser:"  | @@"`
	AlwaysAt token     `parser:"  | @\"always\":Word"`
	Always   token     `parser:"    @Number"`
	Text     token     `parser:"  | @\"text\":Word"`
	Encoding token     `parser:"    @( \"ascii\":Word | \"utf8\":Word )"`
	Fill     token     `parser:"    ( \"fill\":Word @Number )? )"`
}

type gCounter struct {
	Word     token `parser:"@\"counter\":Word"`
	Low      token `parser:"@Number \"..\""`
	High     token `parser:"@Number"`
	Step     token `parser:"( \"step\":Word @Number )?"`
	Lost     token `parser:"( \"lost\":Word @Number"`
	LostEnd  token `parser:"  @\"allowed\":Word )?"`
	Repeated token `parser:"( \"repeated\":Word @Number"`
	RepEnd   token `parser:"  @\"allowed\":Word )?"`
}

type gMethod struct {
	Word    token    `parser:"@\"checksum\":Word"`
	E2E     token    `parser:"(   (?= \"e2e\":Word \"profile\":Word ) @\"e2e\":Word"`
	Profile token    `parser:"    \"profile\":Word @Number"`
	Mode    token    `parser:"    @( \"both\":Word | \"alternating\":Word | \"low\":Word | \"nibble\":Word )? \",\""`
	IDs     gNumbers `parser:"    \"id\":Word @@ \",\""`
	Counter *gPath   `parser:"    \"counter\":Word @@"`
	Name    *gPath   `parser:"  | @@ \"over\":Word"`
	Feeds   []*gFeed `parser:"    @@ ( \",\" @@ )* )"`
}

type gFeed struct {
	Const token `parser:"(   @Number"`
	Word  token `parser:"  | @( \"bytes\":Word | \"byte\":Word )"`
	First token `parser:"    @Number"`
	Last  token `parser:"    ( \"..\" ( @Number | "`
	End   token `parser:"             @\"end\":Word ) )? )"`
}

type gGroup struct {
	Name   token  `parser:"@Group"`
	Keys   gNames `parser:"( \"[\" ( @@ |"`
	Low    token  `parser:"        @Number"`
	High   token  `parser:"        \"..\" @Number ) \"]\" )?"`
	Shape  gPath  `parser:"\"is\":Keyword @@"`
	Origin token  `parser:"\"from\":Word \"byte\":Word @Number"`
	Step   token  `parser:"( \"step\":Word @Number )?"`
	Text   gTexts `parser:"@@"`
}

type gSelect struct {
	Word     token      `parser:"@\"select\":Word"`
	Path     gPath      `parser:"@@ \"{\""`
	Branches []*gBranch `parser:"@@*"`
	Close    token      `parser:"@\"}\""`
}

type gBranch struct {
	When      token      `parser:"(   @\"when\":Word"`
	Choices   []*gChoice `parser:"    @@ ( \",\" @@ )*"`
	Body      *gBody     `parser:"    @@"`
	Otherwise token      `parser:"  | @\"otherwise\":Word"`
	Word      token      `parser:"    (   @( \"nothing\":Word | \"unknown\":Word )"`
	Else      *gBody     `parser:"      | @@ ) )"`
}

type gChoice struct {
	Name token  `parser:"(   @Word"`
	Raws *gRaws `parser:"  | @@ )"`
}

type gFrom struct {
	Word      token    `parser:"@\"from\":Word"`
	Senders   gSenders `parser:"@@"`
	Receivers gNames   `parser:"( \"to\":Word @@ )?"`
}

type gTiming struct {
	EveryAt token      `parser:"(   @\"every\":Word"`
	Every   *gQuantity `parser:"    @@"`
	OrWord  token      `parser:"    ( \"or\":Word \"on\":Word @( \"change\":Word | \"request\":Word ) )?"`
	OnAt    token      `parser:"  | @\"on\":Word"`
	OnWord  token      `parser:"    @( \"change\":Word | \"request\":Word ) )"`
	Waits   []*gWait   `parser:"( \",\" @@ )*"`
}

type gWait struct {
	Gap   *gQuantity `parser:"(   \"at\" \"least\":Word @@"`
	Apart token      `parser:"    @\"apart\":Word"`
	Lost  *gQuantity `parser:"  | \"lost\":Word \"after\":Word @@ )"`
}

type gFill struct {
	Word  token `parser:"@\"fill\":Word"`
	Value token `parser:"@Number"`
}

type gDefault struct {
	Word token `parser:"@\"default\":Word \"codes\":Word"`
	Path gPath `parser:"@@"`
}

type gUnused struct {
	Word token  `parser:"@\"unused\":Word"`
	Runs []gRun `parser:"@@ ( \",\" @@ )*"`
}

type gHolds struct {
	Word   token `parser:"@\"holds\":Word"`
	Shape  gPath `parser:"@@"`
	Origin token `parser:"\"from\":Word \"byte\":Word @Number"`
}

type gRelayed struct {
	Word token `parser:"@\"relayed\":Word \"by\":Word"`
	By   token `parser:"@Word"`
	To   token `parser:"\"to\":Word @Word"`
	As   *gID  `parser:"( \"as\":Word @@ )?"`
}

// whole names what is parsed by itself, so that the library builds it all.
type whole struct {
	Version *gVersion `parser:"  @@"`
	Network *gNetwork `parser:"| @@"`
	Use     *gUse     `parser:"| @@"`
	Decl    *gDecl    `parser:"| @@"`
	Entry   *gEntry   `parser:"| @@"`
	Point   *gPoint   `parser:"| @@"`
	Item    *gItem    `parser:"| @@"`
	Clause  *gClause  `parser:"| @@"`
	Branch  *gBranch  `parser:"| @@"`
}

// parsers has one parser for each kind of piece.
type parsers struct {
	version *participle.Parser[gVersion]
	network *participle.Parser[gNetwork]
	use     *participle.Parser[gUse]
	decl    *participle.Parser[gDecl]
	entry   *participle.Parser[gEntry]
	point   *participle.Parser[gPoint]
	item    *participle.Parser[gItem]
	clause  *participle.Parser[gClause]
	branch  *participle.Parser[gBranch]
}

func newParsers() (*parsers, error) {
	p, err := participle.Build[whole](participle.Lexer(definition{}), participle.UseLookahead(0))
	if err != nil {
		return nil, err
	}
	out := &parsers{}
	for _, e := range []error{
		production(p, &out.version), production(p, &out.network), production(p, &out.use), production(p, &out.decl),
		production(p, &out.entry), production(p, &out.point), production(p, &out.item), production(p, &out.clause),
		production(p, &out.branch),
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
