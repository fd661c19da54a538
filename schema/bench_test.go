package schema

import (
	"fmt"
	"runtime"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// largeDescription is a description of n messages with 8 signals each, the
// size of a vehicle platform's whole database for n = 20,000.
func largeDescription(n int) string {
	var b strings.Builder
	b.WriteString("busloom 1\nnetwork Large \"Made for measuring\"\n")
	b.WriteString("codes Ends { ones: absent  ones - 1: fault }\nstates Switch { 0: off  1: lit  2: fault  3: absent }\n")
	b.WriteString("idform Node 29 bits { rest 21, source 8 }\n")
	const buses = 16
	for i := range buses {
		fmt.Fprintf(&b, "bus bus%d 1 Mbit/s\necu Unit%d on bus%d\necu Display%d on bus%d\n", i, i, i, i, i)
	}
	for i := range n {
		bus := i % buses
		id := fmt.Sprintf("0x%08X", i)
		if i%10 == 0 { // families of identifiers have to be held against all others
			id = fmt.Sprintf("Node(rest 0x%X)", 0x100000+i)
		}
		fmt.Fprintf(&b, `message Message%d %s on bus%d, 8 bytes "One of many" {
  from Unit%d to Display%d
  every 1 s, lost after 5 s

  sum      at 0.7..0.0 checksum crc8_h2f over bytes 1..7
  alive    at 1.3..1.0 counter 0..15
  mode     at 1.5..1.4 states Switch
  active   at 1.6 flag
  valid    at 1.7 flag
  speed    at 3.7..2.0 = raw * 0.01 km/h  within 0..300 km/h  codes Ends  "Of the part"
  heat     at 4.7..4.0 = -40 degC + raw * 1 K  within -40..150 degC  codes Ends
  pressure at 7.7..5.0 = raw * 1/8 kPa  codes Ends  initial 0 kPa
}
`, i, id, bus, bus, bus)
	}
	return b.String()
}

func BenchmarkCompile(b *testing.B) {
	for _, n := range []int{200, 2000, 20000} {
		text := largeDescription(n)
		b.Run(fmt.Sprintf("messages=%d", n), func(b *testing.B) {
			b.SetBytes(int64(len(text)))
			b.ReportAllocs()
			for b.Loop() {
				network, list := Compile(MapFiles{"large.bus": text}, "large.bus")
				require.Zero(b, list.Len(), "%v", list.Sorted())
				require.Equal(b, 8*n, network.CountSignals())
			}
			b.ReportMetric(float64(8*n)*float64(b.N)/b.Elapsed().Seconds(), "signals/s")
		})
	}
}

// What compiling takes from the heap grows with the number of messages, not
// faster.
func TestMemoryIsLinear(t *testing.T) {
	takes := func(n int) float64 {
		text := largeDescription(n)
		var before, after runtime.MemStats
		runtime.GC()
		runtime.ReadMemStats(&before)
		network, list := Compile(MapFiles{"large.bus": text}, "large.bus")
		require.Zero(t, list.Len())
		runtime.ReadMemStats(&after)
		runtime.KeepAlive(network)
		return float64(after.TotalAlloc-before.TotalAlloc) / float64(n)
	}
	small, large := takes(100), takes(1600)
	require.Less(t, large, small*1.3, "bytes for each message")
}

// Two selections of one selector with 256 branches on the same bits each: the
// pairs of branches are many, those that may be there together few.
func BenchmarkCompileBranches(b *testing.B) {
	var text strings.Builder
	text.WriteString("busloom 1\nbus chassis 500 kbit/s\necu Brake on chassis\necu Cluster on chassis\nmessage Test 0x100 on chassis, 8 bytes {\n  from Brake to Cluster\n  page at 0.7..0.0\n")
	for _, part := range []string{"a", "b"} {
		text.WriteString("  select page {\n")
		for i := range 256 {
			first := map[string]int{"a": 1, "b": 4}[part]
			if i%2 == 1 {
				first = 5 - first
			}
			fmt.Fprintf(&text, "    when %d { %s%dx at %d.7..%d.0  %s%dy at %d.7..%d.0  %s%dz at %d.7..%d.0 }\n", i,
				part, i, first, first, part, i, first+1, first+1, part, i, first+2, first+2)
		}
		text.WriteString("  }\n")
	}
	text.WriteString("  unused 7.7..7.0\n}\n")
	b.SetBytes(int64(text.Len()))
	for b.Loop() {
		network, list := Compile(MapFiles{"branches.bus": text.String()}, "branches.bus")
		require.Zero(b, list.Len(), "%v", list.Sorted())
		require.Equal(b, 1+2*256*3, network.CountSignals())
	}
}
