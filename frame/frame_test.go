package frame

import (
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"go.einride.tech/can"
	"pgregory.net/rapid"
)

// ISO 11898-1 (from memory; the table agrees with the padding lengths of the
// Linux kernel's net/can/isotp.c): length codes 9 to 15 of CAN FD.
func TestLengthCodes(t *testing.T) {
	for dlc := range uint8(9) {
		for _, fd := range []bool{false, true} {
			n, ok := LenOfDLC(dlc, fd)
			require.True(t, ok)
			require.Equal(t, dlc, n)
		}
	}
	for i, want := range []uint8{12, 16, 20, 24, 32, 48, 64} {
		n, ok := LenOfDLC(uint8(9+i), true)
		require.True(t, ok)
		require.Equal(t, want, n)
		dlc, ok := DLCOfLen(int(want), true)
		require.True(t, ok)
		require.Equal(t, uint8(9+i), dlc)
		n, ok = LenOfDLC(uint8(9+i), false)
		require.True(t, ok)
		require.Equal(t, uint8(8), n, "a classic frame has 8 bytes at most")
	}
	for _, bad := range []int{-1, 9, 11, 13, 63, 65} {
		require.False(t, ValidLen(bad, true), bad)
	}
	require.False(t, ValidLen(12, false))
	_, ok := LenOfDLC(16, true)
	require.False(t, ok)
}

// Error frames: bits of the Linux kernel's include/uapi/linux/can/error.h; the
// examples were decoded by hand from it.
func TestErrorReports(t *testing.T) {
	for _, c := range []struct {
		id   uint32
		data []byte
		want string
	}{
		{0x004, []byte{0, 0x08, 0, 0, 0, 0, 0x60, 0}, "controller: transmit warning level"},
		{0x040, make([]byte, 8), "bus off"},
		{0x088, []byte{0, 0, 0x04, 0x0A, 0, 0, 0, 0}, "protocol violation, bus error: stuff error, in the data section"},
		{0x002, []byte{13, 0, 0, 0, 0, 0, 0, 0}, "arbitration lost: in bit 13"},
		{0x002, make([]byte, 8), "arbitration lost"},
		{0x204, []byte{0, 0x30, 0, 0, 0, 0, 128, 96}, "controller, error counters: receive error passive, transmit error passive; 128 transmit and 96 receive errors"},
		{0x010, []byte{0, 0, 0, 0, 0x07, 0, 0, 0}, "transceiver: CANH short to ground"},
		{0x010, []byte{0, 0, 0, 0, 0x80, 0, 0, 0}, "transceiver: CANL short to CANH"},
		{0x010, []byte{0, 0, 0, 0, 0x47, 0, 0, 0}, "transceiver: CANH short to ground, CANL no wire"},
		{0x010, []byte{0, 0, 0, 0, 0x99, 0, 0, 0}, "transceiver: transceiver state 0x99"},
		{0x010, []byte{0, 0, 0, 0, 0x49, 0, 0, 0}, "transceiver: transceiver state 0x49"},
		{0x010, make([]byte, 8), "transceiver"},
		{0x004, []byte{0, 0x80}, "controller: bit 7"},
		{0x008, []byte{0, 0, 0x04, 0x10}, "protocol violation: stuff error, at place 0x10"},
		{0x008, []byte{0, 0, 0x81, 0x1B}, "protocol violation: bit error, while transmitting, in the ACK delimiter"},
		{0x1A1, nil, "transmit timeout, no acknowledgement, bus error, controller restarted"},
		{0x400, nil, "class bits 0x400"},
		{0, nil, "no class"},
	} {
		f := Frame{ID: c.id, Flags: Error, Len: uint8(len(c.data))}
		copy(f.Data[:], c.data)
		require.Equal(t, c.want, f.Report().String())
	}
}

// Facts that programs ask for one by one; source as above.
func TestReportFields(t *testing.T) {
	f := Frame{ID: 0x21A, Flags: Error, Len: 8}
	copy(f.Data[:], []byte{7, 0xFF, 0x80, 0x19, 0x07, 0xFF, 96, 127})
	require.Equal(t, Report{
		Class:    []string{"arbitration lost", "protocol violation", "transceiver", "error counters"},
		Detail:   []string{"in bit 7", "while transmitting", "in the ACK slot", "CANH short to ground"},
		Location: "ACK slot", Transceiver: "CANH short to ground",
		Counters: true, TXErrors: 96, RXErrors: 127,
	}, f.Report(), "the controller's byte means nothing without its class")
	f.Len = 3 // bytes behind the length are undefined
	require.Equal(t, Report{
		Class:  []string{"arbitration lost", "protocol violation", "transceiver", "error counters"},
		Detail: []string{"in bit 7", "while transmitting"},
	}, f.Report())
}

// Every bit of each byte of detail has its phrase; source as above. The places
// are those of the kernel's header, in its order.
func TestReportTables(t *testing.T) {
	report := func(class uint32, at int, value byte) string {
		f := Frame{ID: class, Flags: Error, Len: 8}
		clear(f.Data[:])
		f.Data[at] = value
		return strings.Join(f.Report().Detail, "|")
	}
	for bit, want := range []string{"receive overflow", "transmit overflow", "receive warning level", "transmit warning level", "receive error passive", "transmit error passive", "back to error active"} {
		require.Equal(t, want, report(0x004, 1, 1<<bit))
	}
	for bit, want := range []string{"bit error", "form error", "stuff error", "can't send a dominant bit", "can't send a recessive bit", "overload", "active error", "while transmitting"} {
		require.Equal(t, want, report(0x008, 2, 1<<bit))
	}
	for place, want := range map[byte]string{
		0x03: "start of frame", 0x02: "ID bits 28 to 21", 0x06: "ID bits 20 to 18", 0x04: "substitute RTR", 0x05: "identifier extension",
		0x07: "ID bits 17 to 13", 0x0F: "ID bits 12 to 5", 0x0E: "ID bits 4 to 0", 0x0C: "RTR", 0x0D: "reserved bit 1", 0x09: "reserved bit 0",
		0x0B: "data length code", 0x0A: "data section", 0x08: "CRC sequence", 0x18: "CRC delimiter", 0x19: "ACK slot", 0x1B: "ACK delimiter",
		0x1A: "end of frame", 0x12: "intermission",
	} {
		require.Equal(t, "in the "+want, report(0x008, 3, place))
	}
	require.Empty(t, report(0x008, 3, 0))
	for state, want := range map[byte]string{
		0x04: "CANH no wire", 0x05: "CANH short to battery", 0x06: "CANH short to supply", 0x07: "CANH short to ground",
		0x40: "CANL no wire", 0x50: "CANL short to battery", 0x60: "CANL short to supply", 0x70: "CANL short to ground", 0x80: "CANL short to CANH",
	} {
		require.Equal(t, want, report(0x010, 4, state))
	}
}

func TestLibraryFramesComeBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		in := can.Frame{IsExtended: rapid.Bool().Draw(t, "extended"), IsRemote: rapid.Bool().Draw(t, "remote"), Length: uint8(rapid.IntRange(0, 8).Draw(t, "length"))}
		in.ID = rapid.Uint32Range(0, map[bool]uint32{false: 1<<11 - 1, true: 1<<29 - 1}[in.IsExtended]).Draw(t, "id")
		if !in.IsRemote {
			copy(in.Data[:], rapid.SliceOfN(rapid.Byte(), int(in.Length), int(in.Length)).Draw(t, "data"))
		}
		f, err := FromLibrary(in)
		require.NoError(t, err)
		out, err := f.ToLibrary()
		require.NoError(t, err)
		require.Equal(t, in, out)
	})
	for _, flags := range []Flags{FD, Error} {
		_, err := (&Frame{Flags: flags}).ToLibrary()
		require.ErrorIs(t, err, ErrNotClassic)
	}
	_, err := FromLibrary(can.Frame{ID: 1 << 11})
	require.ErrorIs(t, err, ErrNotClassic)
}
