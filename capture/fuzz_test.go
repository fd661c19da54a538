package capture

import (
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

// compareWithOracle reads a text and each of its lines by the oracle. Lines
// are read twice in a row, so that the fast path, which needs a line before
// it, gets its chance; it also needs room behind the line.
func compareWithOracle(t *testing.T, text string) {
	doubled := ""
	for line := range strings.SplitSeq(text, "\n") {
		doubled += line + "\n" + line + "\n"
	}
	doubled += strings.Repeat("\n", 200)
	frames, source, rejects, err := readAll(t, strings.NewReader(doubled), Options{})
	require.NoError(t, err)
	at, bad := 0, 0
	for line := range strings.SplitSeq(doubled, "\n") {
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

func FuzzLogForm(f *testing.F) {
	for _, seed := range []string{
		"(1699999999.123456) can0 123#1122334455667788", "(1699999999.123456) can0 18DAF110#1122", "(1.5) can0 123##3001122",
		"(1699999999.123456) can0 123#R4", "(1699999999.999999) vcan0 7FF#", "(1.0) can0 123#1122334455667788_9", "(1.0) c 20000004#0008000000006000",
		"(1.0) can0 123#11.22 R\n# comment\n\n(2.0) can0 123#33", "(0.000001) can0 123##1" + strings.Repeat("00", 64), "x 123#",
	} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) < 3000 {
			compareWithOracle(t, text)
		}
	})
}

func FuzzColumnForm(f *testing.F) {
	for _, seed := range []string{
		"  can0  123   [8]  11 22 33 44 55 66 77 88", " (1699999999.123456)  can0  18DAF110   [2]  11 22   '..'",
		" (2023-11-14 22:13:19.123456)  can0  123   [0]", "  can0  123   [3]  remote request", "  can0  20000040   [1]  00   ERRORFRAME",
		"  can0  TX B E  123  [12]  00 01 02 03 04 05 06 07 08 09 0A 0B", "  can0  123   {B}  11 22 33 44 55 66 77 88", "\tlost-arbitration",
	} {
		f.Add(seed)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) < 3000 {
			compareWithOracle(t, text)
		}
	})
}
