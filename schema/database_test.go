package schema_test

import (
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"os"
	"reflect"
	"regexp"
	"strings"
	"testing"

	"busloom/diag"
	"busloom/schema"

	"github.com/santhosh-tekuri/jsonschema/v6"
	"github.com/stretchr/testify/require"
)

func heron(t testing.TB) *schema.Network {
	network, list := schema.Compile(schema.DiskFiles(), "../schemas/heron.bus")
	require.False(t, list.Failed())
	return network
}

func written(t testing.TB, n *schema.Network) []byte {
	var b bytes.Buffer
	require.NoError(t, n.WriteDatabase(&b))
	return b.Bytes()
}

// load reads a database and gives its problems as text.
func load(t testing.TB, text []byte) (*schema.Network, string) {
	n, list := schema.LoadDatabase(diag.NewFile("test.json", text))
	require.Equal(t, n == nil, list.Failed())
	var b strings.Builder
	for _, d := range list.Sorted() {
		b.WriteString(d.Error() + "\n")
	}
	return n, b.String()
}

func TestDatabaseComesBack(t *testing.T) {
	n := heron(t)
	once := written(t, n)
	require.Equal(t, once, written(t, n), "the same network gives the same bytes")
	again, problems := load(t, once)
	require.Empty(t, problems)
	require.Equal(t, string(once), string(written(t, again)))
	require.Equal(t, n.Fingerprint(), again.Fingerprint())
	require.Equal(t, n.CountSignals(), again.CountSignals())
	for i, m := range n.Messages {
		for j, s := range m.Signals {
			require.Equal(t, len(s.When), len(again.Messages[i].Signals[j].When), "%s.%s", m.Name, s.Name)
		}
	}
}

// The fingerprint is what docs/database.md says, computed by the standard
// library from the document itself.
func TestFingerprintIsTheDocumentedOne(t *testing.T) {
	var doc struct {
		Fingerprint string          `json:"fingerprint"`
		Network     json.RawMessage `json:"network"`
	}
	require.NoError(t, json.Unmarshal(written(t, heron(t)), &doc))
	var compact bytes.Buffer
	require.NoError(t, json.Compact(&compact, doc.Network))
	sum := sha256.Sum256(append(compact.Bytes(), '\n'))
	require.Equal(t, "sha256:"+hex.EncodeToString(sum[:]), doc.Fingerprint)
}

// validator is the published JSON Schema in an independent library.
func validator(t testing.TB) *jsonschema.Schema {
	s, err := jsonschema.NewCompiler().Compile("../docs/busloom-network-1.schema.json")
	require.NoError(t, err)
	return s
}

func TestDatabaseFitsThePublishedSchema(t *testing.T) {
	check := func(text []byte) error {
		doc, err := jsonschema.UnmarshalJSON(bytes.NewReader(text))
		require.NoError(t, err)
		return validator(t).Validate(doc)
	}
	good := written(t, heron(t))
	require.NoError(t, check(good))
	for _, change := range [][2]string{
		{`"version": 1`, `"version": 2`}, {`"kind": "unsigned"`, `"kind": "whole"`}, {`"place": "0.7..0.0"`, `"place": "0.8..0.0"`},
		{`"factor": "1/100"`, `"factor": 0.01`}, {`"bitRate"`, `"bitrate"`}, {`"outside": "hold"`, `"outside": "stay"`},
	} {
		require.Contains(t, string(good), change[0])
		require.Error(t, check([]byte(strings.Replace(string(good), change[0], change[1], 1))), change[1])
	}
}

// Every field that is written is in the published schema.
func TestSchemaNamesEveryField(t *testing.T) {
	text, err := os.ReadFile("../docs/busloom-network-1.schema.json")
	require.NoError(t, err)
	source, err := os.ReadFile("database_form.go")
	require.NoError(t, err)
	tags := regexp.MustCompile("`json:\"(\\w+)").FindAllSubmatch(source, -1)
	require.Greater(t, len(tags), 60)
	for _, tag := range tags {
		require.Contains(t, string(text), `"`+string(tag[1])+`": {`, "field %s", tag[1])
	}
}

// resealed gives a changed document the fingerprint of its content.
func resealed(t testing.TB, text string) []byte {
	var doc struct {
		Network json.RawMessage `json:"network"`
	}
	if json.Unmarshal([]byte(text), &doc) != nil {
		return []byte(text)
	}
	var compact bytes.Buffer
	if json.Compact(&compact, doc.Network) != nil {
		return []byte(text)
	}
	sum := sha256.Sum256(append(compact.Bytes(), '\n'))
	return regexp.MustCompile(`sha256:[0-9a-f]*`).ReplaceAll([]byte(text), []byte("sha256:"+hex.EncodeToString(sum[:])))
}

const smallNetwork = `busloom 1
network Small "For tests"
bus main 500 kbit/s fd 2 Mbit/s
ecu A on main with source 1
ecu B on main
unit tooth
curve Ntc from ohm to degC outside none {
  10: 100
  1000: -40
}
idform F 29 bits { group 21, source 8 }
message M 0x100 on main, fd 12 bytes {
  from A to B
  every 10 ms or on change, at least 2 ms apart, lost after 50 ms
  note requirement "R1"
  fill 0xFF
  crc at 0.7..0.0 checksum e2e profile 1 alternating, id 0x123, counter alive
  alive at 1.3..1.0 counter 0..14 lost 1 allowed repeated 2 allowed
  page at 1.7..1.4
  temperature at 2.7..3.0 = Ntc(raw * 1 ohm)  within -40..100 degC  codes { ones: absent }
  turns at 4.7..4.0 signed = raw * 1 tooth  tolerance 1 tooth  initial -5 tooth
  select page {
    when 0 {
      a at 5.7..5.0
      select a {
        when 1..3 { c at 6.7..6.0 states { 0: off  1: on  255: absent } }
        otherwise unknown
      }
    }
    when 1, 2 { b at 5.7..5.0 }
    otherwise { rest at 5.7..6.0 text ascii fill 0x20 }
  }
  old at 7.7..7.0 replaced by M.new
  new at 8.7..8.0
  bits at 9.7..11.0 bytes
}
message G F(group 5) on main, at least 2 bytes {
  from any to B
  x at 0.7..0.0
  tail at 1.7..end bytes
}
`

// Whatever contradicts itself is refused by name, though its fingerprint is
// right.
func TestDamagedDatabases(t *testing.T) {
	network, list := schema.Compile(schema.MapFiles{"s.bus": smallNetwork}, "s.bus")
	require.False(t, list.Failed(), "%v", list.Sorted())
	good := string(written(t, network))
	_, problems := load(t, []byte(good))
	require.Empty(t, problems)
	for _, c := range []struct{ old, new, want string }{
		{`"place": "2.7..3.0"`, `"place": "2.7..12.0"`, "past the end"},
		{`"place": "2.7..3.0"`, `"place": "2.0..2.7"`, "temperature"},
		{`"place": "2.7..3.0"`, `"place": "2.x"`, "not a position"},
		{`"kind": "signed"`, `"kind": "curly"`, "the kind is"},
		{`"kind": "signed"`, `"kind": "float"`, "can't have 8 bits"},
		{`"tolerance": "1"`, `"tolerance": "1e9"`, "no whole number or fraction"},
		{`"offset": "0"`, `"offset": "half"`, "no whole number or fraction"},
		{`"curve": "Ntc"`, `"curve": "Ptc"`, `no curve "Ptc"`},
		{`"unit": "tooth"`, `"unit": "teeth"`, `no unit "teeth"`},
		{`"bus": "main"`, `"bus": "side"`, `no bus "side"`},
		{`"raw": "0xFFFF"`, `"raw": "0x1FFFF"`, "more than 16 bits"},
		{`"raw": "0xFFFF"`, `"raw": "0xFFFF-0x0001"`, "upside down"},
		{`"class": "absent"`, `"class": "gone"`, "unknown class"},
		{`"high": "0x0E"`, `"high": "0x00"`, "don't fit each other"},
		{`"first": 1`, `"first": 0`, "covers itself"},
		{`"last": 11`, `"last": 12`, "aren't in the message"},
		{`"counter": "alive"`, `"counter": "page"`, "no counter"},
		{`"selector": "a"`, `"selector": "c"`, "may be absent"},
		{`"selector": "page"`, `"selector": "bits"`, "can't select"},
		{`"otherwise": "unknown"`, `"otherwise": "perhaps"`, "otherwise is"},
		{`"size": 12`, `"size": 13`, "no frame has 13 bytes"},
		{`"value": "0x100"`, `"value": "0x900"`, "more than 11 bits"},
		{`"name": "new"`, `"name": "old"`, "twice"},
		{`"polynomial": "0x1D"`, `"polynomial": "0x1C"`, "constant term"},
		{`"source": 1`, `"source": 256`, "documented form"},
		{`"text": "For tests"`, `"tekst": "For tests"`, "documented form"},
	} {
		require.Contains(t, good, c.old)
		_, problems := load(t, resealed(t, strings.Replace(good, c.old, c.new, 1)))
		require.Contains(t, problems, c.want, c.new)
	}
	for _, c := range []struct{ text, want string }{
		{"", "DB01"}, {"{", "test.json:1:"}, {"[]", "DB01"}, {`{"format":"other"}`, "DB01"}, {`{"format":"busloom-network","version":2}`, "DB02"},
		{good + "x", "DB01"}, {strings.Replace(good, "500000", "500001", 1), "DB03"}, {good[:len(good)/2], "DB01"},
	} {
		n, problems := load(t, []byte(c.text))
		require.Nil(t, n)
		require.Contains(t, problems, c.want)
	}
}

func TestFingerprintFollowsContent(t *testing.T) {
	text := smallNetwork
	print := func(text string) string {
		n, list := schema.Compile(schema.MapFiles{"s.bus": text}, "s.bus")
		require.False(t, list.Failed(), "%v", list.Sorted())
		return n.Fingerprint()
	}
	base := print(text)
	require.Equal(t, base, print("// A comment.\n"+strings.ReplaceAll(text, "\n  ", "\n      ")), "layout and comments don't count")
	for _, c := range [][2]string{
		{"R1", "R2"}, {"For tests", "For us"}, {"every 10 ms", "every 20 ms"}, {"raw * 1 tooth", "raw * 0.5 tooth"}, {"tolerance 1 tooth", "tolerance 2 tooth"},
		{"0x123", "0x124"}, {"outside none", "outside hold"}, {"initial -5", "initial -6"}, {"lost 1 allowed", "lost 2 allowed"}, {"with source 1", "with source 2"},
		{"fill 0x20", "fill 0x00"}, {"fill 0xFF", "fill 0x00"}, {"group 5", "group 6"}, {"when 1..3", "when 1..4"}, {"otherwise unknown", "otherwise nothing"},
	} {
		require.Contains(t, text, c[0])
		require.NotEqual(t, base, print(strings.Replace(text, c[0], c[1], 1)), c[1])
	}
}

// FuzzLoadDatabase: whatever is read either has problems or is a network that
// writes back and loads again with the same fingerprint.
func FuzzLoadDatabase(f *testing.F) {
	n, list := schema.Compile(schema.MapFiles{"s.bus": smallNetwork}, "s.bus")
	require.False(f, list.Failed())
	f.Add(string(written(f, n)))
	f.Add("{}")
	f.Add(`{"format":"busloom-network","version":1,"fingerprint":"sha256:","network":{}}`)
	f.Fuzz(func(t *testing.T, text string) {
		for _, b := range [][]byte{[]byte(text), resealed(t, text)} {
			n, problems := load(t, b)
			if n == nil {
				require.NotEmpty(t, problems)
				continue
			}
			again, problems := load(t, written(t, n))
			require.Empty(t, problems)
			require.Equal(t, n.Fingerprint(), again.Fingerprint())
			require.True(t, reflect.DeepEqual(written(t, n), written(t, again)))
		}
	})
}
