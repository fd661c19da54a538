package syntax

import (
	"testing"

	"busloom/schema/internal/syntax/gen"

	"pgregory.net/rapid"
)

func TestGeneratedTextIsLaidOut(t *testing.T) {
	texts := gen.Text()
	rapid.Check(t, func(t *rapid.T) {
		checkFormat(t, "random.bus", texts.Draw(t, "text"))
	})
}
