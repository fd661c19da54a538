package crc_test

import (
	"encoding/hex"
	"hash/crc32"
	"hash/crc64"
	"math/bits"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"

	"busloom/crc"
)

func engine(t require.TestingT, name string) *crc.Engine {
	p, ok := crc.Named(name)
	require.True(t, ok, name)
	require.NoError(t, p.Validate())
	return crc.New(p)
}

func unhex(t require.TestingT, text string) []byte {
	data, err := hex.DecodeString(strings.ReplaceAll(text, " ", ""))
	require.NoError(t, err)
	return data
}

// Check values: AUTOSAR "Specification of CRC Routines" (document 016),
// clauses 7.2.1.1, 7.2.1.2, 7.2.2.1, 7.2.2.2, 7.2.3.1, 7.2.3.2 and 7.2.4, as
// quoted in Apache NuttX libs/libc/misc (lib_crc8h1d.c, lib_crc8h2f.c,
// lib_crc16h1021.c, lib_crc16h8005.c, lib_crc32h04c11db7.c,
// lib_crc32hf4acfb13.c, lib_crc64emac.c).
func TestNamedCheckValues(t *testing.T) {
	want := []struct {
		name  string
		check uint64
	}{
		{"crc8_j1850", 0x4B},
		{"crc8_h2f", 0xDF},
		{"crc16_ccitt_false", 0x29B1},
		{"crc16_arc", 0xBB3D},
		{"crc32", 0xCBF43926},
		{"crc32_p4", 0x1697D06A},
		{"crc64", 0x995DC9BBDF1939FA},
	}
	var names []string
	for _, w := range want {
		names = append(names, w.name)
		e := engine(t, w.name)
		require.Equal(t, w.check, e.Check(), w.name)
		require.Equal(t, w.check, e.Checksum([]byte("123456789")), w.name)
		require.Equal(t, w.name, e.Params().Name)
	}
	require.Equal(t, names, crc.Names())
	_, ok := crc.Named("crc8")
	require.False(t, ok)
}

// The same document: the "magic check", the value left after data and its CRC
// ran through (residue), is C4 for CRC8 and 42 for CRC8H2F, each before the
// final exclusive or.
func TestMagicCheck(t *testing.T) {
	for name, want := range map[string]uint64{"crc8_j1850": 0xC4, "crc8_h2f": 0x42} {
		e := engine(t, name)
		data := []byte("123456789")
		data = append(data, byte(e.Checksum(data)))
		require.Equal(t, want, e.Checksum(data)^e.Params().XorOut, name)
	}
}

// AUTOSAR "Specification of CRC Routines" (document 016), the tables of data
// and results beside each routine, as quoted in the sources above and in
// torsko/autosar-e2e crc/test/test_data.h.
func TestAutosarTable(t *testing.T) {
	names := []string{"crc8_j1850", "crc8_h2f", "crc16_ccitt_false", "crc16_arc", "crc32", "crc32_p4", "crc64"}
	for _, row := range []struct {
		data string
		want [7]uint64
	}{
		{"00 00 00 00", [7]uint64{0x59, 0x12, 0x84C0, 0x0000, 0x2144DF1C, 0x6FB32240, 0xF4A586351E1B9F4B}},
		{"F2 01 83", [7]uint64{0x37, 0xC2, 0xD374, 0xC2E1, 0x24AB9D77, 0x4F721A25, 0x319C27668164F1C6}},
		{"0F AA 00 55", [7]uint64{0x79, 0xC6, 0x2023, 0x0BE3, 0xB6C9B287, 0x20662DF8, 0x54C5D0F7667C1575}},
		{"00 FF 55 11", [7]uint64{0xB8, 0x77, 0xB8F9, 0x6CCF, 0x32A06212, 0x9BD7996E, 0xA63822BE7E0704E6}},
		{"33 22 55 AA BB CC DD EE FF", [7]uint64{0xCB, 0x11, 0xF53F, 0xAE98, 0xB0AE863D, 0xA65A343D, 0x701ECEB219A8E5D5}},
		{"92 6B 55", [7]uint64{0x8C, 0x33, 0x0745, 0xE24E, 0x9CDEA29B, 0xEE688A78, 0x5FAA96A9B59F3E4E}},
		{"FF FF FF FF", [7]uint64{0x74, 0x6C, 0x1D0F, 0x9401, 0xFFFFFFFF, 0xFFFFFFFF, 0xFFFFFFFF00000000}},
	} {
		for i, name := range names {
			require.Equal(t, row.want[i], engine(t, name).Checksum(unhex(t, row.data)), "%s of %s", name, row.data)
		}
	}
}

// Parameters and check values: Catalogue of parametrised CRC algorithms,
// entries crc-15-can, crc-17-can-fd, crc-21-can-fd. The start value 0 of the
// last two is that of CAN FD before ISO 11898-1:2015.
func TestWidthsOfCAN(t *testing.T) {
	for _, c := range []struct {
		p     crc.Params
		check uint64
	}{
		{crc.Params{Width: 15, Poly: 0x4599}, 0x059E},
		{crc.Params{Width: 17, Poly: 0x1685B}, 0x04F03},
		{crc.Params{Width: 21, Poly: 0x102899}, 0x0ED841},
	} {
		require.NoError(t, c.p.Validate())
		require.Equal(t, c.check, crc.New(c.p).Check(), "CRC-%d", c.p.Width)
	}
}

// A CAN payload of a real car whose last byte is the CRC-8 J1850 of the seven
// before it: a note on elektronik-keller.de, "CRC-8 J1850".
func TestPayloadOfRealCar(t *testing.T) {
	require.Equal(t, uint64(0x6C), engine(t, "crc8_j1850").Checksum(unhex(t, "00 C0 DF AC AA 07 40")))
}

func TestAgainstStandardLibrary(t *testing.T) {
	c32, c64 := engine(t, "crc32"), engine(t, "crc64")
	castagnoli := crc.New(crc.Params{Width: 32, Poly: 0x1EDC6F41, Init: 0xFFFFFFFF, ReflectIn: true, ReflectOut: true, XorOut: 0xFFFFFFFF})
	iso := crc.New(crc.Params{Width: 64, Poly: 0x1B, Init: ^uint64(0), ReflectIn: true, ReflectOut: true, XorOut: ^uint64(0)})
	rapid.Check(t, func(t *rapid.T) {
		data := rapid.SliceOf(rapid.Byte()).Draw(t, "data")
		require.Equal(t, uint64(crc32.ChecksumIEEE(data)), c32.Checksum(data))
		require.Equal(t, uint64(crc32.Checksum(data, crc32.MakeTable(crc32.Castagnoli))), castagnoli.Checksum(data))
		require.Equal(t, crc64.Checksum(data, crc64.MakeTable(crc64.ECMA)), c64.Checksum(data))
		require.Equal(t, crc64.Checksum(data, crc64.MakeTable(crc64.ISO)), iso.Checksum(data))
	})
}

// serial is the CRC by its definition: a shift register of single bits, its
// heaviest stage first, one message bit per step.
func serial(p crc.Params, data []byte) uint64 {
	register := make([]bool, p.Width)
	for i := range register {
		register[i] = p.Init>>(p.Width-1-i)&1 != 0
	}
	for _, b := range data {
		if p.ReflectIn {
			b = bits.Reverse8(b)
		}
		for k := 7; k >= 0; k-- {
			feedback := register[0] != (b>>k&1 != 0)
			for i := range register {
				next := i+1 < len(register) && register[i+1]
				tap := p.Poly>>(p.Width-1-i)&1 != 0
				register[i] = next != (tap && feedback)
			}
		}
	}
	var out uint64
	for i := range register {
		from := i
		if p.ReflectOut {
			from = p.Width - 1 - i
		}
		out <<= 1
		if register[from] {
			out |= 1
		}
	}
	return out ^ p.XorOut
}

// Three of the check values above prove the oracle itself.
func TestSerialOracle(t *testing.T) {
	for name, want := range map[string]uint64{"crc8_h2f": 0xDF, "crc16_arc": 0xBB3D, "crc64": 0x995DC9BBDF1939FA} {
		p, _ := crc.Named(name)
		require.Equal(t, want, serial(p, []byte("123456789")), name)
	}
}

func drawParams(t *rapid.T) crc.Params {
	width := rapid.IntRange(1, 64).Draw(t, "width")
	some := func(name string) uint64 { return rapid.Uint64().Draw(t, name) >> (64 - width) }
	return crc.Params{
		Width:      width,
		Poly:       some("poly") | 1,
		Init:       some("init"),
		ReflectIn:  rapid.Bool().Draw(t, "reflect in"),
		ReflectOut: rapid.Bool().Draw(t, "reflect out"),
		XorOut:     some("xorout"),
	}
}

func TestAgainstSerial(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := drawParams(t)
		require.NoError(t, p.Validate())
		data := rapid.SliceOf(rapid.Byte()).Draw(t, "data")
		e := crc.New(p)
		require.Equal(t, serial(p, data), e.Checksum(data), "%+v of % X", p, data)

		// In two parts, and byte by byte.
		cut := rapid.IntRange(0, len(data)).Draw(t, "cut")
		require.Equal(t, e.Checksum(data), e.Finish(e.Update(e.Update(e.Start(), data[:cut]), data[cut:])))
		reg := e.Start()
		for _, b := range data {
			reg = e.UpdateByte(reg, b)
		}
		require.Equal(t, e.Checksum(data), e.Finish(reg))
	})
}

func TestEveryWidthAgainstSerial(t *testing.T) {
	data := []byte("123456789")
	for width := 1; width <= 64; width++ {
		for turns := range 4 {
			all := ^uint64(0) >> (64 - width)
			p := crc.Params{Width: width, Poly: 0x42F0E1EBA9EA3693&all | 1, Init: 0x0123456789ABCDEF & all, ReflectIn: turns&1 != 0, ReflectOut: turns&2 != 0, XorOut: 0xF0F0F0F0F0F0F0F0 & all}
			require.Equal(t, serial(p, data), crc.New(p).Check(), "%+v", p)
		}
	}
}

func FuzzEngine(f *testing.F) {
	f.Add(uint8(8), uint64(0x1D), uint64(0xFF), uint64(0xFF), uint8(0), []byte("123456789"))
	f.Add(uint8(15), uint64(0x4599), uint64(0), uint64(0), uint8(0), []byte{0})
	f.Add(uint8(3), uint64(3), uint64(7), uint64(7), uint8(3), []byte{0xFF, 0x00})
	f.Fuzz(func(t *testing.T, width uint8, poly, init, xor uint64, turns uint8, data []byte) {
		p := crc.Params{Width: int(width), Poly: poly, Init: init, ReflectIn: turns&1 != 0, ReflectOut: turns&2 != 0, XorOut: xor}
		if p.Validate() != nil {
			return
		}
		require.Equal(t, serial(p, data), crc.New(p).Checksum(data))
	})
}

func TestValidate(t *testing.T) {
	for _, c := range []struct {
		p    crc.Params
		want string
	}{
		{crc.Params{Width: 0, Poly: 1}, "a CRC has 1 to 64 bits, not 0"},
		{crc.Params{Width: -1, Poly: 1}, "a CRC has 1 to 64 bits, not -1"},
		{crc.Params{Width: 65, Poly: 1}, "a CRC has 1 to 64 bits, not 65"},
		{crc.Params{Width: 8, Poly: 0x11D}, "the polynomial 0x11D needs more than 8 bits (its top bit isn't written)"},
		{crc.Params{Width: 8, Poly: 0xB8}, "the polynomial 0xB8 has no constant term: written heaviest bit first its lightest bit is 1, as in 0x1D"},
		{crc.Params{Width: 8, Poly: 0x1C}, "the polynomial 0x1C has no constant term: its lightest bit must be 1"},
		{crc.Params{Width: 8}, "the polynomial 0x0 has no constant term: its lightest bit must be 1"},
		{crc.Params{Width: 8, Poly: 0x1D, Init: 0x100}, "the initial value 0x100 needs more than 8 bits"},
		{crc.Params{Width: 15, Poly: 0x4599, XorOut: 0xFFFF}, "the final value 0xFFFF needs more than 15 bits"},
	} {
		require.EqualError(t, c.p.Validate(), c.want)
	}
	require.NoError(t, crc.Params{Width: 1, Poly: 1}.Validate())
	require.NoError(t, crc.Params{Width: 64, Poly: ^uint64(0), Init: ^uint64(0), XorOut: ^uint64(0)}.Validate())
}

// A CRC of one bit with the polynomial x + 1 is the parity of the data.
func TestParity(t *testing.T) {
	e := crc.New(crc.Params{Width: 1, Poly: 1})
	rapid.Check(t, func(t *rapid.T) {
		data := rapid.SliceOf(rapid.Byte()).Draw(t, "data")
		ones := 0
		for _, b := range data {
			ones += bits.OnesCount8(b)
		}
		require.Equal(t, uint64(ones%2), e.Checksum(data))
	})
}

// Worked by hand.
func TestXORAndSum(t *testing.T) {
	data := []byte{0x12, 0x34, 0xFF, 0x80}
	require.Equal(t, byte(0x59), crc.XOR8(0, data))
	require.Equal(t, byte(0x59^0xA5), crc.XOR8(0xA5, data))
	require.Equal(t, byte(0xC5), crc.SUM8(0, data)) // 0x1C5 modulo 0x100
	require.Equal(t, byte(0xC6), crc.SUM8(1, data))
	require.Equal(t, crc.SUM8(0, data), crc.SUM8(crc.SUM8(0, data[:2]), data[2:]))
	require.Equal(t, byte(7), crc.XOR8(7, nil))
	require.Equal(t, byte(7), crc.SUM8(7, nil))
}

func TestNoAllocations(t *testing.T) {
	e := engine(t, "crc16_arc")
	data := make([]byte, 64)
	require.Zero(t, testing.AllocsPerRun(100, func() { sink += e.Checksum(data) + uint64(crc.XOR8(0, data)) }))
}

var sink uint64

func BenchmarkChecksum(b *testing.B) {
	data := make([]byte, 64)
	for i := range data {
		data[i] = byte(i * 37)
	}
	for _, name := range []string{"crc8_j1850", "crc16_arc", "crc32_p4", "crc64"} {
		e := engine(b, name)
		for _, size := range []int{7, 64} {
			b.Run(name+"/"+map[int]string{7: "classic", 64: "fd"}[size], func(b *testing.B) {
				b.SetBytes(int64(size))
				for b.Loop() {
					sink += e.Checksum(data[:size])
				}
			})
		}
	}
}
