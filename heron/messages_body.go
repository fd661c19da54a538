package heron

const identity = "BLMHERN26V0001234"

func bodyMessages(c *script) []*message {
	all := []*message{
		cyclic(body, 0x410, 4, 100*ms, terminalState).onChange(10*ms, func(v *vehicle) uint64 { return v.keyState() }),
		cyclic(body, 0x420, 8, 200*ms, clusterState),
		cyclic(body, 0x430, 4, 500*ms, doors).onChange(20*ms, func(v *vehicle) uint64 { return v.doorState() }),
		cyclic(body, 0x434, 2, 500*ms, lights).onChange(20*ms, func(v *vehicle) uint64 { return v.lightState() }),
		cyclic(body, 0x438, 2, 500*ms, wipers),
		cyclic(body, 0x440, 8, 500*ms, climateState),
		cyclic(body, 0x450, 8, 1000*ms, clock),
		cyclic(body, 0x460, 8, 1000*ms, vehicleIdentity),
		cyclic(body, 0x470, 8, 1000*ms, cargoBox),
		cyclic(body, 0x480, 8, 1000*ms, tyrePressures),
		cyclic(body, 0x490, 8, 200*ms, batteryState),
		cyclic(body, 0x18FEC127, 8, 1000*ms, vehicleDistance).wide(),
		cyclic(body, 0x18FEF519, 8, 1000*ms, ambientConditions).wide(),
	}
	for node := uint32(1); node <= 8; node++ {
		all = append(all, cyclic(body, 0x1C<<6|node, 2, 1000*ms, unitAlive))
	}
	if c.trailer {
		all = append(all, cyclic(body, 0x18FF30C8, 8, 500*ms, trailerState).wide())
	}
	return all
}

func (v *vehicle) keyState() uint64 {
	switch {
	case v.key == 0 || v.now > v.key+1_300_000:
		return 2
	case v.now >= v.key:
		return 3
	case v.now >= v.key-1_000_000:
		return 2
	}
	return 1
}

func terminalState(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 3, v.keyState())
	flag(d, 0, 3, v.body.unlocked)
	d[1] = byte(scaled(v.engine.supply, 0.1, 200))
	d[2] = byte(n % 16)
	d[3] = crcBody(0x41, d[:3])
}

func clusterState(v *vehicle, d []byte, n uint64) {
	if v.brake.reference > 0 {
		d[0] = byte(scaled(float64(v.brake.reference*3.6*1.03)+1, 1, 250))
	}
	up(d, 1, 0, 24, uint64((v.body.odometer+v.distance)/100))
	d[4] = byte(scaled(v.body.level, 0.5, 140))
	d[5] = 150
	test := v.lampTest() == 1
	flag(d, 6, 0, test || v.mixture.confirmed)
	flag(d, 6, 1, test || v.brake.damaged)
	flag(d, 6, 2, test)
	flag(d, 6, 3, test || v.body.level < 8.5)
	d[7] = byte(n % 16)
}

// doorState: in the cold start the driver has just got in; the doors lock
// themselves when the van drives.
func (v *vehicle) doorState() uint64 {
	var raw uint64
	if v.key > 0 && v.now < 700_000 {
		raw |= 1
	}
	if v.key == 0 && v.repeat == 0 || v.distance > 12 {
		raw |= 2
	}
	return raw
}

func doors(v *vehicle, d []byte, _ uint64) {
	state := v.doorState()
	for i := range d {
		flag(d, i, 2, state&2 != 0)
	}
	up(d, 0, 0, 2, state&1)
	up(d, 2, 3, 5, 31) // the sliding door and the rear have no window
	up(d, 3, 3, 5, 31)
}

// lightState is both bytes of the lights' message.
func (v *vehicle) lightState() uint64 {
	raw := uint64(3)
	if v.driver.brake > 0.5 {
		raw |= 1 << 8
	}
	// Out of the parking bay with the left turn signal.
	if v.key > 0 && v.now > 6*second && v.now < 11*second && v.now/350_000%2 == 0 {
		raw |= 1 << 5
	}
	return raw
}

func lights(v *vehicle, d []byte, _ uint64) { up(d, 0, 0, 16, v.lightState()) }

func wipers(v *vehicle, d []byte, _ uint64) {
	if v.rain > 0 {
		up(d, 0, 0, 3, 2)
	}
	d[1] = byte(scaled(v.rain, 0.5, 200))
}

func climateState(v *vehicle, d []byte, n uint64) {
	cabin := clamp(v.ambient+float64(clamp(v.engine.coolant, 0, 90)*0.2), -40, 22)
	d[0] = byte(scaled(cabin+40, 0.5, 240))
	d[1] = byte(scaled(21+40, 0.5, 240))
	d[2] = byte(scaled(v.ambient+40, 0.5, 240))
	up(d, 3, 0, 16, signMagnitude(v.ambient-1.3, 0.1, 16, 800))
	d[5] = byte(scaled(0.62, 0.02, 250))
	d[6] = byte(scaled(45, 0.5, 200))
	flag(d, 7, 0, v.ambient > 15)
	up(d, 7, 4, 4, n%16)
}

// clock splits the capture's own time; the days are those of January 2026,
// where all scenarios lie.
func clock(v *vehicle, d []byte, _ uint64) {
	const january = 1_767_225_600 // 2026-01-01 00:00:00 UTC
	now := v.epoch + v.now/second - january
	day := int(now/86400) % 31
	down(d, 0, 7, 16, digits(2026, 4))
	d[2] = byte(digits(1, 2))
	d[3] = byte(digits(day+1, 2))
	d[4] = byte(digits(int(now/3600%24), 2))
	d[5] = byte(digits(int(now/60%60), 2))
	d[6] = byte(digits(int(now%60), 2))
	d[7] = 1
}

func vehicleIdentity(_ *vehicle, d []byte, n uint64) {
	part := int(n % 3)
	d[0] = byte(part)
	copy(d[1:], identity[7*part:min(7*part+7, len(identity))])
}

func cargoBox(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 32, single(v.body.cargo))
	up(d, 4, 0, 16, half(4))
	d[6] = 2
	d[7] = byte(n % 16)
}

func tyrePressures(v *vehicle, d []byte, _ uint64) {
	warm := clamp(v.distance/400, 0, 8)
	for i, p := range v.body.pressure {
		d[2*i] = byte(scaled(p+float64(warm*0.012), 0.025, 240))
		d[2*i+1] = byte(scaled(v.ambient+warm+40, 1, 160))
	}
}

func batteryState(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 16, scaled(v.engine.supply, 0.001, 20000))
	up(d, 2, 0, 16, signed(v.body.current, 0.05, 30000))
	d[4] = byte(scaled(v.body.charge, 0.5, 200))
	d[5] = byte(scaled(v.ambient+5+40, 1, 160))
	d[6] = byte(n % 16)
	d[7] = crcBody(0x49, d[:7])
}

func unitAlive(_ *vehicle, d []byte, _ uint64) { d[0] = 1 }

func vehicleDistance(v *vehicle, d []byte, _ uint64) {
	up(d, 0, 0, 32, uint64((v.body.odometer+v.distance)/5))
	up(d, 4, 0, 32, uint64(v.distance/5))
}

func ambientConditions(v *vehicle, d []byte, _ uint64) {
	d[0] = 202 // 101 kPa
	cabin := clamp(v.ambient+float64(clamp(v.engine.coolant, 0, 90)*0.2), -40, 22)
	up(d, 1, 0, 16, scaled(cabin+273, 1.0/32, 64255))
	up(d, 3, 0, 16, scaled(v.ambient+273, 1.0/32, 64255))
	d[5] = byte(scaled(v.engine.intake+40, 1, 250))
	up(d, 6, 0, 16, scaled(v.ambient-1+273, 1.0/32, 64255))
}

func trailerState(_ *vehicle, d []byte, _ uint64) {
	for i := range d {
		d[i] = 0xFF
	}
	d[0] = 0xFD
	up(d, 1, 0, 16, 1240) // 620 kg
	d[3] = 57             // 22.8 %
}

// order is what the fleet's office sends: cool the box, ticket 7.
func order() [8]byte { return [8]byte{2, 7, 'B', 'A', 'Y', ' ', '4', ' '} }
