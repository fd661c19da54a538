package heron

// Limits of the brake unit.
const (
	minimumSpeed  = 1.5 / 3.6 // below it pulses aren't told from noise, m/s
	turnsToFault  = 48        // turns with the same teeth missing until the ring is called damaged
	slipRelease   = 0.18      // pressure is let off above it
	slipBuild     = 0.10      // and built up again below it
	lampTestUntil = 3 * second
)

// brakeUnit reads the pickups and holds the slip.
type brakeUnit struct {
	master     float64 // bar
	reference  float64 // m/s
	slip       [4]float64
	regulating bool
	holdUntil  int64
	damaged    bool // the front right ring
}

func (b *brakeUnit) start(v *vehicle) { b.reference = v.speed }

func (b *brakeUnit) cycle(v *vehicle) {
	const dt = cycleMicros / 1e6
	for i := range v.wheels {
		v.read(i)
	}
	// The reference falls no faster than the inertia sensor says, and never
	// below the fastest wheel.
	fall := -v.acceleration
	if fall < 0 {
		fall = 0
	}
	b.reference -= float64((fall + 0.3) * dt)
	fastest := 0.0
	for i := range v.wheels {
		if i == frontRight && b.damaged {
			continue
		}
		fastest = max(fastest, v.wheels[i].reported)
	}
	b.reference = max(b.reference, fastest)
	if fastest == 0 && b.reference < 1 {
		b.reference = 0
	}

	b.master = toward(b.master, v.driver.brake, 4)
	for i := range v.wheels {
		b.slip[i] = 0
		if b.reference > 1 {
			b.slip[i] = 1 - v.wheels[i].reported/b.reference
		}
	}
	control := b.reference > 1.8 && b.master > 5
	b.hold(v, &v.wheels[frontLeft], b.slip[frontLeft], control)
	if b.damaged {
		// Without a speed of its own the right wheel follows the left one, with
		// something in hand.
		v.wheels[frontRight].pressure = float64(0.8 * v.wheels[frontLeft].pressure)
	} else {
		b.hold(v, &v.wheels[frontRight], b.slip[frontRight], control)
	}
	// The rear wheels share one pressure, set by the one that slips more.
	b.hold(v, &v.wheels[rearLeft], max(b.slip[rearLeft], b.slip[rearRight]), control)
	v.wheels[rearRight].pressure = v.wheels[rearLeft].pressure
	b.regulating = control && v.now < b.holdUntil
}

// hold modulates one wheel's pressure.
func (b *brakeUnit) hold(v *vehicle, w *wheel, slip float64, control bool) {
	switch {
	case !control:
		w.pressure = toward(w.pressure, b.master, 6)
		return
	case slip > slipRelease:
		w.pressure = max(w.pressure-3.5, 0)
		b.holdUntil = v.now + 400_000
	case v.now >= b.holdUntil:
		w.pressure = toward(w.pressure, b.master, 4)
	case slip < slipBuild/2:
		w.pressure += 1
	case slip < slipBuild:
		w.pressure += 0.4
	}
	w.pressure = min(w.pressure, b.master)
}

// read makes a speed of one pickup's pulses. A ring with missing teeth gives
// fewer pulses in the quarter turn that the unit smooths over: once a turn the
// speed drops by the missing share of the ring.
func (v *vehicle) read(i int) {
	w := &v.wheels[i]
	turn := int64(w.turned)
	tooth := int(float64((w.turned - float64(turn)) * ringTeeth))
	w.teeth = uint64(turn*ringTeeth) + uint64(tooth)
	speed := w.speed
	if i == frontRight && v.missing > 0 {
		w.teeth -= uint64(turn * int64(v.missing))
		if tooth >= gapTooth {
			w.teeth -= uint64(min(tooth-gapTooth, v.missing))
		}
		if tooth >= gapTooth && tooth < gapTooth+ringTeeth/4 {
			speed -= float64(speed*float64(v.missing)) / ringTeeth
			if w.lastTurn != turn && w.speed > 10/3.6 {
				w.lastTurn = turn
				if w.gaps++; w.gaps >= turnsToFault {
					v.brake.damaged = true
				}
			}
		}
	}
	if speed < minimumSpeed {
		w.reported = 0
		return
	}
	w.reported = speed + float64(v.random.noise()*0.006)
}
