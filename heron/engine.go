package heron

// engine is a four-cylinder petrol engine of 2.0 L.
type engine struct {
	sync         int     // raw value of CrankSync
	ran          int64   // microseconds since the start
	speed        float64 // rpm
	turned       float64 // turns of the crankshaft
	throttle     float64 // %
	target       float64 // %
	duty         float64 // of the throttle's motor, %
	idleThrottle float64 // %
	charge       float64 // share of the greatest air charge
	friction     float64 // Nm
	torque       float64 // Nm at the crankshaft
	wanted       float64 // Nm
	wheelForce   float64 // N, both front wheels together
	cut          bool
	resting      bool // cylinders 2 and 3
	flow         float64
	manifold     float64 // kPa
	onTime       float64 // us
	rail         float64 // MPa
	railWanted   float64
	advance      float64 // deg
	retard       float64
	dwell        float64    // us
	knock        [4]float64 // V
	knocking     [4]bool
	intakePhase  float64 // deg
	exhaustPhase float64
	lift         float64 // mm
	coolant      float64 // degC
	intake       float64
	oil          float64
	supply       float64 // V
}

func (e *engine) start(v *vehicle) {
	e.coolant, e.oil, e.intake = v.coolant, v.coolant, v.ambient+4
	e.lift, e.manifold, e.supply = 3, 101, 12.3
	if e.coolant > 50 {
		e.intake = v.ambient + 14
	}
	if v.key == 0 {
		e.sync, e.ran, e.rail, e.charge, e.supply = 3, 600*second, 5, 0.2, 14.1
		e.speed = max(v.gearbox.turbine, 780)
	}
}

func (e *engine) cycle(v *vehicle) {
	const dt = cycleMicros / 1e6
	running := v.key == 0 || v.now >= v.key
	idle := 780 + clamp(float64((40-e.coolant)*12), 0, 600)
	e.friction = 16 + float64(0.006*e.speed) + clamp(float64((60-e.coolant)*0.25), 0, 25)
	if !running {
		return
	}
	if v.key > 0 && v.now < v.key+1_300_000 {
		e.crank(v)
		return
	}
	e.ran += cycleMicros

	// Pedal to throttle, but never below what the idle controller needs.
	demand := v.demand()
	full := max(at(fullTorque, e.speed), 60)
	e.idleThrottle = float64(100 * (e.friction + 8) / full)
	e.target = max(e.idleThrottle, demand)
	e.duty = clamp(float64((e.target-e.throttle)*6)+6, -90, 90)
	e.throttle += float64(0.25 * (e.target - e.throttle))
	e.charge += float64(0.12 * (e.throttle/100 - e.charge))

	// Speed: the converter lets the engine run ahead of the turbine.
	free := idle + float64(14*demand)
	target := free
	if v.gearbox.gear > 0 {
		target = max(v.gearbox.turbine, min(free, v.gearbox.turbine+float64(0.5*free)), idle*0.97)
	}
	e.speed += float64(0.08*(target-e.speed)) + float64(v.random.noise()*1.5)
	e.turned += float64(e.speed / 60 * dt)

	e.cut = demand < 0.5 && e.speed > 1250 && v.speed > 4 && v.gearbox.turbine > 1100 && e.coolant > 15
	e.resting = !e.cut && e.coolant > 60 && e.charge > 0.1 && e.charge < 0.28 && v.speed > 10 && v.driver.brake < 0.5 && v.gearbox.shift == 0
	e.wanted = float64(full*e.target/100) - e.friction
	e.torque = float64(full*e.charge) - e.friction
	if e.cut {
		e.torque = -e.friction
	}
	if v.gearbox.shift > 0 && e.torque > 120 {
		e.torque = 120
	}
	e.wheelForce = 0
	if v.gearbox.gear > 0 {
		multiply := 1 + clamp(float64(0.8*(1-v.gearbox.turbine/e.speed)), 0, 0.8)
		e.wheelForce = float64(e.torque*multiply*v.gearbox.ratio()) * (2 * pi) / circumference
		if v.speed < 0.5 && e.wheelForce < 0 {
			e.wheelForce = 0
		}
	}

	// Air, fuel, spark. 2.0 L draw 1.2 g/L of air every two turns at full charge.
	e.flow = e.speed / 120 * 2.4 * e.charge
	e.manifold = 28 + float64(72*e.charge)
	e.railWanted = 5 + float64(13*e.charge)
	e.rail += float64(0.1*(e.railWanted-e.rail)) + float64(v.random.noise()*0.03)
	e.fuel(v)
	e.advance = clamp(8+float64((e.speed-800)*0.012)-float64(e.charge*14), -5, 42) - e.retard
	e.dwell = 3200 + float64((14-e.supply)*260)
	e.listen(v)
	e.intakePhase += float64(0.05 * (float64(40*clamp(e.charge, 0, 1)) - e.intakePhase))
	e.exhaustPhase += float64(0.05 * (float64(-22*clamp(e.charge, 0, 1)) - e.exhaustPhase))
	e.lift += float64(0.06 * (2.2 + float64(8*e.charge) - e.lift))

	// Heat. The head's own small circuit warms first; the thermostat opens at
	// 86 degC.
	e.coolant += float64((0.10 + float64(0.034*e.flow)) * dt)
	if e.coolant > 86 {
		e.coolant -= float64((e.coolant - 86) * 0.35 * dt)
	}
	e.oil += float64(0.006 * (e.coolant + 4 - e.oil) * dt * 4)
	e.intake += float64(0.02 * (v.ambient + 4 + float64(0.14*clamp(e.coolant, 0, 90)) - e.intake) * dt)
	e.supply += float64(0.05 * (14.2 - e.supply))
}

// crank is the starter at work: the ring's gap is sought, then found, then the
// camshaft agrees.
func (e *engine) crank(v *vehicle) {
	e.speed += float64(0.1 * (210 + float64(v.random.noise()*18) - e.speed))
	e.turned += float64(e.speed / 60 * (cycleMicros / 1e6))
	e.supply = 10.4 + float64(v.random.noise()*0.3)
	e.rail += 0.03
	e.manifold -= 0.2
	e.throttle, e.target = 9, 9
	e.charge = 0.25
	e.flow = e.speed / 120 * 2.4 * e.charge
	e.advance, e.dwell = 5, 4800
	switch since := v.now - v.key; {
	case since < 350_000:
		e.sync = 1
	case since < 650_000:
		e.sync = 2
	default:
		e.sync = 3
		e.onTime = 5200
	}
}

// fuel sets the injectors' on-time: the air charge over the wanted mixture,
// through an injector whose flow grows with the root of the rail pressure.
func (e *engine) fuel(v *vehicle) {
	if e.cut {
		e.onTime = 0
		return
	}
	cylinders := 4.0
	if e.resting {
		cylinders = 2
	}
	perSecond := e.speed / 120 * cylinders
	milligrams := e.flow * 1000 / perSecond / (stoichiometric * v.mixture.wanted) * v.mixture.trim()
	e.onTime = 300 + float64(milligrams/(5*(0.5+float64(e.rail/10)))*1000)
}

// listen makes the knock sensor's level in each cylinder's window, and takes
// the spark back where it knocks.
func (e *engine) listen(v *vehicle) {
	for i := range e.knock {
		level := 0.25 + float64(e.speed*0.00018) + float64(e.charge*0.3) + float64(v.random.noise()*0.08)
		e.knocking[i] = e.charge > 0.55 && v.random.below(90) == 0
		if e.knocking[i] {
			level += 1.6 + float64(v.random.noise()*0.4)
			e.retard = min(e.retard+1.5, 9)
		}
		e.knock[i] = level
	}
	e.retard = toward(e.retard, 0, 0.008)
}

// demand is the throttle opening in % that the pedal map makes of the pedal.
func (v *vehicle) demand() float64 { return at(pedalMaps[v.driver.mode], v.driver.pedal) }
