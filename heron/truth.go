package heron

import "time"

// Sample is the truth at one instant. Speeds are in km/h, temperatures in
// degC, shares in %, voltages in V.
type Sample struct {
	At        time.Duration // since the capture's first instant
	RoadSpeed float64       // over ground
	// Wheels are the true speeds at the tyres' circumferences, Reported what
	// the brake unit makes of the pulses; front left, front right, rear left,
	// rear right.
	Wheels, Reported [4]float64
	EngineSpeed      float64 // rpm
	Pedal, Throttle  float64
	Mode             Mode
	Coolant, Intake  float64
	Probe            float64
	Lambda           float64
	LoopClosed       bool
	ShortTrim        float64
	LongTrim         float64
	Regulating       bool // the brake unit holds a wheel's slip
	EngineLamp       bool // after the lamp test
	SlipLamp         bool // after the lamp test
}

// Events are the moments of a scenario, since the capture's first instant;
// negative for what didn't happen.
type Events struct {
	Brake        time.Duration // the driver's foot reaches the brake
	Regulating   time.Duration // a wheel's slip is held for the first time
	RingDamaged  time.Duration // the brake unit calls the ring damaged, lights its lamp
	Standing     time.Duration // the vehicle has come to a stand after driving
	EngineRuns   time.Duration
	ProbeReady   time.Duration
	LoopCloses   time.Duration // for the first time
	ProbeFails   time.Duration
	FaultPending time.Duration // P0131 is seen
	FaultStored  time.Duration // P0131 is confirmed: lamp on, loop open
}

// Story is the truth about a scenario.
type Story struct {
	Scenario     Scenario
	Start        time.Time // of the capture's clock, UTC
	Length       time.Duration
	MissingTeeth int // of the front right ring
	Samples      []Sample
	Events       Events
}

// Tell runs a scenario that has an end and tells what happens in it, a sample
// every 10 ms.
func Tell(s Scenario) (*Story, error) {
	c, err := scriptOf(s)
	if err != nil {
		return nil, err
	}
	length := c.length
	if length == 0 {
		length = c.repeat
	}
	v := newVehicle(c)
	story := &Story{
		Scenario: s, Start: time.Unix(c.epoch, 0).UTC(), Length: micros(length), MissingTeeth: c.missing,
		Samples: make([]Sample, 0, length/cycleMicros),
	}
	for t := int64(cycleMicros); t <= length; t += cycleMicros {
		v.advance(t)
		story.Samples = append(story.Samples, v.sample())
	}
	story.Events = v.events
	return story, nil
}

func micros(n int64) time.Duration { return time.Duration(n) * time.Microsecond }

func (v *vehicle) sample() Sample {
	s := Sample{
		At: micros(v.now), RoadSpeed: v.speed * 3.6, EngineSpeed: v.engine.speed,
		Pedal: v.driver.pedal, Throttle: v.engine.throttle, Mode: v.driver.mode,
		Coolant: v.engine.coolant, Intake: v.engine.intake,
		Probe: v.mixture.probe, Lambda: v.mixture.lambda, LoopClosed: v.mixture.loop == loopClosed,
		ShortTrim: v.mixture.short * 100, LongTrim: v.mixture.long * 100,
		Regulating: v.brake.regulating, EngineLamp: v.mixture.confirmed, SlipLamp: v.brake.damaged,
	}
	for i := range v.wheels {
		s.Wheels[i] = v.wheels[i].speed * 3.6
		s.Reported[i] = v.wheels[i].reported * 3.6
	}
	return s
}

func noEvents() Events {
	const never = -1
	return Events{never, never, never, never, never, never, never, never, never, never}
}

// cycle notes what has just happened for the first time.
func (e *Events) cycle(v *vehicle) {
	now := micros(v.now)
	note := func(at *time.Duration, happened bool) {
		if *at < 0 && happened {
			*at = now
		}
	}
	note(&e.Brake, v.driver.brake > 0.5)
	note(&e.Regulating, v.brake.regulating)
	note(&e.RingDamaged, v.brake.damaged)
	note(&e.Standing, v.speed == 0 && v.distance > 10)
	note(&e.EngineRuns, v.engine.ran > 0)
	note(&e.ProbeReady, v.mixture.ready)
	note(&e.LoopCloses, v.mixture.loop == loopClosed)
	note(&e.ProbeFails, v.probe > 0 && v.now >= v.probe)
	note(&e.FaultPending, v.mixture.pending)
	note(&e.FaultStored, v.mixture.confirmed)
}
