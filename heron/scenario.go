package heron

import (
	"fmt"
	"strings"
)

// Scenario names one of the drives.
type Scenario string

// The scenarios.
const (
	// ColdStart starts at -10 degC and drives until the mixture loop has closed.
	ColdStart Scenario = "cold_start"
	// WetStop stops from 80 km/h on a wet patch; the brake unit holds the slip.
	WetStop Scenario = "wet_stop"
	// WetStopBadRing is the same stop with teeth missing on the front right
	// wheel's ring.
	WetStopBadRing Scenario = "wet_stop_bad_ring"
	// ProbeFailure loses the oxygen sensor's signal during a drive.
	ProbeFailure Scenario = "probe_failure"
	// Bench is a city drive without an end, for benchmarks; it has no capture
	// of its own.
	Bench Scenario = "bench"
)

// Scenarios returns those that have a capture in testdata/heron.
func Scenarios() []Scenario {
	return []Scenario{ColdStart, WetStop, WetStopBadRing, ProbeFailure}
}

const second = 1_000_000 // in the model's microseconds

// script is what a scenario does to the vehicle. Times are microseconds after
// its start.
type script struct {
	seed    uint64
	epoch   int64 // seconds since 1970 UTC of the capture's start
	length  int64 // 0: without an end
	repeat  int64 // the speed profile starts anew after this; 0 never
	ambient float64
	coolant float64
	speed   float64 // km/h at the start
	key     int64   // the key is turned to start; 0: the engine runs already

	profile []knot // s to wanted km/h
	stop    int64  // the driver stops as hard as possible; 0: never
	wetFrom int64
	wetTo   int64
	missing int     // teeth of the front right ring
	probe   int64   // the probe's signal wire touches ground; 0: never
	tank    float64 // L
	rain    float64 // %
	trailer bool    // one is coupled
	modes   []modeChange
	asks    []ask
	stray   []stray
}

type modeChange struct {
	at   int64
	mode Mode
}

// ask is a request of the tester: service and parameter of SAE J1979.
type ask struct {
	at        int64
	service   byte
	parameter byte
}

// stray is a single record outside the messages' timing; all but the last kind
// are no described data frames.
type stray struct {
	at   int64
	bus  int
	kind strayKind
}

type strayKind uint8

const (
	strayError   strayKind = iota // an error report of the interface: stuff error in the data
	strayRemote                   // a remote request for the fuel tank's message
	strayRequest                  // a tester's request to all units, which nothing describes
	fleetOrder                    // no stray: the fleet's office wants the box cooled
)

// stop80 is the stop that both wet scenarios share.
func stop80() *script {
	return &script{
		seed: 80, epoch: 1_768_467_600, length: 12 * second,
		ambient: 12, coolant: 88, speed: 80, tank: 41, rain: 45,
		profile: []knot{{0, 80}},
		stop:    3 * second, wetFrom: 3 * second, wetTo: 12 * second,
		stray: []stray{
			{1_400_000, chassis, strayError},
			{2_100_000, powertrain, strayRemote},
			{2_300_000, powertrain, strayRequest},
			{9_300_000, powertrain, strayRequest},
		},
	}
}

func scriptOf(s Scenario) (*script, error) {
	switch s {
	case ColdStart:
		return &script{
			seed: 10, epoch: 1_768_464_000, length: 90 * second,
			ambient: -10, coolant: -10, key: 1_500_000, tank: 52,
			profile: []knot{{0, 0}, {8, 0}, {16, 42}, {30, 50}, {36, 50}, {42, 22}, {50, 48}, {70, 52}, {76, 68}, {90, 70}},
			modes:   []modeChange{{74 * second, Sport}, {84 * second, Plain}},
			stray: []stray{
				{5 * second, body, strayError},
				{20 * second, powertrain, strayRemote},
				{40 * second, powertrain, strayRequest},
			},
		}, nil
	case WetStop:
		return stop80(), nil
	case WetStopBadRing:
		c := stop80()
		c.missing = 4
		return c, nil
	case ProbeFailure:
		return &script{
			seed: 131, epoch: 1_768_471_200, length: 50 * second,
			ambient: 16, coolant: 87, speed: 50, tank: 9, trailer: true,
			profile: []knot{{0, 50}, {10, 50}, {16, 62}, {30, 60}, {36, 48}, {50, 50}},
			probe:   20 * second,
			modes:   []modeChange{{6 * second, Economy}, {12 * second, Plain}},
			asks: []ask{
				{4 * second, 0x01, 0x01}, {4_200_000, 0x01, 0x03}, {4_400_000, 0x03, 0},
				{34 * second, 0x01, 0x01}, {34_200_000, 0x01, 0x03}, {34_400_000, 0x01, 0x14}, {34_600_000, 0x03, 0},
				{35 * second, 0x01, 0x05}, {35_200_000, 0x01, 0x0C}, {35_400_000, 0x01, 0x0D}, {35_600_000, 0x01, 0x10},
				{36 * second, 0x09, 0x02},
			},
			stray: []stray{
				{9 * second, chassis, strayError},
				{11 * second, powertrain, strayRemote},
				{33_800_000, powertrain, strayRequest},
				{15 * second, body, fleetOrder},
			},
		}, nil
	case Bench:
		return &script{
			seed: 4, epoch: 1_768_474_800, repeat: 120 * second,
			ambient: 14, coolant: 60, tank: 60, trailer: true,
			profile: []knot{{0, 0}, {4, 0}, {14, 50}, {28, 50}, {36, 0}, {42, 0}, {50, 32}, {60, 30}, {72, 72}, {90, 70}, {104, 18}, {112, 0}, {120, 0}},
			stray:   []stray{{31 * second, chassis, strayError}, {47 * second, powertrain, strayRemote}, {63 * second, powertrain, strayRequest}, {80 * second, body, fleetOrder}},
		}, nil
	}
	known := make([]string, 0, 5)
	for _, k := range append(Scenarios(), Bench) {
		known = append(known, string(k))
	}
	return nil, fmt.Errorf("no scenario %q: there are %s", s, strings.Join(known, ", "))
}

// wanted is the speed in m/s that the driver aims at.
func (c *script) wanted(now int64) float64 {
	if c.repeat > 0 {
		now %= c.repeat
	}
	return at(c.profile, float64(now)/second) / 3.6
}
