package heron

import (
	"math"
	"testing"
	"time"

	"github.com/stretchr/testify/require"
)

func tell(t *testing.T, s Scenario) *Story {
	t.Helper()
	story, err := Tell(s)
	require.NoError(t, err)
	return story
}

// at is the sample at a time of the story.
func (s *Story) at(when time.Duration) Sample { return s.Samples[when/(10*time.Millisecond)-1] }

func TestWetStop(t *testing.T) {
	s := tell(t, WetStop)
	require.InDelta(t, 80, s.at(s.Events.Brake).RoadSpeed, 0.5)
	require.Positive(t, s.Events.Regulating)
	require.Less(t, s.Events.Regulating-s.Events.Brake, 500*time.Millisecond)
	require.Negative(t, s.Events.RingDamaged)

	// A stop at full use of a grip of 0.42 takes 22.2/(0.42*9.81) = 5.4 s; the
	// brake unit loses some of it but never more than a fifth.
	took := (s.Events.Standing - s.Events.Brake).Seconds()
	require.Greater(t, took, 5.4)
	require.Less(t, took, 5.4*1.2)

	last := math.Inf(1)
	for _, x := range s.Samples {
		if x.At < s.Events.Brake {
			continue
		}
		require.LessOrEqual(t, x.RoadSpeed, last+0.01, "faster at %v", x.At)
		last = x.RoadSpeed
		require.False(t, x.SlipLamp)
		for i, w := range x.Wheels {
			require.LessOrEqual(t, w, x.RoadSpeed*1.02+0.1, "wheel %d at %v", i, x.At)
			if x.RoadSpeed > 10 {
				require.Greater(t, w, x.RoadSpeed*0.5, "wheel %d nearly locks at %v", i, x.At)
			}
			if w > 2 {
				require.InDelta(t, w, x.Reported[i], 0.03)
			}
		}
	}
	require.Zero(t, s.Samples[len(s.Samples)-1].RoadSpeed)
}

func TestBadRing(t *testing.T) {
	good, bad := tell(t, WetStop), tell(t, WetStopBadRing)
	require.Equal(t, 4, bad.MissingTeeth)
	require.Greater(t, bad.Events.RingDamaged, bad.Events.Brake, "told during the stop")
	require.Less(t, bad.Events.RingDamaged, bad.Events.Standing)
	require.GreaterOrEqual(t, bad.Events.Standing, good.Events.Standing, "false releases don't shorten the stop")

	drops, inside := 0, false
	for _, x := range bad.Samples {
		require.Equal(t, x.At >= bad.Events.RingDamaged, x.SlipLamp)
		if x.At >= bad.Events.Brake {
			continue
		}
		for _, i := range []int{frontLeft, rearLeft, rearRight} {
			require.InDelta(t, x.Wheels[i], x.Reported[i], 0.03)
		}
		low := x.Wheels[frontRight] * (1 - 4.0/48)
		if x.Reported[frontRight] < x.Wheels[frontRight]-1 {
			require.InDelta(t, low, x.Reported[frontRight], 0.03)
			if !inside {
				drops++
			}
			inside = true
			continue
		}
		inside = false
		require.InDelta(t, x.Wheels[frontRight], x.Reported[frontRight], 0.03)
	}
	// 80 km/h is 22.22 m/s, 11.48 turns of 1.935 m each second, for 3 s.
	require.InDelta(t, 11.48*3, drops, 1)
}

func TestColdStart(t *testing.T) {
	s := tell(t, ColdStart)
	e := s.Events
	require.InDelta(t, -10, s.Samples[0].Coolant, 0.1)
	require.Positive(t, e.EngineRuns)
	require.Greater(t, e.ProbeReady, e.EngineRuns)
	require.Greater(t, e.LoopCloses, e.ProbeReady)
	require.GreaterOrEqual(t, s.at(e.LoopCloses).Coolant, 20.0)
	require.Less(t, e.LoopCloses, s.Length-20*time.Second, "the closed loop is worth seeing")

	var rich, lean bool
	switches := 0
	last := 0.0
	for _, x := range s.Samples {
		require.Equal(t, false, x.EngineLamp)
		if x.At < e.LoopCloses {
			require.False(t, x.LoopClosed)
			if x.At < e.ProbeReady {
				require.InDelta(t, 0.45, x.Probe, 0.01, "a cold probe stays at its bias (common practice)")
			}
			continue
		}
		if x.At < e.LoopCloses+5*time.Second {
			last = x.Probe
			continue
		}
		rich, lean = rich || x.Probe > 0.75, lean || x.Probe < 0.2
		if (x.Probe > 0.45) != (last > 0.45) {
			switches++
		}
		last = x.Probe
		if x.LoopClosed {
			require.InDelta(t, 1, x.Lambda, 0.04, "at %v", x.At)
		}
	}
	require.True(t, rich, "about 0.9 V when rich (common practice)")
	require.True(t, lean, "about 0.1 V when lean (common practice)")
	require.Greater(t, switches, 20, "the probe switches about once a second each way")
	require.Greater(t, s.Samples[len(s.Samples)-1].Coolant, s.at(e.LoopCloses).Coolant)
}

func TestProbeFailure(t *testing.T) {
	s := tell(t, ProbeFailure)
	e := s.Events
	require.Equal(t, 20*time.Second, e.ProbeFails)
	require.InDelta(t, 1, (e.FaultPending - e.ProbeFails).Seconds(), 0.02)
	require.InDelta(t, 5, (e.FaultStored - e.ProbeFails).Seconds(), 0.02)
	for _, x := range s.Samples {
		require.Equal(t, x.At >= e.FaultStored, x.EngineLamp)
		if x.At >= e.ProbeFails {
			require.InDelta(t, 0.02, x.Probe, 1e-9)
		}
		if x.At > e.FaultStored {
			require.False(t, x.LoopClosed)
		}
		require.Less(t, math.Abs(x.ShortTrim), 25.01)
	}
	require.Greater(t, s.at(e.FaultStored).ShortTrim, 10.0, "the loop enriches against a probe that says lean")
}

// The plain map gives 60 % of throttle at 60 % of pedal, the sport map 80 %
// (common practice).
func TestPedalMaps(t *testing.T) {
	require.InDelta(t, 60, at(pedalMaps[Plain], 60), 1e-9)
	require.InDelta(t, 80, at(pedalMaps[Sport], 60), 1e-9)
	require.InDelta(t, 45, at(pedalMaps[Economy], 60), 1e-9)
	for _, table := range pedalMaps {
		for throttle := 0.0; throttle <= 100; throttle += 2.5 {
			require.InDelta(t, throttle, at(table, inverse(table, throttle)), 1e-9)
		}
	}
}

func TestScenarioNames(t *testing.T) {
	_, err := Tell("drive")
	require.EqualError(t, err, `no scenario "drive": there are cold_start, wet_stop, wet_stop_bad_ring, probe_failure, bench`)
}
