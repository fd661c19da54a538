package heron

import (
	"encoding/binary"
	"encoding/hex"
	"math"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func unhex(t *testing.T, text string) []byte {
	t.Helper()
	b, err := hex.DecodeString(strings.ReplaceAll(text, " ", ""))
	require.NoError(t, err)
	return b
}

// Layouts worked out on paper: the bits of the raw value laid into the drawing
// of the bytes one by one.
func TestBitsOnPaper(t *testing.T) {
	for _, c := range []struct {
		name  string
		write func(d []byte)
		want  string
	}{
		{"0.7..1.0, 80 km/h in 0.01: 8000 = 1F40", func(d []byte) { down(d, 0, 7, 16, 8000) }, "1F 40 00 00"},
		{"1.7..0.0, the same the other way round", func(d []byte) { up(d, 0, 0, 16, 8000) }, "40 1F 00 00"},
		{"1.3..2.0, twelve bits ABC", func(d []byte) { down(d, 1, 3, 12, 0xABC) }, "00 0A BC 00"},
		{"1.7..2.4, twelve bits ABC", func(d []byte) { down(d, 1, 7, 12, 0xABC) }, "00 AB C0 00"},
		{"2.1..1.4, six bits 101101", func(d []byte) { up(d, 1, 4, 6, 0b101101) }, "00 D0 02 00"},
		{"0.2, one bit", func(d []byte) { flag(d, 0, 2, true) }, "04 00 00 00"},
		{"0.1..0.0 then 3.7..3.0, lift 9.7 mm in 0.02: 485 = 1E5", func(d []byte) { up(d, 0, 0, 2, 485>>8); d[3] = 485 & 0xFF }, "01 00 00 E5"},
	} {
		d := make([]byte, 4)
		c.write(d)
		require.Equal(t, unhex(t, c.want), d, c.name)
	}
}

// encoding/binary knows both byte orders.
func TestBitsAgainstByteOrders(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		value := rapid.Uint64().Draw(t, "value")
		for _, old := range []byte{0x00, 0xFF} {
			d := make([]byte, 10)
			for i := range d {
				d[i] = old
			}
			down(d, 1, 7, 64, value)
			require.Equal(t, value, binary.BigEndian.Uint64(d[1:]))
			up(d, 1, 0, 64, value)
			require.Equal(t, value, binary.LittleEndian.Uint64(d[1:]))
			require.Equal(t, []byte{old, old}, []byte{d[0], d[9]})
		}
	})
}

func TestRawValues(t *testing.T) {
	require.Equal(t, uint64(8000), scaled(80, 0.01, 30000))
	require.Equal(t, uint64(30000), scaled(400, 0.01, 30000))
	require.Equal(t, uint64(0), scaled(-3, 0.01, 30000))
	require.Equal(t, uint64(0), scaled(math.NaN(), 1, 100))
	require.Equal(t, byte(0xFE), byte(signed(-2.4, 1, 100)))
	require.Equal(t, uint64(0x8000|15), signMagnitude(-1.5, 0.1, 16, 800))
	require.Equal(t, uint64(0x2026), digits(2026, 4))
	// IEEE 754-2019 half precision: sign 1, exponent 5 (bias 15), fraction 10.
	require.Equal(t, uint64(0x3C00), half(1))
	require.Equal(t, uint64(0xC000), half(-2))
	require.Equal(t, uint64(0x4400), half(4))
	require.Equal(t, uint64(0x3800), half(0.5))
	require.Equal(t, uint64(0x0400), half(1.0/16384)) // the smallest normal number
	require.Equal(t, uint64(0), half(1.0/32768))
}

// AUTOSAR "Specification of CRC Routines" (document 016), tables of results.
func TestChecksumsOfAutosar(t *testing.T) {
	for _, c := range []struct {
		data       string
		j1850, h2f byte
		ccitt      uint16
	}{
		{"00 00 00 00", 0x59, 0x12, 0x84C0},
		{"F2 01 83", 0x37, 0xC2, 0xD374},
		{"0F AA 00 55", 0x79, 0xC6, 0x2023},
		{"00 FF 55 11", 0xB8, 0x77, 0xB8F9},
		{"33 22 55 AA BB CC DD EE FF", 0xCB, 0x11, 0xF53F},
		{"92 6B 55", 0x8C, 0x33, 0x0745},
		{"FF FF FF FF", 0x74, 0x6C, 0x1D0F},
	} {
		data := unhex(t, c.data)
		require.Equal(t, c.j1850, crcJ1850(nil, data), c.data)
		require.Equal(t, c.j1850, crcJ1850(data[:1], data[1:]), c.data)
		require.Equal(t, c.h2f, crcH2F(data), c.data)
		require.Equal(t, c.ccitt, crcCCITT(0xFFFF, data...), c.data)
	}
	// Polynomial 0x31 reflected with start 0, CRC of "123456789": Greg Cook's
	// catalogue of parametrised CRC algorithms, CRC-8/MAXIM-DOW (from memory).
	require.Equal(t, byte(0xA1), crcBody('1', []byte("23456789")))
}

// AUTOSAR "E2E Protocol Specification" (document 849), protocol examples.
func TestProfilesOfAutosar(t *testing.T) {
	zeros := func(n int) []byte { return make([]byte, n) }
	for _, c := range []struct {
		mode    idMode
		counter uint64
		want    string
	}{
		{idBoth, 0, "CC 00 00 00 00 00 00 00"},
		{idBoth, 1, "91 01 00 00 00 00 00 00"},
		{idAlternating, 0, "CE 00 00 00 00 00 00 00"},
		{idAlternating, 1, "02 01 00 00 00 00 00 00"},
		{idLow, 0, "CE 00 00 00 00 00 00 00"},
		{idLow, 1, "93 01 00 00 00 00 00 00"},
		{idNibble, 0, "2A 10 00 00 00 00 00 00"},
		{idNibble, 1, "77 11 00 00 00 00 00 00"},
	} {
		d := zeros(8)
		profile1(d, c.mode, 0x123, c.counter)
		require.Equal(t, unhex(t, c.want), d)
	}
	ids := [16]byte{1, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11, 12, 13, 14, 15, 16}
	for counter, want := range map[uint64]string{0: "0E 00", 1: "1B 01", 2: "98 02", 7: "65 07", 8: "08 08", 15: "CD 0F"} {
		d := zeros(8)
		profile2(d, &ids, counter)
		require.Equal(t, append(unhex(t, want), zeros(6)...), d)
	}
	for counter, want := range map[uint64]string{0: "1C CA 00", 1: "CF 8D 01"} {
		d := zeros(8)
		profile5(d, 0x1234, counter)
		require.Equal(t, append(unhex(t, want), zeros(5)...), d)
	}
}

// Payloads worked out by hand from the description's places; checksums are
// covered above and left out.
func TestPayloadsByHand(t *testing.T) {
	c, err := scriptOf(WetStop)
	require.NoError(t, err)
	v := newVehicle(c)
	for i := range v.wheels {
		v.wheels[i].reported = 80 / 3.6
		v.wheels[i].teeth = uint64(0x100 + 16*i)
	}
	v.wheels[rearRight].reported = 79.5 / 3.6 // 7950 = 1F0E
	v.brake.reference = 80 / 3.6
	d := make([]byte, 16)
	wheelSpeeds(v, d, 31) // 31 modulo 15 is 1; forward in bits 1.5..1.4
	require.Equal(t, unhex(t, "11 1F40 00 1F40 10 1F40 20 1F0E 30 401F"), d[1:])

	v.brake.damaged = true
	d = make([]byte, 16)
	wheelSpeeds(v, d, 0)
	require.Equal(t, unhex(t, "FFFD"), d[5:7], "implausible is all ones less 2")

	// Sport at 60 % of pedal: 80 % of throttle, 200 = C8 in 0.4 %; 60 % is 150 = 96.
	v.driver.mode, v.driver.pedal = Sport, 60
	d = make([]byte, 8)
	pedalTracks(v, d, 0)
	require.Equal(t, unhex(t, "96 C8"), d[6:])

	// 20 degC on the published table: 2500 ohm = 09C4.
	v.engine.coolant = 20
	d = make([]byte, 8)
	engineState(v, d, 1)
	require.Equal(t, unhex(t, "11 09C4"), d[:3])

	// Probe at 0.45 V in 5 mV: 90 = 5A; no trim is 128 = 80; lambda 1 is 128 = 80.
	v.mixture.probe, v.mixture.short, v.mixture.long, v.mixture.wanted = 0.45, 0, 0, 1
	d = make([]byte, 8)
	mixtureMessage(v, d, 2)
	require.Equal(t, unhex(t, "29 5A"), d[:2], "closed, ready, counter 2")
	require.Equal(t, unhex(t, "80 80 80"), d[5:])

	// SAE J1979 and J2012: one code stored, 01 31 is P0131; padding as the
	// tester's.
	v.mixture.confirmed = true
	require.Equal(t, unhex(t, "04 43 01 01 31 55 55 55"), func() []byte { d := answer(v, ask{service: 3}); return d[:] }())
	require.Equal(t, unhex(t, "02 01 0C 55 55 55 55 55"), func() []byte { d := request(ask{service: 1, parameter: 0x0C}); return d[:] }())

	// SAE J1939-71: 700 rpm is 15E0 in 1/8 rpm, light byte first.
	v.engine.speed, v.engine.torque, v.driver.pedal = 700, 0, 0
	d = make([]byte, 8)
	engineBroadcast(v, d, 0)
	require.Equal(t, unhex(t, "FF 7D 7D E0 15 FF FF FF"), d)
}
