package heron

var (
	inertiaIDs = [16]byte{0x1D, 0x2E, 0x3F, 0x40, 0x51, 0x62, 0x73, 0x84, 0x95, 0xA6, 0xB7, 0xC8, 0xD9, 0xEA, 0xFB, 0x0C}
)

func chassisMessages() []*message {
	return []*message{
		cyclic(chassis, 0x050, 4, 500*ms, airbagState),
		cyclic(chassis, 0x1A0, 16, 10*ms, wheelSpeeds).asFD(),
		cyclic(chassis, 0x1B0, 8, 20*ms, brakePressures),
		cyclic(chassis, 0x1B4, 8, 20*ms, brakeState),
		cyclic(chassis, 0x1B8, 4, 100*ms, brakePedal).onChange(10*ms, func(v *vehicle) uint64 { return brakeContacts(v) }),
		cyclic(chassis, 0x1C0, 8, 20*ms, roadSpeed).relayed(powertrain, 0x1C0).relayed(body, 0x3C0),
		cyclic(chassis, 0x1D0, 8, 20*ms, inertia),
		cyclic(chassis, 0x1E0, 8, 20*ms, steeringAngle),
		cyclic(chassis, 0x1E4, 8, 100*ms, steeringState),
		cyclic(chassis, 0x1F0, 4, 200*ms, chassisLamps).onChange(20*ms, func(v *vehicle) uint64 { return v.slipLamp() }).relayed(body, 0x3E4),
		cyclic(chassis, 0x220, 24, 50*ms, suspensionCorners).asFD(),
		cyclic(chassis, 0x260, 5, 100*ms, parkBrake).onChange(20*ms, func(v *vehicle) uint64 { return v.parkState() }),
		cyclic(chassis, 0x2A0, 8, 100*ms, wheelPickups),
		cyclic(chassis, 0x5A0, 8, 50*ms, wheelSpeedsOld),
	}
}

// wheelCode is the raw value of a wheel's speed in km/h steps, or its code.
func (v *vehicle) wheelCode(i int, step float64) uint64 {
	if i == frontRight && v.brake.damaged {
		return 0xFFFD // implausible
	}
	return scaled(v.wheels[i].reported*3.6, step, 30000)
}

func wheelSpeeds(v *vehicle, d []byte, n uint64) {
	up(d, 1, 4, 2, v.direction())
	flag(d, 1, 6, v.brake.regulating)
	for i := range v.wheels {
		down(d, 2+3*i, 7, 16, v.wheelCode(i, 0.01))
		d[4+3*i] = byte(v.wheels[i].teeth)
	}
	up(d, 14, 0, 16, scaled(v.brake.reference*3.6, 0.01, 30000))
	profile1(d, idBoth, 0x1A0, n)
}

// direction is still or forward; the van never reverses.
func (v *vehicle) direction() uint64 {
	if v.brake.reference > 0 {
		return 1
	}
	return 0
}

func wheelPickups(v *vehicle, d []byte, n uint64) {
	d[0] = ringTeeth
	for i := range v.wheels {
		if v.wheels[i].reported == 0 {
			d[1+i] = 1 << 4 // not ready
		}
	}
	if gaps := v.wheels[frontRight].gaps; gaps > 0 {
		d[1+frontRight] |= byte(v.missing)
		d[5] = byte(min(gaps, 0xFD))
	}
	if v.brake.damaged {
		d[1+frontRight] = 3<<4 | byte(v.missing)
	}
	d[6] = byte(n % 16)
	d[7] = crcH2F(d[:7])
}

func brakePressures(v *vehicle, d []byte, n uint64) {
	down(d, 2, 7, 12, scaled(v.brake.master, 0.1, 2500))
	down(d, 3, 3, 12, scaled(v.wheels[frontLeft].pressure, 0.1, 2500))
	down(d, 5, 7, 12, scaled(v.wheels[frontRight].pressure, 0.1, 2500))
	down(d, 6, 3, 12, scaled(v.wheels[rearLeft].pressure, 0.1, 2500))
	profile1(d, idAlternating, 0x1B0, n)
}

func brakeState(v *vehicle, d []byte, n uint64) {
	flag(d, 1, 4, v.brake.regulating)
	up(d, 1, 6, 2, brakeContacts(v)&1)
	up(d, 2, 0, 2, v.slipLamp())
	up(d, 2, 2, 2, v.lampTest())
	state := uint64(1)
	switch {
	case v.brake.damaged:
		state = 3
	case v.brake.regulating:
		state = 2
	}
	up(d, 2, 4, 4, state)
	for i, slip := range v.brake.slip {
		if i == frontRight && v.brake.damaged {
			d[3+i] = 0x80 // absent
			continue
		}
		d[3+i] = byte(signed(slip*100, 1, 100))
	}
	d[7] = byte(signMagnitude(v.acceleration, 0.1, 8, 120))
	if d[7] == 0x80 {
		d[7] = 0
	}
	profile1(d, idLow, 0x1B4, n)
}

// lampTest is on in the first seconds after the key is turned.
func (v *vehicle) lampTest() uint64 {
	if v.key > 0 && v.now < lampTestUntil {
		return 1
	}
	return 0
}

func (v *vehicle) slipLamp() uint64 {
	if v.brake.damaged {
		return 1
	}
	return v.lampTest()
}

// brakeContacts has the first contact in bit 0, the second in bit 2.
func brakeContacts(v *vehicle) uint64 {
	var raw uint64
	if v.brake.master > 0.6 {
		raw |= 1
	}
	if v.brake.master > 1.4 {
		raw |= 4
	}
	return raw
}

func brakePedal(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 4, brakeContacts(v))
	d[1] = byte(scaled(float64(v.brake.master*0.7), 0.5, 200))
	d[2] = byte(n % 16)
	d[3] = sum8(d[:3])
}

func roadSpeed(v *vehicle, d []byte, n uint64) {
	up(d, 3, 0, 16, scaled(v.brake.reference*3.6, 0.01, 30000))
	flag(d, 5, 0, v.brake.reference == 0)
	if v.brake.regulating {
		up(d, 5, 1, 2, 1) // estimated
	}
	up(d, 6, 0, 16, uint64(v.distance/0.02))
	profile5(d, 0x01C0, n)
}

func chassisLamps(v *vehicle, d []byte, n uint64) {
	test := v.lampTest()
	up(d, 0, 0, 2, v.slipLamp())
	up(d, 0, 2, 2, test)
	up(d, 0, 4, 2, test)
	if v.parkState() != 0 {
		up(d, 0, 6, 2, 1)
	}
	d[2] = byte(n % 16)
	d[3] = sum8(d[:3])
}

// parkState is the parking brake's: applied until the gear is engaged, then
// releasing for a while.
func (v *vehicle) parkState() uint64 {
	switch drive := v.key + 4*second; {
	case v.key == 0 || v.now > drive+900_000:
		return 0
	case v.now > drive:
		return 3
	}
	return 2
}

func parkBrake(v *vehicle, d []byte, n uint64) {
	state := v.parkState()
	if state == 3 {
		d[0] = byte(62 + v.random.peek(7))
		d[1] = byte(60 + v.random.peek(7))
	}
	up(d, 2, 0, 3, state)
	d[3] = byte(n % 16)
	d[4] = crcJ1850([]byte{0x60}, d[:4])
}

func inertia(v *vehicle, d []byte, n uint64) {
	up(d, 2, 0, 16, signed(v.steering.yaw, 0.01, 15000))
	up(d, 4, 0, 16, signed(v.steering.lateral, 0.001, 20000))
	up(d, 6, 0, 16, signed(v.acceleration, 0.001, 20000))
	profile2(d, &inertiaIDs, n)
}

func steeringAngle(v *vehicle, d []byte, n uint64) {
	down(d, 2, 7, 16, signed(v.steering.angle, 0.1, 7800))
	down(d, 4, 7, 16, signed(v.steering.rate, 0.5, 3000))
	d[6] = byte(scaled(float64(v.steering.angle*0.22)+12.5, 0.1, 250))
	flag(d, 7, 0, true)
	profile1(d, idNibble, 0x1E0, n)
}

func steeringState(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 16, signed(v.steering.angle*1.8, 0.1, 1500))
	d[2] = byte(scaled(v.ambient+22+40, 1, 190))
	d[3] = byte(scaled(v.engine.supply, 0.1, 200))
	state := uint64(1)
	if v.engine.ran > 0 {
		state = 2
	}
	up(d, 4, 0, 4, state)
	up(d, 4, 4, 2, v.lampTest())
	d[5] = byte(n % 16)
	crc := crcCCITT(0xFFFF, d[:6]...)
	d[6], d[7] = byte(crc>>8), byte(crc)
}

func suspensionCorners(v *vehicle, d []byte, n uint64) {
	road := v.random // a copy: what is sent must not change what happens
	for i := range v.wheels {
		pitch := float64(v.acceleration * 3)
		if i >= rearLeft {
			pitch = -pitch
		}
		at := 4 + 5*i
		bump := float64(road.below(2001)-1000) / 1000
		if v.speed == 0 {
			bump = 0
		}
		down(d, at, 7, 16, signed(pitch+float64(bump*2.5)+float64(side(i)*float64(v.steering.lateral*2)), 0.1, 1500))
		d[at+2] = byte(scaled(0.4+float64(v.speed*0.01), 0.01, 200))
		up(d, at+3, 0, 16, half(bump*0.9))
	}
	profile5(d, 0x0220, n)
}

func airbagState(v *vehicle, d []byte, n uint64) {
	up(d, 1, 0, 2, 1)
	up(d, 1, 6, 2, v.lampTest())
	d[2] = byte(n % 16)
	d[3] = xor8(0x50, d[:3])
}

func wheelSpeedsOld(v *vehicle, d []byte, _ uint64) {
	for i := range v.wheels {
		raw := v.wheelCode(i, 0.05625)
		if raw > 30000 {
			raw = 0xFFFE // the old message only knows one fault
		}
		down(d, 2*i, 7, 16, raw)
	}
}
