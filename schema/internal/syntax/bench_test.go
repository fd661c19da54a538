package syntax

import (
	"fmt"
	"strings"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// manyMessages is a description of n messages with eight members each.
func manyMessages(n int) []byte {
	var b strings.Builder
	b.WriteString("busloom 1\nnetwork Large\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\n")
	for i := range n {
		fmt.Fprintf(&b, "\nmessage Message%d 0x%08X on chassis, 8 bytes \"Some text about it\" {\n  from Brake to Cluster\n  every 10 ms, lost after 50 ms\n\n", i, i)
		for j := range 8 {
			fmt.Fprintf(&b, "  signal_%d at %d.7..%d.0 = raw * 0.01 km/h  within 0..2.5 km/h  codes Pickup  \"What it is\"\n", j, j, j)
		}
		b.WriteString("}\n")
	}
	return []byte(b.String())
}

func BenchmarkParse(b *testing.B) {
	text := manyMessages(4000)
	b.SetBytes(int64(len(text)))
	b.ReportAllocs()
	for b.Loop() {
		list := &diag.List{}
		f := Parse(diag.NewFile("large.bus", text), list)
		require.Zero(b, list.Len())
		require.Len(b, f.Decls, 4003)
	}
}

func BenchmarkScan(b *testing.B) {
	text := manyMessages(4000)
	b.SetBytes(int64(len(text)))
	for b.Loop() {
		require.NotEmpty(b, scan(text).toks)
	}
}

func BenchmarkFormat(b *testing.B) {
	text := manyMessages(4000)
	b.SetBytes(int64(len(text)))
	b.ReportAllocs()
	for b.Loop() {
		list := &diag.List{}
		_, ok := Format(diag.NewFile("large.bus", text), list)
		require.True(b, ok)
	}
}
