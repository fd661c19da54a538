package heron_test

import (
	"bytes"
	"encoding/hex"
	"fmt"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"busloom/decode"
	"busloom/frame"
	"busloom/heron"
)

// decoded runs a scenario's text through the description and calls f for each
// record that is described, with the time since the capture's start.
func decoded(t *testing.T, s heron.Scenario, f func(at time.Duration, r *decode.Record)) *decode.Totals {
	t.Helper()
	plan, err := decode.NewPlan(description(t), decode.Options{Buses: busNames})
	require.NoError(t, err)
	plan.Bind([]string{"can0", "can1", "can2"})
	tracker := decode.NewTracker(plan)
	story, err := heron.Tell(s)
	require.NoError(t, err)
	var out bytes.Buffer
	require.NoError(t, heron.Write(&out, s, heron.Options{}))
	var fr frame.Frame
	var record decode.Record
	for line := range strings.Lines(out.String()) {
		// "(1768464000.123456) can0 1A0##1..."
		us, err := strconv.ParseInt(line[1:11]+line[12:18], 10, 64)
		require.NoError(t, err)
		head, data, _ := strings.Cut(strings.TrimSpace(line[25:]), "#")
		id, err := strconv.ParseUint(head, 16, 32)
		require.NoError(t, err)
		fr = frame.Frame{Time: us * 1000, Record: fr.Record + 1, ID: uint32(id), Bus: uint16(line[23] - '0')}
		if len(head) == 8 {
			fr.Flags |= frame.Extended
		}
		if id>>29 != 0 {
			fr.Flags, fr.ID = frame.Error, uint32(id&0x1FFFFFFF)
		}
		if data == "R8" {
			fr.Flags |= frame.Remote
			data = ""
		}
		if rest, fd := strings.CutPrefix(data, "#1"); fd {
			fr.Flags |= frame.FD | frame.BitRateSwitch
			data = rest
		}
		payload, err := hex.DecodeString(data)
		require.NoError(t, err)
		fr.Len = uint8(copy(fr.Data[:], payload))
		fr.DLC, _ = frame.DLCOfLen(int(fr.Len), fr.Has(frame.FD))
		plan.Decode(&fr, &record)
		tracker.Observe(&record)
		if record.Class == decode.Decoded {
			f(time.Duration(us)*time.Microsecond-time.Duration(story.Start.UnixNano()), &record)
		}
	}
	return tracker.Totals()
}

// Two encoders that know nothing of each other agree: every checksum and
// counter is good, no value is unknown, every number lies in its range.
func TestEverythingDecodes(t *testing.T) {
	for _, s := range heron.Scenarios() {
		odd := map[string]int{}
		totals := decoded(t, s, func(at time.Duration, r *decode.Record) {
			for i := range r.Values {
				v := &r.Values[i]
				name := v.Signal.Name()
				switch v.State {
				case decode.Unknown, decode.Missing, decode.NoValue, decode.NotFinite:
					odd[fmt.Sprintf("%s: state %d, raw %x", name, v.State, v.Raw)]++
				case decode.Number:
					if m := v.Signal.Model; m != nil && m.Range != nil {
						x, err := strconv.ParseFloat(string(v.Signal.AppendNumber(nil, v)), 64)
						require.NoError(t, err)
						low, _ := m.Range.Low.Float64()
						high, _ := m.Range.High.Float64()
						if x < low-1e-9 || x > high+1e-9 {
							odd[fmt.Sprintf("%s: %g outside %g..%g", name, x, low, high)]++
						}
					}
				}
			}
			if r.Checksum == decode.Bad || r.Counter == decode.Bad || r.Counter == decode.Lost || r.Counter == decode.Repeated {
				odd[fmt.Sprintf("%s: checksum %d, counter %d", r.Message.Model.Name, r.Checksum, r.Counter)]++
			}
			if r.UnknownSelection {
				odd[r.Message.Model.Name+": unknown selection"]++
			}
		})
		require.Empty(t, odd, "%s", s)
		require.Greater(t, totals.Classes[decode.Decoded], int64(14_000))
		require.Zero(t, totals.ProtectionFailures())
		require.Zero(t, totals.Short+totals.Long)
		require.EqualValues(t, 1, totals.Classes[decode.ErrorFrame])
		require.EqualValues(t, 1, totals.Classes[decode.RemoteFrame])
		require.Positive(t, totals.Classes[decode.Undescribed])
		require.Len(t, totals.Undescribed, 1)
		require.Zero(t, totals.Classes[decode.Unmapped])
	}
}

// Decoded values are those of the model, within the resolution of their raw
// values and what the model moves within one of its cycles of 10 ms.
func TestDecodedIsTheTruth(t *testing.T) {
	type truth func(x *heron.Sample) float64
	checks := map[string]struct {
		of   truth
		near float64
	}{
		"WheelSpeeds.wheel[front_left].speed": {func(x *heron.Sample) float64 { return x.Reported[0] }, 0.0051},
		"WheelSpeeds.wheel[rear_right].speed": {func(x *heron.Sample) float64 { return x.Reported[3] }, 0.0051},
		"EngineState.coolant":                 {func(x *heron.Sample) float64 { return x.Coolant }, 0.3},
		"AirPath.intake":                      {func(x *heron.Sample) float64 { return x.Intake }, 0.1},
		"Crankshaft.speed":                    {func(x *heron.Sample) float64 { return x.EngineSpeed }, 0.2},
		"EngineBroadcast.speed":               {func(x *heron.Sample) float64 { return x.EngineSpeed }, 0.2},
		"PedalTracks.position":                {func(x *heron.Sample) float64 { return x.Pedal }, 0.21},
		"Throttle.position":                   {func(x *heron.Sample) float64 { return x.Throttle }, 0.21},
		"Mixture.probe":                       {func(x *heron.Sample) float64 { return x.Probe }, 0.0026},
		"Mixture.short_trim":                  {func(x *heron.Sample) float64 { return x.ShortTrim }, 0.4},
		"Mixture.long_trim":                   {func(x *heron.Sample) float64 { return x.LongTrim }, 0.4},
	}
	for _, s := range heron.Scenarios() {
		story, err := heron.Tell(s)
		require.NoError(t, err)
		compared := map[string]int{}
		decoded(t, s, func(at time.Duration, r *decode.Record) {
			// A frame is on the bus up to 2 ms after its payload was made, so
			// the two samples before its time are the candidates.
			i := int(at/(10*time.Millisecond)) - 1
			if i < 1 {
				return
			}
			for j := range r.Values {
				v := &r.Values[j]
				c, ok := checks[v.Signal.Name()]
				if !ok || v.State != decode.Number {
					continue
				}
				x, err := strconv.ParseFloat(string(v.Signal.AppendNumber(nil, v)), 64)
				require.NoError(t, err)
				now, before := c.of(&story.Samples[i]), c.of(&story.Samples[i-1])
				low, high := min(now, before)-c.near, max(now, before)+c.near
				require.True(t, x >= low && x <= high, "%s: %s is %g at %v, the model has %g", s, v.Signal.Name(), x, at, now)
				compared[v.Signal.Name()]++
			}
		})
		for name := range checks {
			require.Positive(t, compared[name], "%s: %s", s, name)
		}
	}
}
