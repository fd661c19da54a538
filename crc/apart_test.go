package crc

import (
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func TestApartEqualsRegister(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		width := rapid.IntRange(1, MaxApart).Draw(t, "width")
		p := Params{
			Width: width, Poly: rapid.Uint64Range(0, widthMask(width)).Draw(t, "poly") | 1, Init: rapid.Uint64Range(0, widthMask(width)).Draw(t, "init"),
			XorOut: rapid.Uint64Range(0, widthMask(width)).Draw(t, "xorout"), ReflectIn: rapid.Bool().Draw(t, "refin"), ReflectOut: rapid.Bool().Draw(t, "refout"),
		}
		e := New(p)
		data := rapid.SliceOfN(rapid.Byte(), 0, 20).Draw(t, "data")
		sum := e.Zeros(len(data))
		for i, b := range data {
			sum ^= uint64(e.Apart(len(data) - 1 - i)[b])
		}
		require.Equal(t, e.Checksum(data), sum)
	})
}
