package syntax_test

import (
	"testing"

	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/schema/internal/syntax/gen"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// What the generator makes follows the grammar of docs/language.md, so that
// nothing of it may be refused, whatever its layout and its names.
func TestGeneratedTextIsRead(t *testing.T) {
	texts := gen.Text()
	rapid.Check(t, func(t *rapid.T) {
		text := texts.Draw(t, "text")
		list := &diag.List{}
		syntax.Parse(diag.NewFile("random.bus", []byte(text)), list)
		require.Empty(t, list.Sorted(), text)
	})
}
