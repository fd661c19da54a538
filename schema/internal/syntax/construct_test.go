package syntax

import (
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// parsed reads a text without mistakes.
func parsed(t *testing.T, text string) *File {
	list := &diag.List{}
	f := Parse(diag.NewFile("a.bus", []byte("busloom 1\n"+text)), list)
	require.Empty(t, list.Sorted())
	return f
}

func TestDeclarations(t *testing.T) {
	f := parsed(t, `network Heron "Delivery " "van"
use "a.bus"
use "b.bus" as b
bus chassis 500 kbit/s fd 2 Mbit/s "Brakes"
ecu Gateway on chassis, body with source 0x27
unit stroke = 20 mm
const k = -(2 + 3) * a.b
codes Top by top byte { 0xF0..ones - 1: fault sensor "x"  ones: absent }
states Lamp { 0: off }
curve Ntc from V/% to m/s^2 outside extend { -1: 2  3: -4.5 }
idform F 29 bits { a 3, b 26 }
crc C 8 bits { polynomial 0x1D  reflected output }
shape S 3 bytes { }
message M a.F(a usually 3, b 0x1) on chassis, fd at least 16 bytes { }
message N 0x1A0 on body, 1 byte { }
`)
	require.Equal(t, "Heron", f.Network.Name.Text)
	require.Equal(t, "Delivery van", f.Network.Text.Value)
	require.Equal(t, []string{"Delivery ", "van"}, f.Network.Text.Parts)
	require.Nil(t, f.Uses[0].As)
	require.Equal(t, "b", f.Uses[1].As.Text)

	bus := f.Decls[0].(*BusDecl)
	require.Equal(t, "500 kbit/s", bus.Rate.Span.Text())
	require.Equal(t, "Mbit/s", bus.FD.Unit.Text)
	ecu := f.Decls[1].(*ECUDecl)
	require.Len(t, ecu.Buses, 2)
	require.Equal(t, "39", ecu.Source.Value.RatString())
	require.Equal(t, "20", f.Decls[2].(*UnitDecl).Value.Value().RatString())

	// A minus sign binds to its factor alone.
	product := f.Decls[3].(*ConstDecl).Expr.(*Operation)
	require.Equal(t, byte('*'), product.Op)
	require.Equal(t, "(2 + 3)", product.Left.(*Negation).Operand.ExprSpan().Text())
	require.Len(t, product.Right.(*Reference).Path.Steps, 2)

	top := f.Decls[4].(*TableDecl)
	require.True(t, top.ByTopByte)
	require.False(t, top.States)
	require.Equal(t, "0xF0..ones - 1", top.Entries[0].Raws.Span.Text())
	require.True(t, top.Entries[0].Raws.High.Ones)
	require.Equal(t, "1", top.Entries[0].Raws.High.Number.Raw)
	require.Equal(t, "fault", top.Entries[0].Class.Text)
	require.Equal(t, "sensor", top.Entries[0].Name.Text)
	require.Nil(t, top.Entries[1].Raws.Low.Number)
	lamp := f.Decls[5].(*TableDecl)
	require.True(t, lamp.States)
	require.Empty(t, lamp.Entries[0].Class.Text)

	curve := f.Decls[6].(*CurveDecl)
	require.Equal(t, "V/%", curve.From.Text)
	require.Equal(t, "m/s^2", curve.To.Text)
	require.Equal(t, "extend", curve.Outside.Text)
	require.Equal(t, "-9/2", curve.Points[1].Y.Value().RatString())
	require.Equal(t, "26", f.Decls[7].(*IDFormDecl).Fields[1].Width.Raw)
	crc := f.Decls[8].(*CRCDecl)
	require.True(t, crc.ReflectOut)
	require.False(t, crc.ReflectIn)
	require.Nil(t, crc.Initial)

	m := f.Decls[10].(*MessageDecl)
	require.True(t, m.FD)
	require.True(t, m.AtLeast)
	require.Nil(t, m.ID.Number)
	require.Equal(t, "a.F(a usually 3, b 0x1)", m.ID.Span.Text())
	require.True(t, m.ID.Fields[0].Usually)
	require.False(t, m.ID.Fields[1].Usually)
	n := f.Decls[11].(*MessageDecl)
	require.False(t, n.FD || n.AtLeast)
	require.Equal(t, "0x1A0", n.ID.Number.Raw)
	require.Equal(t, "message N", n.Head().Text())
	require.Equal(t, "message N 0x1A0 on body, 1 byte { }", n.Whole().Text())
}

func items(t *testing.T, body string) []Item {
	return parsed(t, "message M 0x100 on b, 8 bytes {\n"+body+"\n}").Decls[0].(*MessageDecl).Body.Items
}

func TestFacts(t *testing.T) {
	for text, check := range map[string]func(t *testing.T, i Item){
		"from any to A": func(t *testing.T, i Item) {
			f := i.(*FromFact)
			require.True(t, f.Any)
			require.Empty(t, f.Senders)
			require.Len(t, f.Receivers, 1)
		},
		"from any, B": func(t *testing.T, i Item) {
			require.False(t, i.(*FromFact).Any)
			require.Len(t, i.(*FromFact).Senders, 2)
		},
		"from A or B": func(t *testing.T, i Item) { require.True(t, i.(*FromFact).OneFitted) },
		"from A, B":   func(t *testing.T, i Item) { require.False(t, i.(*FromFact).OneFitted) },
		"every 10 ms or on change, lost after 1 s, at least 5 ms apart": func(t *testing.T, i Item) {
			f := i.(*TimingFact)
			require.Equal(t, "10 ms", f.Every.Span.Text())
			require.Equal(t, "1 s", f.Lost.Span.Text())
			require.Equal(t, "5 ms", f.Gap.Span.Text())
			require.True(t, f.OnChange)
			require.False(t, f.OnRequest)
		},
		"on request": func(t *testing.T, i Item) {
			require.True(t, i.(*TimingFact).OnRequest)
			require.Nil(t, i.(*TimingFact).Every)
		},
		"fill 0xFF":                func(t *testing.T, i Item) { require.Equal(t, "0xFF", i.(*FillFact).Value.Raw) },
		"default codes a.Top":      func(t *testing.T, i Item) { require.Len(t, i.(*DefaultCodesFact).Path.Steps, 2) },
		"unused 1.7..1.6, +3.0":    func(t *testing.T, i Item) { require.True(t, i.(*UnusedFact).Runs[1].Relative) },
		"holds S from byte 2":      func(t *testing.T, i Item) { require.Equal(t, "2", i.(*HoldsFact).Origin.Raw) },
		"relayed by A to b as F()": func(t *testing.T, i Item) { require.Equal(t, "F()", i.(*RelayedFact).As.Span.Text()) },
		"replaced by M.a[x].b":     func(t *testing.T, i Item) { require.Equal(t, "x", i.(*ReplacedFact).Path.Steps[1].Key.Text) },
		`note req "BRK-1"`:         func(t *testing.T, i Item) { require.Equal(t, "BRK-1", i.(*Note).Text.Value) },
		"w is S from byte 1":       func(t *testing.T, i Item) { require.Empty(t, i.(*Group).Keys) },
		"w[a, b] is S from byte 1": func(t *testing.T, i Item) { require.Len(t, i.(*Group).Keys, 2) },
		"w[0..3] is a.S from byte 1 step 2 \"x\"": func(t *testing.T, i Item) {
			g := i.(*Group)
			require.Equal(t, "3", g.High.Raw)
			require.Equal(t, "2", g.Step.Raw)
			require.Equal(t, "x", g.Text.Value)
		},
		"select a { when 0, 2..3, on { x at 1.1 } otherwise { y at 1.1 } }": func(t *testing.T, i Item) {
			s := i.(*Select)
			require.Len(t, s.Whens[0].Choices, 3)
			require.Equal(t, "2..3", s.Whens[0].Choices[1].Raws.Span.Text())
			require.Equal(t, "on", s.Whens[0].Choices[2].Name.Text)
			require.Empty(t, s.Otherwise.Word)
			require.Len(t, s.Otherwise.Body.Items, 1)
			require.Equal(t, "otherwise { y at 1.1 }", s.Otherwise.Whole.Text())
		},
		"select a[b].c { otherwise unknown }": func(t *testing.T, i Item) { require.Equal(t, "unknown", i.(*Select).Otherwise.Word) },
	} {
		t.Run(text, func(t *testing.T) {
			list := items(t, text)
			require.Len(t, list, 1)
			require.Equal(t, text, list[0].ItemSpan().Text())
			check(t, list[0])
		})
	}
}

func TestMemberClauses(t *testing.T) {
	for text, check := range map[string]func(t *testing.T, m *Member){
		"a at 0.7..1.0": func(t *testing.T, m *Member) {
			require.Equal(t, BitRef{Byte: 1, Bit: 0, Span: m.Place.Runs[0].Light.Span}, *m.Place.Runs[0].Light)
			require.Nil(t, m.Kind)
			require.Nil(t, m.Expr)
		},
		"a at +0.1..0.0 then +4.7": func(t *testing.T, m *Member) {
			require.Len(t, m.Place.Runs, 2)
			require.Nil(t, m.Place.Runs[1].Light)
			require.Equal(t, "+4.7", m.Place.Runs[1].Span.Text())
		},
		"a at 2.7..end text ascii fill 0x20": func(t *testing.T, m *Member) {
			require.True(t, m.Place.Runs[0].End)
			require.Equal(t, "ascii", m.Kind.Encoding)
			require.Equal(t, "0x20", m.Kind.Fill.Raw)
		},
		"a at 0.7 signed":         func(t *testing.T, m *Member) { require.Equal(t, "signed", m.Kind.Word) },
		"a at 0.7 sign magnitude": func(t *testing.T, m *Member) { require.Equal(t, "sign magnitude", m.Kind.Word) },
		"a at 0.7 packed decimal": func(t *testing.T, m *Member) { require.Equal(t, "packed decimal", m.Kind.Word) },
		"a at 0.7 always 0b101":   func(t *testing.T, m *Member) { require.Equal(t, "5", m.Kind.Always.Value.RatString()) },
		"a at 0.7 counter 0..14":  func(t *testing.T, m *Member) { require.Nil(t, m.Kind.Step) },
		"a at 0.7 counter 0..14 step 2 lost 3 allowed repeated 4 allowed": func(t *testing.T, m *Member) {
			require.Equal(t, "23", m.Kind.Step.Raw+m.Kind.AllowLost.Raw)
			require.Equal(t, "4", m.Kind.AllowRepeated.Raw)
		},
		"a at 0.7 checksum e2e profile 1 both, id 1 0x2, counter b.c": func(t *testing.T, m *Member) {
			require.True(t, m.Kind.Method.E2E)
			require.Equal(t, "both", m.Kind.Method.Mode.Text)
			require.Len(t, m.Kind.Method.IDs, 2)
			require.Len(t, m.Kind.Method.Counter.Steps, 2)
		},
		"a at 0.7 checksum e2e over byte 1": func(t *testing.T, m *Member) { require.False(t, m.Kind.Method.E2E) },
		"a at 0.7 checksum c.Body over 0x23, byte 1, bytes 2..4, bytes 5..end": func(t *testing.T, m *Member) {
			f := m.Kind.Method.Feeds
			require.Equal(t, "0x23", f[0].Const.Raw)
			require.Nil(t, f[1].Last)
			require.Equal(t, "4", f[2].Last.Raw)
			require.True(t, f[3].End)
		},
		"a at 0.7 = raw * 1/8 rpm in km/h within -1.5..3 km/h": func(t *testing.T, m *Member) {
			require.Equal(t, "1/8 rpm", m.Expr.(*Operation).Right.ExprSpan().Text())
			require.Equal(t, "km/h", m.In.Text)
			require.Equal(t, "-3/2", m.Within.Low.Value().RatString())
			require.Equal(t, "3 km/h", m.Within.High.Span.Text())
		},
		// Products before sums, from left to right.
		"a at 0.7 = 1 - raw * 2 - 3": func(t *testing.T, m *Member) {
			require.Equal(t, "1 - raw * 2", m.Expr.(*Operation).Left.ExprSpan().Text())
		},
		// V is the unit, and the glued number divides.
		"a at 0.7 = raw * 5 V/1023": func(t *testing.T, m *Member) {
			require.Equal(t, "raw * 5 V", m.Expr.(*Operation).Left.ExprSpan().Text())
		},
		"a at 0.7 = Ntc(raw * 20 ohm)": func(t *testing.T, m *Member) { require.NotNil(t, m.Expr.(*Reference).Operand) },
		"a at 0.7 codes c.Top initial off tolerance 5 mV replaced by b": func(t *testing.T, m *Member) {
			require.Len(t, m.Table.Path.Steps, 2)
			require.Equal(t, "off", m.Initial.Name.Text)
			require.Equal(t, "5 mV", m.Tolerance.Span.Text())
			require.Len(t, m.Replaced.Steps, 1)
		},
		`a at 0.7 states { 0: off  1: on } initial -3 V note x "1" note y "2" "the text"`: func(t *testing.T, m *Member) {
			require.True(t, m.Table.States)
			require.Len(t, m.Table.Entries, 2)
			require.Equal(t, "-3 V", m.Initial.Quantity.Span.Text())
			require.Len(t, m.Notes, 2)
			require.Equal(t, "the text", m.Text.Value)
		},
		`a at 0.7 "say \"this\" \\ and\nthat"`: func(t *testing.T, m *Member) {
			require.Equal(t, "say \"this\" \\ and\nthat", m.Text.Value)
		},
	} {
		t.Run(text, func(t *testing.T) {
			list := items(t, text)
			require.Len(t, list, 1)
			require.Equal(t, text, list[0].ItemSpan().Text())
			check(t, list[0].(*Member))
		})
	}
}

// A word before at, is or [ is a name; a clause word of the next line is no
// unit of this one's number; newlines mean nothing else.
func TestWordsAsNames(t *testing.T) {
	list := items(t, `
  a at 0.0 = raw * 2
  signed at 0.1 signed
  within at 0.2 within 0..1
  step is S from byte 1
  fill[codes, note] is S from byte 2 step 3
  unused at
    7.7
  km at 1.1 = raw * 3 km at2 at 1.2
  from from to to
  text at 2.2 text ascii
  on
    change`)
	var got []string
	for _, i := range list {
		got = append(got, i.ItemSpan().Text())
	}
	require.Equal(t, []string{"a at 0.0 = raw * 2", "signed at 0.1 signed", "within at 0.2 within 0..1", "step is S from byte 1",
		"fill[codes, note] is S from byte 2 step 3", "unused at\n    7.7", "km at 1.1 = raw * 3 km", "at2 at 1.2", "from from to to",
		"text at 2.2 text ascii", "on\n    change"}, got)
	require.Nil(t, list[0].(*Member).Expr.(*Operation).Right.(*Literal).Unit)
}

func TestLineEndsAndByteOrderMark(t *testing.T) {
	text := "\ufeffbusloom 1\r\nbus a 500 kbit/s\r\n// c\r\n\r\necu b on a\r\n"
	list := &diag.List{}
	out, ok := Format(diag.NewFile("a.bus", []byte(text)), list)
	require.True(t, ok, list.Sorted())
	require.Equal(t, "busloom 1\nbus a 500 kbit/s\n// c\n\necu b on a\n", string(out))
}
