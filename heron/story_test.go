package heron

import (
	"encoding/binary"
	"encoding/hex"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

// frames calls f with the payload of each frame of one identifier and the time
// since the capture's first instant.
func frames(t *testing.T, s Scenario, head string, f func(at time.Duration, payload []byte)) {
	t.Helper()
	story := tell(t, s)
	for text := range strings.Lines(string(written(t, s, Options{}))) {
		stamp, rest, _ := strings.Cut(strings.TrimSpace(text), " ")
		rest, ok := strings.CutPrefix(rest, head)
		if !ok {
			continue
		}
		us, err := strconv.ParseInt(strings.Replace(strings.Trim(stamp, "()"), ".", "", 1), 10, 64)
		require.NoError(t, err)
		payload, err := hex.DecodeString(rest)
		require.NoError(t, err)
		f(time.Duration(us)*time.Microsecond-time.Duration(story.Start.UnixMicro())*time.Microsecond, payload)
	}
}

// What is on the bus is what the story tells, and no other wheel's.
func TestWheelSpeedsTellTheStory(t *testing.T) {
	for _, s := range []Scenario{WetStop, WetStopBadRing} {
		story := tell(t, s)
		compared := 0
		frames(t, s, "can0 1A0##1", func(at time.Duration, d []byte) {
			if at < 10*time.Millisecond {
				return
			}
			x := story.at(at)
			for i := range x.Reported {
				raw := binary.BigEndian.Uint16(d[2+3*i:])
				if i == frontRight && x.SlipLamp {
					require.EqualValues(t, 0xFFFD, raw, "%s at %v", s, at)
					continue
				}
				require.InDelta(t, x.Reported[i], float64(raw)/100, 0.0051, "%s: wheel %d at %v", s, i, at)
				compared++
			}
		})
		require.Greater(t, compared, 4000)
	}
}

// Changes go out at once: the fault's frame and the lamp's within one cycle of
// the engine and a bus that is busy for a moment.
func TestFaultGoesOutAtOnce(t *testing.T) {
	story := tell(t, ProbeFailure)
	first := func(head string, want func(d []byte) bool) time.Duration {
		found := time.Duration(-1)
		frames(t, ProbeFailure, head, func(at time.Duration, d []byte) {
			if found < 0 && want(d) {
				found = at
			}
		})
		return found
	}
	for name, c := range map[string]struct{ at, event time.Duration }{
		"pending": {first("can1 320#", func(d []byte) bool { return d[0] == 1 && d[4]&15 == 1 }), story.Events.FaultPending},
		"stored":  {first("can1 320#", func(d []byte) bool { return d[0] == 1 && d[4]&15 == 2 }), story.Events.FaultStored},
		"lamp":    {first("can1 330#", func(d []byte) bool { return d[0]&3 == 1 }), story.Events.FaultStored},
		"cluster": {first("can2 3E0#", func(d []byte) bool { return d[0]&3 == 1 }), story.Events.FaultStored},
		"loop":    {first("can1 120#", func(d []byte) bool { return d[0]&7 == loopFault }) - 50*time.Millisecond, story.Events.FaultStored},
	} {
		require.Less(t, c.at, c.event+5*time.Millisecond, name)
		require.Greater(t, c.at, c.event-50*time.Millisecond, name)
	}
	// Read out before and after (SAE J1979, service 3).
	var answers [][]byte
	frames(t, ProbeFailure, "can1 7E8#", func(_ time.Duration, d []byte) {
		if d[1] == 0x43 {
			answers = append(answers, d[:5])
		}
	})
	require.Equal(t, [][]byte{{2, 0x43, 0, 0x55, 0x55}, {4, 0x43, 1, 0x01, 0x31}}, answers)
}
