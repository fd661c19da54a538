package heron

// driver follows the scenario's speed with pedal and brake.
type driver struct {
	pedal float64 // accelerator, %
	brake float64 // wanted master cylinder pressure, bar
	mode  Mode
	press uint64 // of the mode switch
}

func (d *driver) cycle(v *vehicle) {
	for i := range v.modes {
		if v.modes[i].at == v.now && d.mode != v.modes[i].mode {
			d.mode, d.press = v.modes[i].mode, d.press+1
		}
	}
	if v.stop > 0 && v.now >= v.stop {
		d.pedal = toward(d.pedal, 0, 8)
		d.brake = toward(d.brake, 110, 5)
		return
	}
	ahead := v.wanted(v.now + 400_000)
	want := clamp(float64(1.4*(ahead-v.speed)), -3, 2.5)
	if ahead < 0.3 && v.speed < 1.5 {
		want = -1.5
	}
	// The force that this takes, and what the engine must give for it.
	force := float64(mass*want) + float64(drag*v.speed*v.speed) + rolling*mass*gravity
	pedal, brake := 0.0, 0.0
	if force > -150 && (ahead > 0.3 || v.speed > 1.5) {
		torque := force*circumference/(2*pi)/v.gearbox.ratio() + v.engine.friction
		charge := torque / max(at(fullTorque, v.engine.speed), 60)
		pedal = inverse(pedalMaps[d.mode], clamp(100*charge, 0, 100))
	} else {
		brake = clamp((-force-150)/(2*frontBrake+2*rearBrake), 0, 60)
	}
	d.pedal = toward(d.pedal, pedal, 2)
	d.brake = toward(d.brake, brake, 1.5)
}

const pi = 3.14159265358979

// steering is a driver's small corrections on a nearly straight road.
type steering struct {
	angle     float64 // of the steering wheel, deg, positive to the left
	rate      float64 // deg/s
	yaw       float64 // deg/s
	lateral   float64 // m/s^2
	turn      float64 // share by which a right wheel is faster than the middle
	loadShift float64 // share of the load that moves to the right
}

func (s *steering) cycle(v *vehicle) {
	// A triangle of 7 s, rounded off.
	phase := v.now % (7 * second)
	target := float64(phase)/second*2 - 3.5
	if phase > 7*second/2 {
		target = 10.5 - float64(phase)/second*2
	}
	last := s.angle
	s.angle += float64(0.02 * (float64(1.6*target) - s.angle))
	s.rate = float64((s.angle - last) * 100)
	curvature := s.angle / 16 / 57.3 / wheelbase // 1/m
	s.turn = float64(curvature * 0.85)           // half the track
	s.yaw = float64(v.speed * curvature * 57.3)
	s.lateral = float64(v.speed * v.speed * curvature)
	s.loadShift = float64(s.lateral * 0.05)
}
