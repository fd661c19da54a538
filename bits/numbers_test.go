package bits_test

import (
	"math"
	"math/big"
	"strconv"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"

	"busloom/bits"
)

// Two's complement by its definition: the heaviest bit weighs -2^(width-1).
func TestSigned(t *testing.T) {
	for _, c := range []struct {
		raw   uint64
		width int
		want  int64
	}{
		{0, 1, 0}, {1, 1, -1},
		{7, 4, 7}, {8, 4, -8}, {15, 4, -1},
		{0x7FF, 12, 2047}, {0x800, 12, -2048},
		{0x8000, 16, math.MinInt16}, {0xFFFF, 16, -1},
		{1 << 63, 64, math.MinInt64}, {math.MaxUint64, 64, -1}, {math.MaxInt64, 64, math.MaxInt64},
	} {
		require.Equal(t, c.want, bits.SignExtend(c.raw, c.width), "0x%X of %d bits", c.raw, c.width)
		raw, ok := bits.PutSigned(c.want, c.width)
		require.True(t, ok)
		require.Equal(t, c.raw, raw)
	}
	for _, c := range []struct {
		v     int64
		width int
	}{{8, 4}, {-9, 4}, {1, 1}, {-2, 1}, {math.MinInt64, 63}, {math.MaxInt64, 63}} {
		_, ok := bits.PutSigned(c.v, c.width)
		require.False(t, ok, "%d in %d bits", c.v, c.width)
	}
}

func TestSignedAgainstDefinition(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		width := rapid.IntRange(1, 64).Draw(t, "width")
		raw := rapid.Uint64().Draw(t, "raw") >> (64 - width)
		want := new(big.Int)
		for i := range width {
			if raw>>i&1 == 0 {
				continue
			}
			weight := new(big.Int).Lsh(big.NewInt(1), uint(i))
			if i == width-1 {
				weight.Neg(weight)
			}
			want.Add(want, weight)
		}
		require.Equal(t, want.Int64(), bits.SignExtend(raw, width))
		back, ok := bits.PutSigned(want.Int64(), width)
		require.True(t, ok)
		require.Equal(t, raw, back)
	})
}

func TestSignMagnitude(t *testing.T) {
	for _, c := range []struct {
		raw   uint64
		width int
		want  int64
	}{
		{0, 8, 0}, {0x7F, 8, 127}, {0x81, 8, -1}, {0xFF, 8, -127}, {0x801, 12, -1}, {3, 2, -1},
		{math.MaxUint64, 64, -math.MaxInt64}, {math.MaxInt64, 64, math.MaxInt64},
	} {
		require.Equal(t, c.want, bits.SignMagnitude(c.raw, c.width))
		raw, ok := bits.PutSignMagnitude(c.want, c.width)
		require.True(t, ok)
		require.Equal(t, c.raw, raw)
	}
	require.Zero(t, bits.SignMagnitude(0x80, 8), "minus zero")
	require.Zero(t, bits.SignMagnitude(1, 1), "minus zero of one bit")
	for _, v := range []int64{128, -128, math.MinInt64, math.MaxInt64} {
		_, ok := bits.PutSignMagnitude(v, 8)
		require.False(t, ok, "%d in 8 bits", v)
	}
	_, ok := bits.PutSignMagnitude(math.MinInt64, 64)
	require.False(t, ok)
}

func TestPackedDecimal(t *testing.T) {
	for _, c := range []struct {
		raw   uint64
		width int
		want  uint64
	}{
		{0x00, 8, 0}, {0x59, 8, 59}, {0x1999, 16, 1999}, {0x3_59, 10, 359}, {0x5_9, 7, 59}, {0x9, 4, 9}, {1, 1, 1},
		{0x9999_9999_9999_9999, 64, 9999_9999_9999_9999},
	} {
		v, ok := bits.PackedDecimal(c.raw, c.width)
		require.True(t, ok)
		require.Equal(t, c.want, v, "0x%X of %d bits", c.raw, c.width)
		raw, ok := bits.PutPackedDecimal(c.want, c.width)
		require.True(t, ok)
		require.Equal(t, c.raw, raw)
	}
	for _, raw := range []uint64{0x0A, 0xA0, 0xFF, 0xF0} {
		_, ok := bits.PackedDecimal(raw, 8)
		require.False(t, ok, "0x%X", raw)
	}
	for _, c := range []struct {
		v     uint64
		width int
	}{{100, 8}, {80, 7}, {2, 1}, {math.MaxUint64, 64}} {
		_, ok := bits.PutPackedDecimal(c.v, c.width)
		require.False(t, ok, "%d in %d bits", c.v, c.width)
	}
}

// The digits in base 16 read as a number in base 10 are the value, by strconv.
func TestPackedDecimalAgainstStrconv(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		width := rapid.IntRange(1, 64).Draw(t, "width")
		raw := rapid.Uint64().Draw(t, "raw") >> (64 - width)
		want, err := strconv.ParseUint(strconv.FormatUint(raw, 16), 10, 64)
		got, ok := bits.PackedDecimal(raw, width)
		require.Equal(t, err == nil, ok, "0x%X", raw)
		require.Equal(t, want, got)
		if ok {
			back, fits := bits.PutPackedDecimal(want, width)
			require.True(t, fits)
			require.Equal(t, raw, back)
		}
	})
}

// IEEE 754-2019 binary16, well-known values, from memory.
func TestHalfValues(t *testing.T) {
	for _, c := range []struct {
		raw  uint64
		want float64
	}{
		{0x0000, 0},
		{0x3C00, 1},
		{0xC000, -2},
		{0x7BFF, 65504},
		{0xFBFF, -65504},
		{0x0001, 0x1p-24},
		{0x03FF, 0x1p-14 - 0x1p-24},
		{0x0400, 0x1p-14},
		{0x3C01, 1.0009765625},
		{0x3555, 0.333251953125},
		{0x7C00, math.Inf(1)},
		{0xFC00, math.Inf(-1)},
	} {
		require.Equal(t, c.want, bits.Float(c.raw, 16), "0x%04X", c.raw)
		require.Equal(t, c.raw, bits.PutFloat(c.want, 16), "%g", c.want)
	}
	require.Equal(t, uint64(0x3555), bits.PutFloat(1.0/3, 16))
	require.True(t, math.Signbit(bits.Float(0x8000, 16)), "minus zero")
	require.Equal(t, uint64(0x8000), bits.PutFloat(math.Copysign(0, -1), 16))
	require.True(t, math.IsNaN(bits.Float(0x7E00, 16)))
	require.True(t, math.IsNaN(bits.Float(bits.PutFloat(math.NaN(), 16), 16)))
}

// All patterns against the formula of IEEE 754-2019 clause 3.4 for binary16
// (bias 15, 10 bits of fraction): (-1)^s * 2^(e-15) * (1 + f/1024), and for
// e = 0 (-1)^s * 2^-14 * f/1024.
func TestHalfExhaustive(t *testing.T) {
	for raw := range 1 << 16 {
		s, e, f := raw>>15, raw>>10&31, float64(raw&1023)
		want := math.Pow(-1, float64(s))
		switch {
		case e == 31 && f != 0:
			want = math.NaN()
		case e == 31:
			want *= math.Inf(1)
		case e == 0:
			want *= math.Pow(2, -14) * (f / 1024)
		default:
			want *= math.Pow(2, float64(e-15)) * (1 + f/1024)
		}
		got := bits.Float(uint64(raw), 16)
		if math.IsNaN(want) {
			require.True(t, math.IsNaN(got), "0x%04X", raw)
			continue
		}
		if math.Float64bits(want) != math.Float64bits(got) || bits.PutFloat(got, 16) != uint64(raw) {
			require.Equal(t, want, got, "0x%04X", raw)
			require.Equal(t, uint64(raw), bits.PutFloat(got, 16))
		}
	}
}

// Half way between two neighbours the even pattern wins, beside it the nearer
// (IEEE 754-2019 clause 4.3.1, roundTiesToEven).
func TestHalfRounding(t *testing.T) {
	for raw := range uint64(0x7C00) {
		low, next := bits.Float(raw, 16), bits.Float(raw+1, 16)
		if raw == 0x7BFF {
			next = 65536 // where the next pattern would be without infinity
		}
		middle := low + (next-low)/2
		even := raw + raw&1
		for _, sign := range []uint64{0, 0x8000} {
			s := 1 - 2*float64(sign>>15)
			got := []uint64{
				bits.PutFloat(s*math.Nextafter(middle, 0), 16),
				bits.PutFloat(s*middle, 16),
				bits.PutFloat(s*math.Nextafter(middle, math.Inf(1)), 16),
			}
			if got[0] != sign|raw || got[1] != sign|even || got[2] != sign|(raw+1) {
				require.Equal(t, []uint64{sign | raw, sign | even, sign | (raw + 1)}, got, "above 0x%04X", raw)
			}
		}
	}
}

// IEEE 754-2019 binary32 and binary64, well-known values, from memory.
func TestFloatValues(t *testing.T) {
	require.Equal(t, 1.0, bits.Float(0x3F800000, 32))
	require.Equal(t, -2.0, bits.Float(0xC0000000, 32))
	require.Equal(t, math.Inf(1), bits.Float(0x7F800000, 32))
	require.Equal(t, 0x1p-149, bits.Float(1, 32))
	require.Equal(t, 1.0, bits.Float(0x3FF0000000000000, 64))
	require.Equal(t, math.Pi, bits.Float(0x400921FB54442D18, 64))
	require.Equal(t, uint64(0x3F800000), bits.PutFloat(1, 32))
	require.Equal(t, uint64(0x7F800000), bits.PutFloat(1e39, 32))
	require.Equal(t, uint64(0x400921FB54442D18), bits.PutFloat(math.Pi, 64))
	require.Equal(t, uint64(0x40490FDB), bits.PutFloat(math.Pi, 32))
}
