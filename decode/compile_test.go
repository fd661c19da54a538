package decode

import (
	"encoding/hex"
	"strings"
	"testing"

	"busloom/diag"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

// compile compiles a description for a test.
func compile(t require.TestingT, text string) *schema.Network {
	network, list := schema.Compile(schema.MapFiles{"test.bus": text}, "test.bus")
	var b strings.Builder
	require.NoError(t, diag.Render(&b, list.Sorted(), diag.Style{}))
	require.False(t, list.Failed(), "%s", b.String())
	return network
}

// planOf makes a plan for one interface, vcan0.
func planOf(t require.TestingT, text string, opts Options) *Plan {
	p, err := NewPlan(compile(t, text), opts)
	require.NoError(t, err)
	p.Bind([]string{"vcan0"})
	return p
}

// received makes a frame of an identifier (3 or 8 hex digits) and its data.
func received(t require.TestingT, id, data string) *frame.Frame {
	payload, err := hex.DecodeString(strings.ReplaceAll(data, " ", ""))
	require.NoError(t, err)
	raw, err := hex.DecodeString(strings.Repeat("0", 8-len(id)) + id)
	require.NoError(t, err)
	f := &frame.Frame{ID: uint32(raw[0])<<24 | uint32(raw[1])<<16 | uint32(raw[2])<<8 | uint32(raw[3]), Len: uint8(len(payload)), DLC: uint8(len(payload))}
	if len(id) == 8 {
		f.Flags |= frame.Extended
	}
	if len(payload) > 8 {
		f.Flags |= frame.FD
	}
	copy(f.Data[:], payload)
	return f
}

// values decodes a frame into the texts of its values by path.
func values(t *testing.T, p *Plan, f *frame.Frame) (map[string]string, *Record) {
	var r Record
	p.Decode(f, &r)
	require.Equal(t, Decoded, r.Class)
	out := map[string]string{}
	for i := range r.Values {
		v := &r.Values[i]
		text := string(v.Signal.AppendText(nil, v, f))
		if v.State == Number && v.Signal.Unit.Symbol != "" {
			text += " " + v.Signal.Unit.Symbol
		}
		if v.State != Number {
			require.Empty(t, v.Signal.AppendNumber(nil, v), "%s: what is no number has no number", v.Signal.Path)
			require.Zero(t, v.Num, v.Signal.Path)
		}
		out[v.Signal.Path] = text
	}
	return out, &r
}
