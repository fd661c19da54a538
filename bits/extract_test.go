package bits_test

import (
	"math/big"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"

	"busloom/bits"
)

// Expected values are read off the payload by hand.
func TestExtract(t *testing.T) {
	payload := []byte{0x12, 0x34, 0x56, 0x78, 0x9A, 0xBC, 0xDE, 0xF0, 0x0F, 0x1E, 0x2D, 0x3C}
	for _, c := range []struct {
		place string
		want  uint64
		shape bits.Shape
	}{
		{"0.7..0.0", 0x12, bits.WordLE},
		{"0.7..1.0", 0x1234, bits.WordBE},
		{"1.7..0.0", 0x3412, bits.WordLE},
		{"0.3..1.4", 0x23, bits.WordBE},
		{"1.3..0.4", 0x41, bits.WordLE},
		{"3.6", 1, bits.WordLE},
		{"3.2", 0, bits.WordLE},
		{"0.7..7.0", 0x123456789ABCDEF0, bits.WordBE},
		{"7.7..0.0", 0xF0DEBC9A78563412, bits.WordLE},
		{"4.7..11.0", 0x9ABCDEF00F1E2D3C, bits.WordBE},
		{"11.7..4.0", 0x3C2D1E0FF0DEBC9A, bits.WordLE},
		{"10.7..11.0", 0x2D3C, bits.WordBE},
		{"7.7..8.0", 0xF00F, bits.WordBE},
		{"0.3..8.4", 0x23456789ABCDEF00, bits.Pieces},
		{"8.3..0.4", 0xFF0DEBC9A7856341, bits.Pieces},
		{"0.1..0.0 then 4.7..4.0", 0x29A, bits.Pieces},
		{"11.3..11.0 then 0.7..0.4", 0xC1, bits.Pieces},
	} {
		t.Run(c.place, func(t *testing.T) {
			p := parse(t, c.place)
			require.NoError(t, p.Check())
			e := bits.Compile(p)
			require.Equal(t, c.want, e.Raw(payload))
			require.Equal(t, c.want, e.Raw(payload[:e.Need()]), "the shortest payload that reaches it")
			require.Equal(t, c.shape, e.Shape)
			require.Equal(t, p.LastByte()+1, e.Need())

			out := append([]byte(nil), payload...)
			bits.Insert(out, p, c.want)
			require.Equal(t, payload, out)
			bits.Insert(out, p, ^c.want)
			require.Equal(t, ^c.want&e.Mask, e.Raw(out))
		})
	}
}

// checkPlace holds Raw and Insert of a place against the walk over its bits.
func checkPlace(t require.TestingT, p bits.Place, payload []byte, raw uint64) {
	e := bits.Compile(p)
	want := read(payload, p)
	require.True(t, want.IsUint64())
	require.Equal(t, want.Uint64(), e.Raw(payload), "place %s of % X", p, payload)

	out := append([]byte(nil), payload...)
	bits.Insert(out, p, raw)
	require.Equal(t, write(payload, p, new(big.Int).SetUint64(raw)), out, "place %s, raw 0x%X", p, raw)
	require.Equal(t, raw&e.Mask, e.Raw(out))
	bits.Insert(out, p, want.Uint64())
	require.Equal(t, payload, out, "putting back what was there")

	// What a caller may do by itself with a word shape.
	if e.Shape == bits.Pieces {
		return
	}
	var word [8]byte
	copy(word[:], payload[e.Offset:])
	if e.Shape == bits.WordLE {
		for i := range 4 {
			word[i], word[7-i] = word[7-i], word[i]
		}
	}
	v := new(big.Int).SetBytes(word[:])
	v.Rsh(v, uint(e.Shift)).And(v, new(big.Int).SetUint64(e.Mask))
	require.Equal(t, want.Uint64(), v.Uint64())
}

func TestRawAndInsertAgainstWalk(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		size := rapid.IntRange(1, 64).Draw(t, "size")
		p := drawPlace(t, size, 64)
		payload := drawPayload(t, rapid.IntRange(p.LastByte()+1, 64).Draw(t, "length"))
		checkPlace(t, p, payload, rapid.Uint64().Draw(t, "raw"))
	})
}

// Every single run of up to 64 bits that starts in the first nine bytes.
func TestEveryRun(t *testing.T) {
	payload := []byte{0xC3, 0x5A, 0x96, 0x0F, 0x71, 0xE8, 0x2D, 0xB4, 0x69, 0x1E, 0xD2, 0x87, 0x3C, 0xA5, 0x4B, 0xF0, 0x17, 0x8D}
	n := 0
	for heavy := range 9 * 8 {
		for light := range len(payload) * 8 {
			r := bits.Run{Heavy: bits.Bit{Byte: heavy / 8, Bit: heavy % 8}, Light: bits.Bit{Byte: light / 8, Bit: light % 8}}
			p := bits.Place{Runs: []bits.Run{r}}
			if p.Check() != nil || len(walk(r)) > 64 {
				continue
			}
			n++
			e := bits.Compile(p)
			if want := read(payload, p).Uint64(); e.Raw(payload) != want || e.Raw(payload[:e.Need()]) != want {
				require.Equal(t, want, e.Raw(payload), "place %s", p)
			}
		}
	}
	require.Greater(t, n, 5000)
}

func FuzzPlace(f *testing.F) {
	for _, text := range []string{"0.7..1.0", "1.7..0.0", "0.3..8.4", "8.3..0.4", "0.1..0.0 then 4.7..4.0", "3.0..3.7", "63.7..56.0", "0.8", "64.0", "7.7..0.0 then 8.7"} {
		f.Add(text, []byte{0x12, 0x34, 0x56, 0x78, 0x9A, 0xBC, 0xDE, 0xF0, 0x0F}, uint64(0x0123456789ABCDEF))
	}
	f.Fuzz(func(t *testing.T, text string, payload []byte, raw uint64) {
		p, err := bits.Parse(text)
		if err != nil {
			return
		}
		// A run of one bit is written as the bit alone.
		again, err := bits.Parse(p.String())
		require.NoError(t, err)
		require.Equal(t, p, again)
		require.NotEmpty(t, bits.Picture(p))
		if p.Check() != nil || p.Width() > 64 {
			return
		}
		payload = append(payload, make([]byte, 64)...)[:64]
		checkPlace(t, p, payload, raw)
	})
}

func TestBytes(t *testing.T) {
	payload := []byte{'a', 'b', 'c', 'd', 'e', 'f'}
	for _, c := range []struct{ place, want string }{
		{"1.7..3.0", "bcd"},
		{"3.7..1.0", "dcb"},
		{"2.7..2.0", "c"},
		{"4.7..5.0 then 0.7..1.0", "efab"},
		{"0.7..0.0 then 5.7..4.0", "afe"},
	} {
		p := parse(t, c.place)
		require.True(t, p.WholeBytes())
		require.Equal(t, "="+c.want, string(bits.AppendBytes([]byte("="), payload, p)), c.place)

		out := []byte("......")
		require.Equal(t, len(c.want), bits.InsertBytes(out, p, []byte(c.want+"zz")), "no more than the place holds")
		require.Equal(t, c.want, string(bits.AppendBytes(nil, out, p)))
		require.Equal(t, 1, bits.InsertBytes(out, p, []byte("X")))
		require.Equal(t, "X"+c.want[1:], string(bits.AppendBytes(nil, out, p)))
	}
}

// A place of whole bytes and its number are the same bits.
func TestBytesAgainstWalk(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		payload := drawPayload(t, 64)
		a, b := rapid.IntRange(0, 63).Draw(t, "heavy"), rapid.IntRange(0, 63).Draw(t, "light")
		p := bits.Place{Runs: []bits.Run{{Heavy: bits.Bit{Byte: a, Bit: 7}, Light: bits.Bit{Byte: b, Bit: 0}}}}
		got := bits.AppendBytes(nil, payload, p)
		require.Len(t, got, p.Width()/8)
		require.Zero(t, read(payload, p).Cmp(new(big.Int).SetBytes(got)))
		out := make([]byte, 64)
		require.Equal(t, len(got), bits.InsertBytes(out, p, got))
		require.Equal(t, write(make([]byte, 64), p, read(payload, p)), out)
	})
}

func TestNoAllocations(t *testing.T) {
	payload := make([]byte, 64)
	for _, text := range []string{"0.7..1.0", "20.3..12.4", "0.1..0.0 then 4.7..4.0"} {
		p := parse(t, text)
		e := bits.Compile(p)
		require.Zero(t, testing.AllocsPerRun(100, func() { bits.Insert(payload, p, e.Raw(payload)+1) }), text)
	}
	p := parse(t, "8.7..15.0")
	text := make([]byte, 0, 8)
	require.Zero(t, testing.AllocsPerRun(100, func() {
		text = bits.AppendBytes(text[:0], payload, p)
		bits.InsertBytes(payload, p, text)
	}))
}

func BenchmarkRaw(b *testing.B) {
	payload := make([]byte, 64)
	for i := range payload {
		payload[i] = byte(i * 37)
	}
	for _, c := range []struct {
		name, place string
		size        int
	}{
		{"light byte first", "3.7..2.0", 8},
		{"heavy byte first", "2.7..3.0", 8},
		{"short payload", "2.7..3.0", 4},
		{"fd", "40.7..41.0", 64},
		{"nine bytes", "20.3..12.4", 64},
		{"split", "0.1..0.0 then 4.7..4.0", 8},
	} {
		b.Run(c.name, func(b *testing.B) {
			e := bits.Compile(parse(b, c.place))
			sum := uint64(0)
			for b.Loop() {
				sum += e.Raw(payload[:c.size])
			}
			sink = sum
		})
	}
}

func BenchmarkInsert(b *testing.B) {
	payload := make([]byte, 8)
	p := parse(b, "2.7..3.0")
	for b.Loop() {
		bits.Insert(payload, p, 0x1234)
	}
}

var sink uint64
