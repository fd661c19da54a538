package capture

import (
	"slices"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// compareWithOracle reads a text and each of its lines by the oracle. Lines
// are read twice in a row, so that the fast path, which needs a line before
// it, gets its chance; it also needs room behind the line.
func compareWithOracle(t require.TestingT, text string) {
	doubled := ""
	for line := range strings.SplitSeq(text, "\n") {
		doubled += line + "\n" + line + "\n"
	}
	doubled += strings.Repeat("\n", 200)
	frames, source, rejects, err := readAll(t, strings.NewReader(doubled), Options{})
	require.NoError(t, err)
	at, bad := 0, 0
	first := true
	for line := range strings.SplitSeq(doubled, "\n") {
		if first {
			line = strings.TrimPrefix(line, "\xEF\xBB\xBF")
			first = false
		}
		want, iface, ok, malformed := oracle(line)
		if malformed {
			require.Less(t, bad, len(rejects), "not rejected: %q", line)
			bad++
			continue
		}
		if !ok {
			continue
		}
		require.Less(t, at, len(frames), "rejected: %q (%v)", line, rejects)
		got := frames[at]
		at++
		require.Equal(t, iface, source.Interfaces()[got.Bus], "%q", line)
		got.Record, got.Offset, got.Bus = 0, 0, 0
		clear(want.Data[want.Len:])
		require.Equal(t, want, got, "%q", line)
	}
	require.Equal(t, at, len(frames))
	require.Equal(t, bad, len(rejects))
}

// The seeds are also what TestMutatedLines changes.
var (
	logSeeds = []string{
		"(1699999999.123456) can0 123#1122334455667788", "(1699999999.123456) can0 18DAF110#1122", "(1.5) can0 123##3001122",
		"(1699999999.123456789) can_chassis 123#1122334455667788 R\r", "(1699999999.123456)  can0 123#1122 T",
		"(1699999999.123456) can0 123#R4", "(1699999999.999999) vcan0 7FF#", "(1.0) can0 123#1122334455667788_9", "(1.0) c 20000004#0008000000006000",
		"(1.0) can0 123#11.22 R\n# comment\n\n(2.0) can0 123#33", "(0.000001) can0 123##1" + strings.Repeat("00", 64), "x 123#", "(1.0) can0 123##1.11.22",
		"\xEF\xBB\xBF(1.0) can0 123#11", "\tcan0\t123#11", "(1.000000) can0 123##511223344556677889900AABB",
	}
	columnSeeds = []string{
		"  can0  123   [8]  11 22 33 44 55 66 77 88", " (1699999999.123456)  can0  18DAF110   [2]  11 22   '..'",
		" (2023-11-14 22:13:19.123456)  can0  123   [0]", "  can0  123   [3]  remote request", "  can0  20000040   [1]  00   ERRORFRAME",
		"  can0  TX B E  123  [12]  00 01 02 03 04 05 06 07 08 09 0A 0B", "  can0  123   {B}  11 22 33 44 55 66 77 88", "\tlost-arbitration{at bit 3}",
		"  can0  123   [3]  33`22`11   `3\".`", "  can0  123   [2]  00010001 00100010", "  can0  123   [2]  00010001`00100010",
		"  \x1b[31mcan0\x1b[0m  123   [2]  11 22\x1b[0m", "  can0  20000004   [2]  00 08   ERRORFRAME with words", "  can0  123  [08]  11.22.33.44.55.66.77.88",
	}
)

func FuzzLogForm(f *testing.F) { fuzzLines(f, logSeeds) }

func FuzzColumnForm(f *testing.F) { fuzzLines(f, columnSeeds) }

func fuzzLines(f *testing.F, seeds []string) {
	for _, seed := range seeds {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) < 10000 {
			compareWithOracle(t, text)
		}
	})
}

// Lines that are nearly right: a byte changed, lost or put in here and there.
func TestMutatedLines(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		var text strings.Builder
		for range rapid.IntRange(1, 20).Draw(r, "lines") {
			line := []byte(rapid.SampledFrom(slices.Concat(logSeeds, columnSeeds)).Draw(r, "seed"))
			for range rapid.IntRange(0, 3).Draw(r, "changes") {
				at := rapid.IntRange(0, len(line)-1).Draw(r, "at")
				// Mostly bytes that mean something somewhere.
				c := rapid.SampledFrom([]byte("0123456789abcdefABCDEFGgRT#._()[]{}'` \t\r\n\x1bm;-:@/\x00\x80\xff")).Draw(r, "byte")
				switch rapid.IntRange(0, 2).Draw(r, "change") {
				case 0:
					line[at] = c
				case 1:
					line = slices.Insert(line, at, c)
				case 2:
					line = append(slices.Delete(line, at, at+1), ' ')
				}
			}
			text.Write(line)
			text.WriteByte('\n')
		}
		compareWithOracle(r, text.String())
	})
}
