package heron

// knot is one corner of a piecewise linear table; x rises.
type knot struct{ x, y float64 }

// at follows a table; beyond its ends the end's value holds.
func at(table []knot, x float64) float64 {
	if x <= table[0].x {
		return table[0].y
	}
	for i := 1; i < len(table); i++ {
		if x < table[i].x {
			a, b := table[i-1], table[i]
			return a.y + (b.y-a.y)*(x-a.x)/(b.x-a.x)
		}
	}
	return table[len(table)-1].y
}

// inverse follows a rising table the other way.
func inverse(table []knot, y float64) float64 {
	if y <= table[0].y {
		return table[0].x
	}
	for i := 1; i < len(table); i++ {
		if y < table[i].y {
			a, b := table[i-1], table[i]
			return a.x + (b.x-a.x)*(y-a.y)/(b.y-a.y)
		}
	}
	return table[len(table)-1].x
}

// ntc is degC to ohm of the common automotive thermistor with 2.5 kohm at
// 20 degC (published calibration table of that part).
var ntc = []knot{
	{-40, 45313}, {-30, 26114}, {-20, 15462}, {-10, 9397}, {0, 5896}, {10, 3792},
	{20, 2500}, {30, 1707}, {40, 1175}, {50, 834}, {60, 596}, {70, 436}, {80, 323},
	{90, 243}, {100, 187}, {110, 144}, {120, 113}, {130, 89}, {140, 72}, {150, 55},
}

// floatLeft and floatRight are L to ohm of the saddle tank's two floats.
var (
	floatLeft  = []knot{{0, 10}, {5, 60}, {11, 100}, {20, 160}, {30, 230}, {35, 280}}
	floatRight = []knot{{0, 12}, {6, 72}, {13, 120}, {21, 170}, {31, 240}, {35, 280}}
)

// Mode is the drive mode and with it the pedal map, by its raw value.
type Mode uint8

// The drive modes that the scenarios use.
const (
	Plain Mode = iota
	Sport
	Economy
)

// pedalMaps turn pedal travel into throttle opening, both in %. The sport map
// opens 80 % at 60 % of travel, the plain one 60 % (common practice).
var pedalMaps = [...][]knot{
	Plain:   {{0, 0}, {100, 100}},
	Sport:   {{0, 0}, {30, 46}, {60, 80}, {100, 100}},
	Economy: {{0, 0}, {60, 45}, {100, 100}},
}

// ratios are the gearbox's, first to sixth; final is that of the axle.
var ratios = [...]float64{1: 4.2, 2: 2.4, 3: 1.5, 4: 1.15, 5: 0.85, 6: 0.67}

const final = 4.1

// upshift is the speed in m/s above which the next gear is taken; it is left
// again 2 m/s below.
var upshift = [...]float64{1: 4.5, 2: 8, 3: 12, 4: 16, 5: 20}

// fullTorque is rpm to Nm with the greatest air charge.
var fullTorque = []knot{{0, 0}, {600, 150}, {1500, 310}, {4000, 320}, {5500, 250}, {6500, 150}}
