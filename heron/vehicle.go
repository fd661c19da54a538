package heron

// The wheels, in the order of all arrays.
const (
	frontLeft = iota
	frontRight
	rearLeft
	rearRight
)

// Facts of the vehicle, in SI units.
const (
	circumference = 1.935 // of a tyre, m
	ringTeeth     = 48
	gapTooth      = 10 // where the missing teeth of a damaged ring begin
	mass          = 2600.0
	gravity       = 9.81
	wheelMass     = 12.6  // a wheel's inertia, seen at its circumference, kg
	wheelbase     = 3.3   //
	massHeight    = 0.75  // of the centre of mass
	frontShare    = 0.52  // of the weight, standing
	drag          = 0.76  // N s^2/m^2
	rolling       = 0.011 // share of the weight
	frontBrake    = 91.0  // N at the circumference per bar, each wheel
	rearBrake     = 39.0  //
	slipPeak      = 0.09  // slip at the greatest grip
	gripDry       = 0.9
	gripWet       = 0.42
)

const (
	stepMicros  = 2000  // of the wheels
	cycleMicros = 10000 // of the control units
)

// vehicle is the state of the whole van.
type vehicle struct {
	*script
	now    int64 // microseconds since the scenario's start
	random random
	events Events

	speed        float64 // of the vehicle over ground, m/s
	acceleration float64 // m/s^2
	distance     float64 // m
	wheels       [4]wheel
	brake        brakeUnit
	driver       driver
	steering     steering
	engine       engine
	gearbox      gearbox
	mixture      mixture
	body         bodyUnits
}

// wheel is one wheel and its pickup.
type wheel struct {
	speed    float64 // at the circumference, m/s
	turned   float64 // turns since the start
	pressure float64 // bar
	reported float64 // m/s, what the brake unit makes of the pulses
	teeth    uint64  // pulses since the start, without missing teeth
	gaps     int     // turns in which the gap was noticed
	lastTurn int64
}

func newVehicle(c *script) *vehicle {
	v := &vehicle{script: c, random: newRandom(c.seed), events: noEvents()}
	v.speed = c.speed / 3.6
	for i := range v.wheels {
		w := &v.wheels[i]
		w.speed, w.reported = v.speed, v.speed
		w.turned = float64(i) * 0.21
		w.lastTurn = -1
	}
	v.brake.start(v)
	v.gearbox.start(v)
	v.engine.start(v)
	v.mixture.start(v)
	v.body.start(v)
	return v
}

// advance brings the vehicle to the last step that isn't after the time.
func (v *vehicle) advance(to int64) {
	for v.now+stepMicros <= to {
		v.now += stepMicros
		v.roll()
		if v.now%cycleMicros == 0 {
			v.cycle()
		}
	}
}

// cycle is what the control units do every 10 ms.
func (v *vehicle) cycle() {
	v.driver.cycle(v)
	v.steering.cycle(v)
	v.brake.cycle(v)
	v.gearbox.cycle(v)
	v.engine.cycle(v)
	v.mixture.cycle(v)
	v.body.cycle(v)
	v.events.cycle(v)
}

// grip is the friction coefficient of the road at its best.
func (v *vehicle) grip() float64 {
	if v.now >= v.wetFrom && v.now < v.wetTo {
		return gripWet
	}
	return gripDry
}

// roll moves the wheels and the vehicle on by one step. Each tyre's force is
// k * (vehicle speed - wheel speed), k from the slip curve: linear up to the
// peak, then falling. The wheel's equation is solved implicitly, which is
// stable however stiff the tyre.
func (v *vehicle) roll() {
	const dt = stepMicros / 1e6
	var force float64
	shift := float64(v.acceleration * mass * massHeight / wheelbase / 2)
	drive := v.engine.wheelForce / 2
	grip := v.grip()
	for i := range v.wheels {
		w := &v.wheels[i]
		load := float64(mass*gravity*(1-frontShare)/2) + shift
		push, brake := 0.0, float64(rearBrake*w.pressure)
		if i <= frontRight {
			load = float64(mass*gravity*frontShare/2) - shift
			push, brake = drive, float64(frontBrake*w.pressure)
		}
		load *= 1 + float64(v.steering.loadShift*side(i))
		ground := float64(v.speed * (1 + float64(v.steering.turn*side(i))))
		reference := max(ground, w.speed, 1)
		slip := (ground - w.speed) / reference
		if slip < 0 {
			slip = -slip
		}
		mu := grip / slipPeak
		if slip > slipPeak {
			mu = grip * (1 - float64(0.35*(slip-slipPeak))/(1-slipPeak)) / slip
		}
		k := load * mu / reference
		speed := (float64(wheelMass*w.speed) + float64(dt*(float64(k*ground)+push-brake))) / (wheelMass + float64(dt*k))
		if speed < 0 {
			speed = 0
		}
		force += float64(k * (ground - speed))
		w.speed = speed
		w.turned += float64(speed*dt) / circumference
	}
	resist := float64(drag*v.speed*v.speed) + rolling*mass*gravity
	a := (-force - resist) / mass
	speed := v.speed + float64(a*dt)
	if speed < 0.02 && a < 0 || (speed < 0.15 && drive < 150 && v.brake.master > 1) {
		speed, a = 0, 0
		for i := range v.wheels {
			v.wheels[i].speed = 0
		}
	}
	v.speed = speed
	v.acceleration += float64(0.1 * (a - v.acceleration))
	v.distance += float64(speed * dt)
}

// side is -1 for the left wheels and +1 for the right ones.
func side(i int) float64 {
	if i == frontLeft || i == rearLeft {
		return -1
	}
	return 1
}

// toward moves x to the target by at most step.
func toward(x, target, step float64) float64 {
	switch {
	case target > x+step:
		return x + step
	case target < x-step:
		return x - step
	}
	return target
}

func clamp(x, low, high float64) float64 { return min(max(x, low), high) }
