package schema_test

import (
	"testing"

	"busloom/decode"
	"busloom/diag"
	"busloom/frame"
	"busloom/schema"
	"busloom/schema/internal/syntax/gen"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// Random programs of the grammar: the compiler tells what is wrong within the
// file and never fails otherwise; what it passes can be laid out, written,
// loaded and run on any frame.
func TestRandomPrograms(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		text := gen.Text().Draw(t, "text")
		network, list := schema.Compile(schema.MapFiles{"random.bus": text}, "random.bus")
		require.Equal(t, network == nil, list.Failed())
		for _, d := range list.Sorted() {
			require.NotEmpty(t, d.Problem)
			require.NotEmpty(t, d.Remedy, d.Error())
			if d.Span.Known() {
				require.LessOrEqual(t, 0, d.Span.Start, d.Error())
				require.LessOrEqual(t, d.Span.Start, d.Span.End, d.Error())
				require.LessOrEqual(t, d.Span.End, len(d.Span.File.Text), d.Error())
			}
		}
		laid, ok := schema.Format(diag.NewFile("random.bus", []byte(text)), &diag.List{})
		require.True(t, ok)
		again, relist := schema.Compile(schema.MapFiles{"random.bus": string(laid)}, "random.bus")
		require.Equal(t, list.Count(diag.Error), relist.Count(diag.Error), "the layout doesn't change what is wrong")
		if network == nil {
			return
		}
		require.Equal(t, network.Fingerprint(), again.Fingerprint())
		plan, err := decode.NewPlan(network, decode.Options{})
		require.NoError(t, err)
		if len(network.Buses) > 0 {
			plan.Bind([]string{network.Buses[0].Name})
		}
		var record decode.Record
		for range 20 {
			f := frame.Frame{ID: rapid.Uint32Range(0, 1<<29-1).Draw(t, "id"), Len: uint8(rapid.IntRange(0, 64).Draw(t, "len"))}
			if len(network.Messages) > 0 {
				f.ID = network.Messages[rapid.IntRange(0, len(network.Messages)-1).Draw(t, "message")].ID.Send
			}
			plan.Decode(&f, &record)
		}
	})
}
