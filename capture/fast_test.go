package capture

import (
	"encoding/binary"
	"encoding/hex"
	"fmt"
	"strconv"
	"strings"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// Every byte in every place of a word, among digits; encoding/hex is the judge.
func TestHexWord(t *testing.T) {
	for place := range 8 {
		for c := range 256 {
			for _, among := range []string{"01234567", "89abcdef", "ABCDEF09", "ffffffff"} {
				text := []byte(among)
				text[place] = byte(c)
				v, n := hexWord(binary.LittleEndian.Uint64(text))
				want := 8
				if _, err := hex.DecodeString("0" + string(text[place:place+1])); err != nil {
					want = place
				}
				require.Equal(t, want, n, "%q", text)
				data, err := hex.DecodeString(string(text[:n&^1]))
				require.NoError(t, err)
				var got [4]byte
				binary.LittleEndian.PutUint32(got[:], v)
				require.Equal(t, data, got[:len(data)], "%q", text)
			}
		}
	}
}

// Every byte in every place of eight digits; strconv is the judge.
func TestEightDigits(t *testing.T) {
	for place := range 8 {
		for c := range 256 {
			for _, among := range []string{"01234567", "99999999", "00000000"} {
				text := []byte(among)
				text[place] = byte(c)
				v, ok := eightDigits(binary.LittleEndian.Uint64(text))
				want, err := strconv.ParseUint(string(text), 10, 64)
				require.Equal(t, err == nil, ok, "%q", text)
				if ok {
					require.Equal(t, want, v)
				}
			}
		}
	}
}

// prime readies a parser: a second and two names are known.
func prime(t require.TestingT) *parser {
	p := &parser{name: "test.log", ifaces: newInterfaces()}
	var f frame.Frame
	require.True(t, p.general([]byte("(1699999999.0) can0 123#"), &f))
	require.True(t, p.general([]byte("(1699999999.0) can_chassis 123#"), &f))
	return p
}

// compareFast holds the fast path against the general parser: what it takes,
// that one reads likewise; what that one rejects, it leaves.
func compareFast(t require.TestingT, line string) (taken bool) {
	text := append([]byte(line+"\n"), make([]byte, 200)...)
	var fast, general frame.Frame
	end := prime(t).fastLine(text, 0, &fast)
	if end == 0 || end > len(line)+1 {
		return false
	}
	require.Equal(t, len(line)+1, end, "%q", line)
	require.True(t, prime(t).general([]byte(line), &general), "only the fast path takes %q", line)
	clear(fast.Data[fast.Len:])
	clear(general.Data[general.Len:])
	general.Record = 0
	require.Equal(t, general, fast, "%q", line)
	return true
}

// The fast path takes what it is made for, so that the other tests mean
// something.
func TestFastPathTakes(t *testing.T) {
	for n := range 9 {
		for _, name := range []string{"can0", "can_chassis", "  can0"} {
			for _, id := range []string{"7FF", "1abcDEF0"} {
				for _, end := range []string{"", "\r", " R", " T\r"} {
					for _, fraction := range []string{"123456", "123456789"} {
						for _, sign := range []string{"#", "##3"} {
							line := "(1699999999." + fraction + ") " + name + " " + id + sign + strings.Repeat("5a", n) + end
							require.True(t, compareFast(t, line), line)
						}
					}
				}
			}
		}
	}
	for _, n := range []int{12, 16, 20, 24, 32, 48, 64} {
		require.True(t, compareFast(t, fmt.Sprintf("(1699999999.123456) can0 123##1%s", strings.Repeat("5A", n))))
	}
	for _, line := range []string{
		"", "(1699999998.123456) can0 123#11", "(1699999999.123456) can1 123#11", "(1699999999.12345) can0 123#11", "(1699999999.12345x) can0 123#11",
		"(1699999999.123456) can0 800#11", "(1699999999.123456) can0 20000000#11", "(1699999999.123456) can0 123#1", "(1699999999.123456) can0 123#11223344556677881",
		"(1699999999.123456) can0 123#112233445566778811", "(1699999999.123456) can0 123##8", "(1699999999.123456) can0 123##0112233445566778899",
		"(1699999999.123456) can0 123##0" + strings.Repeat("11", 65), "(1699999999.123456) can0 123#11 X", "(1699999999.123456) can0 123#R",
	} {
		require.False(t, compareFast(t, line), line)
	}
}

func TestFastPathAgreesWithGeneral(t *testing.T) {
	rapid.Check(t, func(r *rapid.T) {
		f := anyFrame(r)
		name := rapid.SampledFrom([]string{"can0", "can_chassis"}).Draw(r, "name")
		line := []byte(logText(&f, name, fmt.Sprintf("(1699999999.%06d)", f.Time%1e6), false))
		for range rapid.IntRange(0, 2).Draw(r, "changes") {
			at := rapid.IntRange(12, len(line)-1).Draw(r, "at")
			line[at] = rapid.SampledFrom([]byte("019afAFgG#.) RT\r\x00\xb0")).Draw(r, "byte")
		}
		compareFast(r, string(line))
	})
}

func FuzzFastPath(f *testing.F) {
	for _, tail := range []string{"123456) can0 123#1122334455667788", "123456789) can_chassis 18DAF110##31122 R\r", "123456)   can0 7ff#", "123456) \x00\x00\x00\x00\x00\x00\x00\x00 123#"} {
		f.Add(tail)
	}
	f.Fuzz(func(t *testing.T, tail string) {
		if len(tail) < maxLine-20 && !strings.Contains(tail, "\n") {
			compareFast(t, "(1699999999."+tail)
		}
	})
}
