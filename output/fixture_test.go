package output

import (
	"testing"

	"busloom/decode"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

const second = int64(1_000_000_000)

// start is the time of the first frame.
const start = 1_700_000_000 * second

// shot is one frame of the fixture: microseconds after start, interface,
// identifier, payload.
type shot struct {
	after int64
	bus   uint16
	id    uint32
	flags frame.Flags
	data  string
}

var interfaces = []string{"can0", "can1", "can9"}

// shots hold every state, check and fit that a record can have. The checksums
// are the exclusive or of the bytes before them, by hand.
var shots = []shot{
	{0, 0, 0x100, 0, "\x1F\x40\x1F\x3F\xFF\x11\x03\x92"},
	{10_000, 0, 0x100, 0, "\xFF\xFE\xFF\xFF\x80\x0F\x04\x8B"}, // 0x8A is right
	{20_000, 0, 0x100, 0, "\xFF\xF5\x00\x00\x00\x07\x04\x09"}, // counter repeated
	{30_000, 0, 0x100, 0, "\x1F\x41\x1F\x41\x01\x01\x08\x08"}, // counter lost 5, 6, 7
	{100_000, 0, 0x100, 0, "\x00\x00\x00\x00\x00\x00\x0F\x0F"},
	{110_000, 0, 0x100, 0, "\x1F\x40\x1F"},
	{120_000, 0, 0x300, 0, "\x01\x05\x00"},
	{121_000, 0, 0x300, 0, "\x09\x00"},
	{122_000, 0, 0x300, 0, "\x02\x03"},
	{123_000, 1, 0x301, 0, "\x01\x05"},
	{130_000, 0, 0x200, frame.FD, "\xFF\xFF\xFF\xFF\xFF\xFF\xFF\xFF\x3F\xC0\x00\x00\x9A\x00\x64\x01\x01\xAB\x00a,\"\n "},
	{131_000, 0, 0x200, frame.FD, "\x00\x00\x00\x00\x00\x00\x00\x01\x7F\xC0\x00\x00\x42\x00\x32\x02\x00\x00\x00h\xFF\x1B[m"},
	{140_000, 0, 0x18FF1021, frame.Extended, "\x07"},
	{190_000, 0, 0x18FF1022, frame.Extended, "\x07"},
	{240_000, 0, 0x18FF1021, frame.Extended, "\x08"},
	{250_000, 0, 0x123, 0, "\xDE\xAD\xBE\xEF"},
	{251_000, 0, 0x100, frame.Remote, ""},
	// Linux kernel, include/uapi/linux/can/error.h: protocol violation and bus
	// error; data[2] 0x04 is a stuff error, data[3] 0x0A the data section.
	{252_000, 0, 0x088, frame.Error, "\x00\x00\x04\x0A\x00\x00\x00\x00"},
	{253_000, 2, 0x100, 0, "\x00"},
}

func smallPlan(tb testing.TB, only ...string) *decode.Plan {
	network, list := schema.Compile(schema.DiskFiles(), "testdata/small.bus")
	require.False(tb, list.Failed())
	plan, err := decode.NewPlan(network, decode.Options{Buses: map[string]string{"can0": "chassis", "can1": "powertrain"}, Only: only})
	require.NoError(tb, err)
	plan.Bind(interfaces)
	return plan
}

// decodeShots decodes frames in order; each record has a frame of its own.
func decodeShots(plan *decode.Plan, shots []shot) []decode.Record {
	tracker := decode.NewTracker(plan)
	records := make([]decode.Record, len(shots))
	for i, s := range shots {
		f := &frame.Frame{Time: start + s.after*1000, ID: s.id, Bus: s.bus, Flags: s.flags, Len: uint8(len(s.data)), Record: int64(i + 1)}
		if i == 2 {
			f.Time++ // so that one time needs nine digits
		}
		copy(f.Data[:], s.data)
		plan.Decode(f, &records[i])
		tracker.Observe(&records[i])
	}
	return records
}

// write runs a format over records.
func write(tb testing.TB, name string, plan *decode.Plan, o Options, records []decode.Record) string {
	f, err := New(name, plan, o)
	require.NoError(tb, err)
	return string(writeAll(f, records))
}

func writeAll(f Formatter, records []decode.Record) []byte {
	dst := f.Header(nil)
	for i := range records {
		dst = f.Record(dst, &records[i])
	}
	return f.Trailer(dst)
}
