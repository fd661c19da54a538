package syntax

import (
	"reflect"
	"strings"
	"testing"

	"busloom/diag"
	"busloom/schema/internal/syntax/gen"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// Every span of a tree covers the very text of what it belongs to, and lies
// within the spans of what it is a part of.
func TestSpansCoverTheirText(t *testing.T) {
	texts := gen.Text()
	rapid.Check(t, func(t *rapid.T) {
		src := diag.NewFile("random.bus", []byte(texts.Draw(t, "text")))
		tree := Parse(src, &diag.List{})
		for _, d := range tree.Decls {
			require.True(t, strings.HasPrefix(d.Whole().Text(), d.Head().Text()))
			checkSpans(t, reflect.ValueOf(d), d.Whole())
		}
		if tree.Network != nil {
			checkSpans(t, reflect.ValueOf(tree.Network), tree.Network.Span)
		}
		for _, u := range tree.Uses {
			checkSpans(t, reflect.ValueOf(u), u.Span)
		}
	})
}

func checkSpans(t require.TestingT, v reflect.Value, around diag.Span) {
	inside := func(s diag.Span, what any) {
		require.True(t, around.Start <= s.Start && s.Start < s.End && s.End <= around.End, "%T %q isn't within %q", what, s.Text(), around.Text())
	}
	switch v.Kind() {
	case reflect.Pointer, reflect.Interface:
		if !v.IsNil() {
			checkSpans(t, v.Elem(), around)
		}
		return
	case reflect.Slice:
		for i := range v.Len() {
			checkSpans(t, v.Index(i), around)
		}
		return
	case reflect.Struct:
	default:
		return
	}
	switch x := v.Interface().(type) {
	case Name:
		if x.Text != "" {
			inside(x.Span, x)
			require.Equal(t, x.Text, x.Span.Text())
		}
		return
	case Number:
		inside(x.Span, x)
		require.Equal(t, x.Raw, x.Span.Text())
		require.NotNil(t, x.Value)
		return
	case UnitRef:
		inside(x.Span, x)
		require.Equal(t, x.Text, x.Span.Text())
		return
	case Key:
		inside(x.Span, x)
		require.Equal(t, x.Text, x.Span.Text())
		return
	case Text:
		if x.Given {
			inside(x.Span, x)
			require.Equal(t, byte('"'), x.Span.Text()[0])
		}
		return
	case diag.Span, diag.File, Spans, At:
		return
	case MethodRef:
		// The name and the number that aren't given are zero.
		if x.E2E {
			checkSpans(t, reflect.ValueOf(x.Profile), x.Span)
		} else {
			checkSpans(t, reflect.ValueOf(x.Name), x.Span)
			checkSpans(t, reflect.ValueOf(x.Feeds), x.Span)
		}
		return
	}
	if f := v.FieldByName("Span"); f.IsValid() && f.Interface().(diag.Span).Known() {
		own := f.Interface().(diag.Span)
		inside(own, v.Interface())
		switch v.Interface().(type) {
		case TableClause, Otherwise: // the head alone
		default:
			around = own
		}
	}
	for i := range v.NumField() {
		checkSpans(t, v.Field(i), around)
	}
}
