package schema

import (
	"fmt"
	"strings"

	"busloom/crc"
	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// Compile reads the description at root with all it uses and proves it. The
// network is nil if the list has errors.
func Compile(files Files, root string) (*Network, *diag.List) {
	c := &compiler{
		list: &diag.List{}, files: files, net: &Network{},
		reported:     map[problemKey]bool{},
		sources:      map[string]*source{},
		symbols:      map[symbolKey]*symbol{},
		units:        unit.NewTable(),
		unitCache:    map[string]unitResult{},
		broken:       map[*syntax.Member]bool{},
		misplaced:    map[*syntax.Member]bool{},
		inlineTables: map[*syntax.TableClause]*table{},
	}
	c.readFiles(root)
	if c.root == nil {
		return nil, c.list
	}
	for _, pass := range passes {
		pass(c)
	}
	if c.list.Failed() {
		return nil, c.list
	}
	c.noteUnused()
	return c.net, c.list
}

// passes turn the trees into the network, in this order. Each relies on what
// the ones before it have proven, and leaves out what they found broken, so
// that one mistake gives one diagnostic.
var passes = []func(*compiler){
	(*compiler).declareNames,    // every declaration gets a symbol; clashes of names
	(*compiler).defineUnits,     // units, in whatever order they need each other
	(*compiler).defineConstants, // constants, likewise
	(*compiler).defineCurves,    // curves: units, order, monotony
	(*compiler).defineTables,    // codes and states, as far as no width is needed
	(*compiler).defineCRCs,      // parameters, check values
	(*compiler).defineIDForms,   // fields that add up
	(*compiler).defineBuses,     // bit rates
	(*compiler).defineECUs,      // their buses and source addresses
	(*compiler).checkShapes,     // shapes on their own: rings, members, layout
	(*compiler).compileMessages, // each message: see compileMessage
	(*compiler).checkReplaced,   // where replacements lead
	(*compiler).relayMessages,   // a copy for each further bus
	(*compiler).checkIDs,        // identifiers of one bus are disjoint
	(*compiler).checkLoad,       // cyclic traffic fits the bus
	(*compiler).checkGenerated,  // names that are one in generated code
}

// compiler is the state of one compilation.
type compiler struct {
	list     *diag.List
	reported map[problemKey]bool
	files    Files
	net      *Network

	root    *source
	order   []*source // used files before their users
	sources map[string]*source
	loading []*source // files whose used files are being read
	// damaged is set when a part of a text couldn't be read: what is missing
	// may be there, so missing names are no news.
	damaged bool

	symbols      map[symbolKey]*symbol
	units        *unit.Table
	unitCache    map[string]unitResult
	inlineTables map[*syntax.TableClause]*table
	messages     []*draft
	broken       map[*syntax.Member]bool // members of shapes with a mistake in them
	misplaced    map[*syntax.Member]bool // those of them without a legal place
	searches     int                     // for similar names, each of which costs
}

type problemKey struct {
	code diag.Code
	span diag.Span
}

// report adds a problem unless the same one is known already: a member of a
// shape is checked wherever the shape is used.
func (c *compiler) report(code diag.Code, span diag.Span, problem, remedy string) *diag.Diagnostic {
	key := problemKey{code, span}
	if c.reported[key] {
		return &diag.Diagnostic{} // decorated in vain
	}
	c.reported[key] = true
	return c.list.Report(code, span, problem, remedy)
}

// mostSearches bounds the search for similar names, whose cost grows with the
// number of names: after so many mistakes suggestions end.
const mostSearches = 200

func (c *compiler) nearest(wanted string, names []string) string {
	if c.searches++; c.searches > mostSearches {
		return ""
	}
	return diag.Nearest(wanted, names)
}

// defineCRCs checks the declared checksum methods.
func (c *compiler) defineCRCs() {
	eachDecl(c, func(src *source, d *syntax.CRCDecl) {
		sym := c.own(src, nsCRC, d.Name)
		if sym == nil {
			return
		}
		width, ok := wholeBelow(d.Bits, 65)
		if !ok || width == 0 {
			c.report(diag.BadCRC, d.Bits.Span, fmt.Sprintf("a CRC has 1 to 64 bits, not %s", d.Bits.Raw), "write its width in bits")
			return
		}
		p := &crc.Params{Name: d.Name.Text, Width: int(width), ReflectIn: d.ReflectIn, ReflectOut: d.ReflectOut}
		if d.Polynomial == nil && src.damaged {
			return
		}
		if d.Polynomial == nil {
			c.report(diag.BadCRC, d.Name.Span, fmt.Sprintf("%s has no polynomial", d.Name.Text), "write polynomial with its value, the top bit left out")
			return
		}
		var check uint64
		for _, f := range []struct {
			what   string
			number *syntax.Number
			to     *uint64
		}{{"polynomial", d.Polynomial, &p.Poly}, {"initial value", d.Initial, &p.Init}, {"final value", d.Final, &p.XorOut}, {"check value", d.Check, &check}} {
			if f.number == nil {
				continue
			}
			v, ok := whole(*f.number)
			if !ok || (width < 64 && v>>width != 0) {
				c.report(diag.BadCRC, f.number.Span, fmt.Sprintf("the %s %s doesn't fit into %d bits", f.what, f.number.Raw, width),
					fmt.Sprintf("write a whole number up to 0x%X", ^uint64(0)>>(64-width)))
				return
			}
			*f.to = v
		}
		if err := p.Validate(); err != nil {
			c.report(diag.BadCRC, d.Polynomial.Span, err.Error(), "write the polynomial heaviest bit first, its top bit left out")
			return
		}
		if d.Check != nil {
			if got := crc.New(*p).Checksum([]byte("123456789")); got != check {
				c.report(diag.CRCCheckFails, d.Check.Span,
					fmt.Sprintf("these parameters give 0x%0*X for the digits 1 to 9, not %s", (width+3)/4, got, d.Check.Raw),
					"compare polynomial, initial, final and reflected with the source of the check value")
				return
			}
		}
		sym.crc = p
	})
}

// whole is a number's value if it is a whole one of 64 bits.
func whole(n syntax.Number) (uint64, bool) {
	if n.Value == nil || !n.Value.IsInt() || !n.Value.Num().IsUint64() {
		return 0, false
	}
	return n.Value.Num().Uint64(), true
}

// wholeBelow is whole for values below the limit.
func wholeBelow(n syntax.Number, limit uint64) (uint64, bool) {
	v, ok := whole(n)
	return v, ok && v < limit
}

// counted is "1 byte" or "2 bytes".
func counted(n int, word string) string {
	if n == 1 {
		return "1 " + word
	}
	return fmt.Sprintf("%d %ss", n, word)
}

// listed is "a, b and c".
func listed(words []string) string {
	if len(words) < 2 {
		return strings.Join(words, "")
	}
	return strings.Join(words[:len(words)-1], ", ") + " and " + words[len(words)-1]
}
