package decode

import (
	"fmt"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

const counted = `busloom 1
network Count
bus main 500 kbit/s
ecu A on main
ecu B on main
message M 0x100 on main, 1 byte {
  from A to B
  alive at 0.3..0.0 counter 1..13 step 3 %s
  unused 0.7..0.4
}
`

// Counter rules by hand: 1 4 7 10 13 and again 1.
func TestCounterRules(t *testing.T) {
	for _, c := range []struct {
		name, allowed string
		in            []byte
		want          []Check
		steps         uint64 // of the last frame
	}{
		{"in order, over the end", "", []byte{10, 13, 1, 4}, []Check{First, Good, Good, Good}, 0},
		{"repeated", "", []byte{4, 4, 7, 7, 7}, []Check{First, Repeated, Good, Repeated, Repeated}, 0},
		{"one repeat allowed", "repeated 1 allowed", []byte{4, 4, 7, 7, 7}, []Check{First, Good, Good, Good, Repeated}, 0},
		{"lost", "", []byte{1, 7}, []Check{First, Lost}, 1},
		{"lost over the end", "", []byte{13, 7}, []Check{First, Lost}, 2},
		{"one lost allowed", "lost 1 allowed", []byte{1, 7, 1}, []Check{First, Good, Lost}, 2},
		{"out of range, then anew", "", []byte{1, 0, 4, 7}, []Check{First, Bad, First, Good}, 0},
		{"between steps", "", []byte{1, 5}, []Check{First, Bad}, 0},
	} {
		t.Run(c.name, func(t *testing.T) {
			p := planOf(t, fmt.Sprintf(counted, c.allowed), Options{})
			tracker := NewTracker(p)
			var r Record
			for i, b := range c.in {
				p.Decode(received(t, "100", fmt.Sprintf("%02X", b)), &r)
				tracker.Observe(&r)
				require.Equal(t, c.want[i], r.Counter, "frame %d", i)
			}
			require.Equal(t, c.steps, r.Steps)
		})
	}
}

func TestAccountingAddsUp(t *testing.T) {
	p := planOf(t, fmt.Sprintf(counted, ""), Options{})
	p.opts.Buses = map[string]string{"vcan0": "main"}
	p.Bind([]string{"vcan0", "elsewhere"})
	tracker := NewTracker(p)
	var r Record
	see := func(change func(*frame.Frame)) {
		f := received(t, "100", "01")
		change(f)
		p.Decode(f, &r)
		tracker.Observe(&r)
	}
	see(func(f *frame.Frame) {})
	see(func(f *frame.Frame) { f.Len = 0 })
	see(func(f *frame.Frame) { f.Len = 3 })
	see(func(f *frame.Frame) { f.ID = 0x101 })
	see(func(f *frame.Frame) { f.Flags = frame.Extended })
	see(func(f *frame.Frame) { f.Flags, f.Len = frame.Remote, 0 })
	see(func(f *frame.Frame) { f.Flags = frame.Error })
	see(func(f *frame.Frame) { f.Bus = 1 })
	totals := tracker.Totals()
	require.Equal(t, [NumClasses]int64{Decoded: 3, Undescribed: 2, RemoteFrame: 1, ErrorFrame: 1, Unmapped: 1}, totals.Classes)
	totals.Malformed = 5
	require.Equal(t, int64(13), totals.Sum())
	require.Equal(t, int64(1), totals.Short)
	require.Equal(t, int64(1), totals.Long)
	require.Equal(t, map[FrameID]int64{{"vcan0", 0x101, false}: 1, {"vcan0", 0x100, true}: 1}, totals.Undescribed)
	require.Equal(t, map[string]int64{"elsewhere": 1}, totals.Unmapped)
	// The frame after the short one repeats the counter.
	require.Equal(t, int64(1), totals.ProtectionFailures())
}

// With each file the record numbers and the counters begin anew.
func TestCountersBeginWithTheirFile(t *testing.T) {
	p := planOf(t, fmt.Sprintf(counted, ""), Options{})
	tracker := NewTracker(p)
	var r Record
	for i, c := range []struct {
		record int64
		data   string
		want   Check
	}{{1, "01", First}, {2, "04", Good}, {1, "0D", First}, {2, "01", Good}, {3, "0A", Lost}} {
		f := received(t, "100", c.data)
		f.Record = c.record
		p.Decode(f, &r)
		tracker.Observe(&r)
		require.Equal(t, c.want, r.Counter, "frame %d", i)
	}
}

// Senders of one family count each for itself.
func TestCountersBySender(t *testing.T) {
	p := planOf(t, `busloom 1
network Family
bus main 500 kbit/s
ecu A on main
idform F 29 bits { group 21, source 8 }
message M F(group 7) on main, 1 byte {
  from any to A
  alive at 0.7..0.0 counter 0..255
}
`, Options{})
	tracker := NewTracker(p)
	var r Record
	for _, c := range []struct {
		id   string
		data string
		want Check
	}{{"00000701", "05", First}, {"00000702", "09", First}, {"00000701", "06", Good}, {"00000702", "0B", Lost}, {"00000701", "07", Good}} {
		f := received(t, c.id, c.data)
		p.Decode(f, &r)
		tracker.Observe(&r)
		require.Equal(t, c.want, r.Counter)
		require.Equal(t, fmt.Sprint(f.ID&255), string(r.Values[len(r.Values)-1].Signal.AppendNumber(nil, &r.Values[len(r.Values)-1])))
	}
}
