package heron_test

import (
	"io"
	"strconv"
	"testing"
	"time"

	"github.com/stretchr/testify/require"

	"busloom/capture"
	"busloom/decode"
	"busloom/frame"
	"busloom/heron"
)

// shownTooFar says how UNECE Regulation 39, paragraph 5.3, is broken:
// 0 <= V1 - V2 <= 0.1*V2 + 4 km/h, V1 the shown speed and V2 the true one.
func shownTooFar(shown, actual float64) bool {
	return shown-actual < 0 || shown-actual > 0.1*actual+4
}

// The examples that public pages print for the paragraph: at a true speed the
// instrument may show from .. to.
func TestRegulation39Examples(t *testing.T) {
	for _, c := range []struct{ actual, from, to float64 }{{50, 50, 59}, {70, 70, 81}, {90, 90, 103}, {110, 110, 125}, {130, 130, 147}} {
		require.False(t, shownTooFar(c.from, c.actual))
		require.False(t, shownTooFar(c.to, c.actual))
		require.True(t, shownTooFar(c.from-1, c.actual))
		require.True(t, shownTooFar(c.to+1, c.actual))
	}
}

// The decoded speed that the cluster shows is held against the van's true
// speed, by the regulation, wherever the van drives steadily (it is measured
// at constant speed), in every capture.
func TestShownSpeedKeepsRegulation39(t *testing.T) {
	const steadyFor = 1500 * time.Millisecond // longer than the way from wheel to needle
	for _, scenario := range heron.Scenarios() {
		t.Run(string(scenario), func(t *testing.T) {
			story, err := heron.Tell(scenario)
			require.NoError(t, err)
			plan, err := decode.NewPlan(description(t), decode.Options{Buses: busNames, Only: []string{"ClusterState.speed"}})
			require.NoError(t, err)
			source, err := capture.Open("../testdata/heron/"+heron.CaptureName(scenario), capture.Options{})
			require.NoError(t, err)
			defer source.Close()
			var record decode.Record
			batch := make([]frame.Frame, 256)
			held := 0
			for {
				n, err := source.Read(batch)
				plan.Bind(source.Interfaces())
				for i := range batch[:n] {
					plan.Decode(&batch[i], &record)
					if len(record.Values) == 0 || record.Values[0].State != decode.Number {
						continue
					}
					at := time.Duration(batch[i].Time - story.Start.UnixNano())
					actual, steady := steadySpeed(story.Samples, at, steadyFor)
					if !steady {
						continue
					}
					v := &record.Values[0]
					shown, err := strconv.ParseFloat(string(v.Signal.AppendNumber(nil, v)), 64)
					require.NoError(t, err)
					require.False(t, shownTooFar(shown, actual), "at %s: shown %g, true %g km/h", at, shown, actual)
					held++
				}
				if err != nil {
					require.ErrorIs(t, err, io.EOF)
					break
				}
			}
			require.Greater(t, held, 8, "speeds that were held against the regulation")
		})
	}
}

// steadySpeed is the true speed at a moment; steady is false if it changed by
// more than 0.2 km/h in the time before.
func steadySpeed(samples []heron.Sample, at, before time.Duration) (speed float64, steady bool) {
	low, high, seen := 0.0, 0.0, 0
	for _, s := range samples {
		if s.At < at-before || s.At > at {
			continue
		}
		if seen == 0 {
			low, high = s.RoadSpeed, s.RoadSpeed
		}
		low, high, speed = min(low, s.RoadSpeed), max(high, s.RoadSpeed), s.RoadSpeed
		seen++
	}
	return speed, seen > 100 && high-low < 0.2
}
