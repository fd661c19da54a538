package syntax

import (
	"fmt"
	"math/big"
	"reflect"
	"sort"
	"strings"

	"busloom/diag"
)

// outline writes a tree without its spans, by reflection, so that it shares
// nothing with the formatter.
func outline(v any) string {
	var b strings.Builder
	walk(&b, reflect.ValueOf(v))
	return b.String()
}

func walk(b *strings.Builder, v reflect.Value) {
	switch v.Kind() {
	case reflect.Pointer, reflect.Interface:
		if v.IsNil() {
			b.WriteString("nil")
			return
		}
		if r, ok := v.Interface().(*big.Rat); ok {
			b.WriteString(r.String())
			return
		}
		walk(b, v.Elem())
	case reflect.Struct:
		if _, ok := v.Interface().(diag.Span); ok {
			return
		}
		if _, ok := v.Interface().(diag.File); ok {
			return
		}
		fmt.Fprintf(b, "%s{", v.Type().Name())
		for i := range v.NumField() {
			walk(b, v.Field(i))
			b.WriteByte(';')
		}
		b.WriteByte('}')
	case reflect.Slice:
		b.WriteByte('[')
		for i := range v.Len() {
			walk(b, v.Index(i))
			b.WriteByte(',')
		}
		b.WriteByte(']')
	default:
		fmt.Fprint(b, v.Interface())
	}
}

// comments lists the comments of a text, sorted.
func comments(text string) []string {
	var out []string
	for _, c := range scan([]byte(text)).comments {
		out = append(out, text[c.start:c.end])
	}
	sort.Strings(out)
	return out
}
