package schema

import (
	"fmt"
	"strings"
	"testing"
	"time"

	"busloom/crc"
	"busloom/diag"

	"github.com/stretchr/testify/require"
)

func compileSketch(t *testing.T) *Network {
	network, list := Compile(DiskFiles(), "testdata/clean/sketch.bus")
	require.NotNil(t, network, render(t, list))
	return network
}

// The model of the example: shapes expanded, places shifted, codes at their
// width, selections, protection, relays, identifiers.
func TestModel(t *testing.T) {
	n := compileSketch(t)
	require.Equal(t, "Heron", n.Name)
	require.Len(t, n.Messages, 4, "three messages and a relayed one")
	wheels, engine, relayed, broadcast := n.Messages[0], n.Messages[1], n.Messages[2], n.Messages[3]

	var places []string
	for _, s := range wheels.Signals {
		places = append(places, s.Name+" "+s.Place.String())
	}
	require.Equal(t, []string{
		"crc 0.7..0.0", "alive 1.3..1.0", "direction 1.5..1.4",
		"wheel[front_left].speed 2.7..3.0", "wheel[front_left].teeth 4.7..4.0",
		"wheel[front_right].speed 5.7..6.0", "wheel[front_right].teeth 7.7..7.0",
		"wheel[rear_left].speed 8.7..9.0", "wheel[rear_left].teeth 10.7..10.0",
		"wheel[rear_right].speed 11.7..12.0", "wheel[rear_right].teeth 13.7..13.0",
	}, places)
	speed := wheels.Signal("wheel[rear_right].speed")
	require.Equal(t, "Pickup", speed.CodeSet)
	require.Equal(t, []Code{
		{Raw: RawRange{0xFFF0, 0xFFFD}, Class: Reserved},
		{Raw: RawRange{0xFFFE, 0xFFFE}, Class: Fault, Name: "circuit_open"},
		{Raw: RawRange{0xFFFF, 0xFFFF}, Class: Absent, Text: "not fitted or not ready"},
	}, speed.Codes)
	require.Equal(t, "300", speed.Range.High.RatString())
	direction := wheels.Signal("direction")
	require.Equal(t, States, direction.Kind)
	require.Len(t, direction.States, 3)
	require.Equal(t, []Code{{Raw: RawRange{3, 3}, Class: Absent}}, direction.Codes)
	require.Equal(t, &CounterRule{Low: 0, High: 14, Step: 1}, wheels.Signal("alive").Counter)
	require.Equal(t, &ChecksumRule{Method: "e2e_1_both", CRC: &crc.Params{Name: "e2e_1", Width: 8, Poly: 0x1D}, Feed: []Feed{
		{Kind: FeedConst, Byte: 0xA0}, {Kind: FeedConst, Byte: 0x01}, {Kind: FeedBytes, First: 1, Last: 15},
	}}, wheels.Signal("crc").Checksum)
	require.Equal(t, Timing{Period: 10 * time.Millisecond, LostAfter: 50 * time.Millisecond}, wheels.Timing)
	require.True(t, wheels.FD)

	require.Equal(t, Timing{Period: 100 * time.Millisecond, OnChange: true, Gap: 10 * time.Millisecond}, engine.Timing)
	require.Equal(t, "0.1..0.0 then 4.7..4.0", engine.Signal("lift").Place.String())
	require.Equal(t, 10, engine.Signal("lift").Width)
	require.Len(t, engine.Selects, 1)
	sel := engine.Selects[0]
	require.Equal(t, OtherwiseNothing, sel.Otherwise)
	require.Equal(t, []RawRange{{1, 3}}, sel.Branches[1].Values)
	require.Equal(t, []*Signal{engine.Signal("advance")}, sel.Branches[1].Signals)
	require.Equal(t, []Choice{{Selector: engine.Signal("page"), Values: []RawRange{{1, 3}}}}, engine.Signal("advance").When)
	require.Equal(t, []Feed{{Kind: FeedConst, Byte: 0x23}, {Kind: FeedBytes, First: 0, Last: 6}}, engine.Signal("sum").Checksum.Feed)

	require.Equal(t, "EngineState", relayed.Name)
	require.Equal(t, "chassis", relayed.Bus.Name)
	require.Equal(t, uint32(0x3C0), relayed.ID.Value)
	require.Same(t, engine, relayed.Relayed.From)
	require.Equal(t, "Gateway", relayed.Senders[0].Name)

	id := broadcast.ID
	require.True(t, id.Extended && id.open() && broadcast.AnySender)
	require.Equal(t, uint32(0x00F00400), id.Value)
	require.Equal(t, uint32(0x03FFFF00), id.Mask)
	require.Equal(t, uint32(0x0CF00400), id.Send) // the EEC1 identifier of SAE J1939-71, without its source
	require.Equal(t, []Code{
		{Raw: RawRange{0xFB00, 0xFBFF}, Class: Reserved, Name: "indicator"},
		{Raw: RawRange{0xFC00, 0xFDFF}, Class: Reserved},
		{Raw: RawRange{0xFE00, 0xFEFF}, Class: Fault},
		{Raw: RawRange{0xFF00, 0xFFFF}, Class: Absent},
	}, broadcast.Signal("speed").Codes)
}

// The longest frames. Classic: the formula's values in Davis, Burns, Bril,
// Lukkien (2007), 55 + 10 s and 80 + 10 s. FD: the maxima with bit stuffing of
// the Linux kernel's can/length.h (2023), 712 and 736 bits for 64 bytes; the
// others follow from its constants.
func TestFrameTime(t *testing.T) {
	for _, c := range []struct {
		size     int
		fd       bool
		extended bool
		bits     float64
	}{
		{0, false, false, 55}, {8, false, false, 135}, {0, false, true, 80}, {8, false, true, 160},
		{0, true, false, 67}, {16, true, false, 227}, {20, true, false, 272}, {64, true, false, 712}, {64, true, true, 736},
	} {
		m := &Message{Size: c.size, FD: c.fd, ID: ID{Extended: c.extended}, Bus: &Bus{BitRate: 500_000, FDRate: 500_000}}
		require.InDelta(t, c.bits/500_000, frameTime(m), 1e-12, "%+v", c)
	}
	// With a data phase four times as fast: 17 + 4 + 1 + 12 bits at the slow
	// rate, counted by hand for an 11-bit identifier.
	m := &Message{Size: 64, FD: true, Bus: &Bus{BitRate: 500_000, FDRate: 2_000_000}}
	require.InDelta(t, 34.0/500_000+(712.0-34)/2_000_000, frameTime(m), 1e-12)
}

func TestGroupsOfNumbers(t *testing.T) {
	network, list := Compile(MapFiles{"test.bus": `busloom 1
bus chassis 500 kbit/s
ecu Brake on chassis
ecu Cluster on chassis
shape Half 1 byte { low at +0.3..0.0  high at +0.7..0.4 }
shape Pair 2 bytes { half[1..2] is Half from byte 0 }
message Test 0x100 on chassis, 8 bytes {
  from Brake to Cluster
  pair[first] is Pair from byte 0
  pair[second, third] is Pair from byte 4 step 2
  holds Pair from byte 2
}
`}, "test.bus")
	require.NotNil(t, network, render(t, list))
	require.Zero(t, list.Len())
	var names []string
	for _, s := range network.Messages[0].Signals {
		names = append(names, s.Name+" "+s.Place.String())
	}
	require.Equal(t, []string{
		"pair[first].half[1].low 0.3..0.0", "pair[first].half[1].high 0.7..0.4", "pair[first].half[2].low 1.3..1.0", "pair[first].half[2].high 1.7..1.4",
		"pair[second].half[1].low 4.3..4.0", "pair[second].half[1].high 4.7..4.4", "pair[second].half[2].low 5.3..5.0", "pair[second].half[2].high 5.7..5.4",
		"pair[third].half[1].low 6.3..6.0", "pair[third].half[1].high 6.7..6.4", "pair[third].half[2].low 7.3..7.0", "pair[third].half[2].high 7.7..7.4",
		"half[1].low 2.3..2.0", "half[1].high 2.7..2.4", "half[2].low 3.3..3.0", "half[2].high 3.7..3.4",
	}, names)
}

// At-least messages: a text may begin where the bytes end that are always
// there, and checksums go on to the payload's end.
func TestAtLeast(t *testing.T) {
	network, list := Compile(MapFiles{"test.bus": `busloom 1
bus chassis 500 kbit/s
ecu Brake on chassis
ecu Cluster on chassis
message Short 0x100 on chassis, at least 2 bytes {
  from Brake to Cluster
  sum    at 0.7..0.0 checksum xor8 over bytes 1..end
  kind   at 1.7..1.0
  remark at 2.7..end text utf8
}
message Long 0x101 on chassis, at least 4 bytes {
  from Brake to Cluster
  kind   at 0.7..0.0
  remark at 1.7..end bytes
}
message Exact 0x102 on chassis, 4 bytes {
  from Brake to Cluster
  kind   at 0.7..0.0
  remark at 1.7..end bytes
}
`}, "test.bus")
	require.NotNil(t, network, render(t, list))
	require.Zero(t, list.Len(), render(t, list))
	short, long, exact := network.Messages[0], network.Messages[1], network.Messages[2]
	require.Equal(t, []Feed{{Kind: FeedBytes, First: 1, Last: -1}}, short.Signal("sum").Checksum.Feed)
	for _, c := range []struct {
		m     *Message
		place string
		toEnd bool
	}{{short, "2.7..2.0", true}, {long, "1.7..3.0", true}, {exact, "1.7..3.0", false}} {
		require.Equal(t, c.place, c.m.Signal("remark").Place.String(), c.m.Name)
		require.Equal(t, c.toEnd, c.m.Signal("remark").ToEnd, c.m.Name)
	}
}

// One mistake in each of several messages gives one diagnostic each: none
// hides another, and none is told twice.
func TestMistakesStayApart(t *testing.T) {
	bodies := []struct {
		body string
		code diag.Code
	}{
		{"  a at 0.8..0.0\n  unused 1.7..7.0", diag.BadPlace},
		{"  a at 0.7..0.0 = raw * 1 furlong\n  b at 0.0 flag\n  unused 1.7..7.0", diag.UnknownUnit}, // and b overlaps a
		{"  a at 0.7..0.0 states Missing\n  unused 1.7..7.0", diag.UnknownName},
		{"  page at 0.9..0.0\n  select page {\n    when 300 { a at 1.7..1.0 }\n  }\n  unused 2.7..7.0", diag.BadPlace},
		{"  crc at 0.7..0.0 checksum e2e profile 1 both, id 1, counter alive\n  alive at 1.9..1.0 counter 0..15\n  unused 2.7..7.0", diag.BadPlace},
		{"  w[a, b] is Unknown from byte 0\n  select w[a].x {\n    when 1 { c at 7.7..7.0 }\n    otherwise nothing\n  }", diag.UnknownName},
	}
	var text strings.Builder
	text.WriteString("busloom 1\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\n")
	for i, b := range bodies {
		fmt.Fprintf(&text, "message Test%d 0x10%d on chassis, 8 bytes {\n  from Brake to Cluster\n%s\n}\n", i, i, b.body)
	}
	_, list := Compile(MapFiles{"test.bus": text.String()}, "test.bus")
	var got []diag.Code
	for _, d := range list.Sorted() {
		if d.Severity == diag.Error {
			got = append(got, d.Code)
		}
	}
	require.Equal(t, []diag.Code{diag.BadPlace, diag.UnknownUnit, diag.Overlap, diag.UnknownName, diag.BadPlace, diag.BadPlace, diag.UnknownName}, got, render(t, list))
}

// What a damaged text may have declared isn't called unknown.
func TestDamageDoesntCascade(t *testing.T) {
	_, list := Compile(MapFiles{"test.bus": `busloom 1
bus chassis 500 kbit/s
ecu Brake on chassis
ecu Cluster on chassis
states Lamp { 0: off 1 lit }
curve Ntc from ohm to degC outside hold { 1: 2 3 }
message Test 0x100 on chassis, 3 bytes {
  from Brake to Cluster
  crc  at 0.7..0.0 checksum e2e profile 1 both, id 1, counter alive
  alive at 1.3.1.0 counter 0..14
  lamp at 1.7..1.4 states Lamp
  heat at 2.7..2.0 = Ntc(raw * 1 ohm)
}
`}, "test.bus")
	for _, d := range list.Sorted() {
		if d.Severity == diag.Error {
			require.Equal(t, "SY", string(d.Code[:2]), render(t, list))
		}
	}
	require.NotZero(t, list.Count(diag.Error))
}

// Shapes that double from level to level are refused before they fill the
// memory.
func TestShapesThatGrowWithoutEnd(t *testing.T) {
	var b strings.Builder
	b.WriteString("busloom 1\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nshape S0 1 byte { page at +0.7..0.0 }\n")
	for i := 1; i < 40; i++ {
		fmt.Fprintf(&b, `shape S%d 2 bytes {
  page at +1.0 flag
  select page {
    when off { a is S%d from byte 0 }
    when on { b is S%d from byte 0 }
  }
}
`, i, i-1, i-1)
	}
	b.WriteString("message Test 0x100 on chassis, 2 bytes {\n  from Brake to Cluster\n  s is S39 from byte 0\n}\n")
	_, list := Compile(MapFiles{"test.bus": b.String()}, "test.bus")
	require.True(t, list.Failed())
	found := false
	for _, d := range list.Sorted() {
		found = found || d.Code == diag.ShapePlacement && strings.Contains(d.Problem, "more than")
	}
	require.True(t, found, render(t, list)[:min(4000, len(render(t, list)))])
}

// Names are looked up in the file itself and those it uses, not further.
func TestScopes(t *testing.T) {
	files := MapFiles{
		"a/root.bus":         "busloom 1\nuse \"lib/one.bus\" as one\nuse \"../b/two.bus\"\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nmessage Test 0x100 on chassis, 2 bytes {\n  from Brake to Cluster\n  a at 0.7..0.0 codes one.Ends\n  b at 1.7..1.0 states Lamp\n}\n",
		"a/lib/one.bus":      "busloom 1\nuse \"../deep/three.bus\"\ncodes Ends { ones: absent }\nshape S 1 byte { x at +0.7..0.0 states Deep }\n",
		"a/deep/three.bus":   "busloom 1\nstates Deep { 0: down  1: up }\n",
		"b/two.bus":          "busloom 1\nstates Lamp { 0: off  1: lit }\n",
		"a/prefix.bus":       "busloom 1\nuse \"lib/one.bus\" as one\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nmessage Test 0x100 on chassis, 1 byte {\n  from Brake to Cluster\n  a at 0.7..0.0 codes Ends\n}\n",
		"a/transitive.bus":   "busloom 1\nuse \"lib/one.bus\"\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nmessage Test 0x100 on chassis, 1 byte {\n  from Brake to Cluster\n  a at 0.7..0.0 states Deep\n}\n",
		"a/shape_scopes.bus": "busloom 1\nuse \"lib/one.bus\"\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nmessage Test 0x100 on chassis, 1 byte {\n  from Brake to Cluster\n  s is S from byte 0\n}\n",
	}
	for _, c := range []struct {
		root, remedy string
	}{
		{"a/root.bus", ""},
		{"a/prefix.bus", "write one.Ends"},
		{"a/transitive.bus", `write use "deep/three.bus"`},
		{"a/shape_scopes.bus", ""}, // a shape sees what its own file uses
	} {
		network, list := Compile(files, c.root)
		if c.remedy == "" {
			require.NotNil(t, network, render(t, list))
			continue
		}
		require.Equal(t, 1, list.Count(diag.Error), render(t, list))
		require.Equal(t, diag.UnknownName, list.Sorted()[0].Code)
		require.Equal(t, c.remedy, list.Sorted()[0].Remedy)
	}
	_, list := Compile(files, "a/missing.bus")
	require.Equal(t, 1, list.Count(diag.Error))
	require.Equal(t, diag.ImportUnreadable, list.Sorted()[0].Code)
}

// Curves, exactly: hand-computed points, between and beyond.
func TestCurveValues(t *testing.T) {
	n := compileSketch(t)
	curve := n.Curves[0]
	at := func(x int64) string {
		y, ok := curve.At(ratOf(uint64(x)))
		require.True(t, ok)
		return y.RatString()
	}
	require.Equal(t, "-40", at(45313))
	require.Equal(t, "20", at(2500))
	require.Equal(t, "-40", at(60000), "held")
	require.Equal(t, "140", at(1), "held")
	require.Equal(t, "80", at(1286), "half way from 2500 to 72 ohm")
	for x := uint64(72); x < 45313; x += 311 {
		y, ok := curve.At(ratOf(x))
		require.True(t, ok)
		back, ok := curve.inverse(y)
		require.True(t, ok)
		require.Zero(t, back.Cmp(ratOf(x)), "%d", x)
	}
}
