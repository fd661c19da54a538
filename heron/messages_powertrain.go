package heron

var (
	pedalIDs   = [16]byte{0xB0, 0xB1, 0xB2, 0xB3, 0xB4, 0xB5, 0xB6, 0xB7, 0xB8, 0xB9, 0xBA, 0xBB, 0xBC, 0xBD, 0xBE, 0xBF}
	gearboxIDs = [16]byte{0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D, 0xD4, 0x4D}
)

func powertrainMessages() []*message {
	return []*message{
		cyclic(powertrain, 0x0A0, 8, 10*ms, crankshaft),
		cyclic(powertrain, 0x0A4, 8, 50*ms, camshafts),
		cyclic(powertrain, 0x0B0, 8, 20*ms, pedalTracks),
		cyclic(powertrain, 0x0B4, 8, 20*ms, throttle),
		cyclic(powertrain, 0x0C0, 8, 20*ms, engineTorque),
		cyclic(powertrain, 0x0D0, 8, 20*ms, gearboxState),
		cyclic(powertrain, 0x0D4, 4, 20*ms, gearboxRequest),
		cyclic(powertrain, 0x110, 8, 50*ms, airPath),
		cyclic(powertrain, 0x120, 8, 50*ms, mixtureMessage),
		cyclic(powertrain, 0x130, 8, 20*ms, ignition),
		cyclic(powertrain, 0x134, 8, 20*ms, injection),
		cyclic(powertrain, 0x138, 8, 50*ms, valveTrain),
		cyclic(powertrain, 0x2C0, 8, 100*ms, engineState).relayed(body, 0x3D0),
		cyclic(powertrain, 0x2D0, 8, 200*ms, fuelTank).relayed(body, 0x3E8),
		cyclic(powertrain, 0x2D8, 4, 500*ms, driveChoice).onChange(50*ms, func(v *vehicle) uint64 { return uint64(v.driver.mode) }),
		cyclic(powertrain, 0x320, 8, 1000*ms, engineFaults).onChange(50*ms, func(v *vehicle) uint64 { return v.faultState() }),
		cyclic(powertrain, 0x330, 4, 200*ms, engineLamps).onChange(20*ms, func(v *vehicle) uint64 { return v.engineLamps() }).relayed(body, 0x3E0),
		cyclic(powertrain, 0x0CF00400, 8, 50*ms, engineBroadcast).wide(),
		cyclic(powertrain, 0x18FF2156, 8, 200*ms, chargerState).wide(),
	}
}

func crankshaft(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	up(d, 1, 4, 3, uint64(e.sync))
	up(d, 2, 0, 16, scaled(e.speed, 0.25, 32000))
	turns := int64(e.turned)
	d[4], d[6], d[7] = 0xFF, 0xFF, 0xFF
	if e.sync >= 2 {
		d[4] = byte(min(int64((e.turned-float64(turns))*60), 57))
	}
	d[5] = byte(turns)
	if e.speed > 20 {
		up(d, 6, 0, 16, scaled(1e6/e.speed, 1, 65000))
	}
	profile1(d, idBoth, 0x0A0, n)
}

func camshafts(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	speed := scaled(e.speed/2, 0.25, 16000)
	up(d, 0, 0, 16, speed)
	up(d, 3, 0, 16, speed)
	d[2], d[5] = 0x80, 0x80
	if e.sync == 3 {
		d[2] = byte(signed(e.intakePhase, 0.5, 120))
		d[5] = byte(signed(e.exhaustPhase, 0.5, 120))
	}
	flag(d, 6, 0, e.sync == 3)
	up(d, 6, 4, 4, n%16)
	d[7] = crcH2F(d[:7])
}

func pedalTracks(v *vehicle, d []byte, n uint64) {
	pedal := v.driver.pedal
	flag(d, 1, 4, pedal > 97)
	flag(d, 1, 5, pedal == 0)
	noise := float64(v.random.peek(7)-3) / 1000
	track := 0.75 + float64(pedal*0.03) + noise
	half := 0.375 + float64(pedal*0.015) - float64(noise/2)
	down(d, 2, 7, 12, scaled(track, 0.00125, 4000))
	down(d, 4, 7, 12, scaled(half, 0.00125, 4000))
	d[6] = byte(scaled(pedal, 0.4, 250))
	d[7] = byte(scaled(v.demand(), 0.4, 250))
	profile2(d, &pedalIDs, n)
}

func throttle(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	up(d, 1, 4, 3, uint64(v.driver.mode))
	flag(d, 1, 7, true)
	d[2] = byte(scaled(e.target, 0.4, 250))
	d[3] = byte(scaled(e.throttle, 0.4, 250))
	up(d, 4, 0, 16, signed(e.duty*0.06, 0.01, 2000))
	d[6] = byte(signMagnitude(e.duty, 1, 8, 100))
	flag(d, 7, 0, true)
	up(d, 7, 1, 3, uint64(v.driver.mode))
	profile1(d, idLow, 0x0B4, n)
}

func engineTorque(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	up(d, 2, 0, 16, signed(e.torque, 0.1, 2000)) // friction never drags more than 200 Nm
	if e.torque > 0 {
		up(d, 2, 0, 16, scaled(e.torque, 0.1, 6000))
	}
	up(d, 4, 0, 16, signed(e.wanted, 0.1, 6000))
	d[6] = byte(scaled(e.friction, 0.5, 253))
	d[7] = byte(scaled(e.charge*100, 100.0/255, 255))
	profile1(d, idAlternating, 0x0C0, n)
}

// gearRaw is the raw value of a gear.
func gearRaw(gear int) uint64 {
	if gear == 0 {
		return 8 // park
	}
	return uint64(gear)
}

func gearboxState(v *vehicle, d []byte, n uint64) {
	g := &v.gearbox
	up(d, 2, 0, 4, gearRaw(g.gear))
	up(d, 2, 4, 4, gearRaw(g.target))
	up(d, 3, 0, 16, scaled(g.output, 0.25, 32000))
	up(d, 5, 0, 16, scaled(g.turbine, 0.25, 32000))
	d[7] = byte(scaled(g.oil+40, 1, 220))
	profile1(d, idNibble, 0x5D0, n)
}

func gearboxRequest(v *vehicle, d []byte, n uint64) {
	g := &v.gearbox
	flag(d, 1, 4, g.shift > 0)
	limit := 600.0
	switch {
	case g.shift > 0:
		limit = 120
		up(d, 1, 5, 2, 1)
	case g.gear >= 3 && v.engine.speed-g.turbine < 15:
		up(d, 1, 5, 2, 2)
	}
	up(d, 2, 0, 16, signed(limit, 0.1, 6000))
	profile2(d, &gearboxIDs, n)
}

// thermistor is the raw value of an NTC input in ohm.
func thermistor(celsius float64) uint64 { return scaled(at(ntc, celsius), 1, 65000) }

func airPath(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	down(d, 0, 7, 16, scaled(e.flow, 0.01, 60000))
	d[2] = byte(scaled(e.manifold, 1, 250))
	down(d, 3, 7, 16, thermistor(e.intake))
	d[5] = 202 // 101 kPa
	d[6] = byte(n % 16)
	d[7] = crcJ1850([]byte{0x10}, d[:7])
}

// The codes of an input with electrical diagnosis, 8 bits wide.
const shortToGround8 = 0xFE

func mixtureMessage(v *vehicle, d []byte, n uint64) {
	m := &v.mixture
	up(d, 0, 0, 3, uint64(m.loop))
	flag(d, 0, 3, m.ready)
	up(d, 0, 4, 4, n%16)
	d[1] = v.probeRaw()
	d[2] = byte(scaled(m.after, 0.005, 240))
	d[3] = byte(scaled(m.heater, 0.5, 200))
	d[4] = byte(scaled(m.heater*v.engine.supply/100/7.2, 0.02, 200))
	d[5] = trimRaw(m.short)
	d[6] = trimRaw(m.long)
	d[7] = byte(scaled(m.wanted-0.5, 1.0/256, 230))
}

// probeRaw is the probe's voltage in 5 mV steps, or its code.
func (v *vehicle) probeRaw() byte {
	if v.mixture.confirmed {
		return shortToGround8
	}
	return byte(scaled(v.mixture.probe, 0.005, 240))
}

func trimRaw(share float64) byte { return byte(whole(128+float64(share*128), 0, 255)) }

// firing is the order of the cylinders.
var firing = [4]int{1, 3, 4, 2}

func ignition(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	cylinder := firing[n%4]
	up(d, 0, 0, 3, uint64(cylinder))
	flag(d, 0, 3, e.knocking[cylinder-1])
	up(d, 0, 4, 4, n%16)
	d[1] = byte(scaled(e.advance+64, 0.5, 248))
	d[2] = byte(scaled(e.retard, 0.25, 60))
	up(d, 3, 0, 16, scaled(e.dwell, 1, 10000))
	up(d, 5, 0, 16, scaled(e.knock[cylinder-1], 0.001, 10000))
	d[7] = crcH2F(d[:7])
}

func injection(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	cylinder := firing[n%4]
	resting := e.resting && (cylinder == 2 || cylinder == 3)
	flag(d, 1, 4, e.cut)
	if !resting {
		up(d, 2, 0, 16, scaled(e.onTime, 1, 25000))
	}
	up(d, 4, 0, 16, scaled(e.rail, 0.01, 3500))
	d[6] = byte(scaled(e.railWanted, 0.2, 175))
	up(d, 7, 0, 3, uint64(cylinder))
	flag(d, 7, 5, e.resting)
	flag(d, 7, 6, e.resting)
	profile1(d, idBoth, 0x134, n)
}

func valveTrain(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	lift := scaled(e.lift, 0.02, 600)
	up(d, 0, 0, 2, lift>>8)
	d[4] = byte(lift)
	state := uint64(0)
	if e.ran > 0 {
		state = 2
		if v.gearbox.shift > 0 {
			state = 1
		}
	}
	up(d, 0, 2, 3, state)
	d[1] = byte(signed(e.intakePhase, 0.5, 120))
	d[2] = byte(signed(e.exhaustPhase, 0.5, 120))
	d[3] = byte(scaled(1.2+float64(float64(state)*0.8), 0.1, 250))
	d[5] = byte(scaled(e.coolant+6+40, 1, 240))
	d[6] = byte(n % 16)
	d[7] = crcH2F(d[:7])
}

// pages is the order in which the engine's slow values take turns.
var pages = [4]byte{0, 1, 0, 2}

func engineState(v *vehicle, d []byte, n uint64) {
	e := &v.engine
	page := pages[n%4]
	d[0] = byte(n%16)<<4 | page
	down(d, 1, 7, 16, thermistor(e.coolant))
	switch page {
	case 0:
		d[3] = byte(scaled(e.oil+40, 1, 240))
		d[4] = byte(scaled(clamp(e.speed*0.18, 0, 420), 4, 253))
		up(d, 5, 0, 16, scaled(v.fuelRate(), 0.05, 65000))
	case 1:
		up(d, 3, 0, 16, uint64(e.ran/second)%65000)
		up(d, 5, 0, 16, 3127)
	case 2:
		up(d, 3, 0, 16, 0)
		up(d, 5, 0, 16, scaled(780+clamp(float64((40-e.coolant)*12), 0, 600), 0.25, 12000))
	}
	d[7] = crcJ1850([]byte{0x23}, d[:7])
}

// fuelRate is in L/h: petrol weighs 745 g/L.
func (v *vehicle) fuelRate() float64 {
	if v.engine.cut {
		return 0
	}
	return v.engine.flow / stoichiometric / 745 * 3600
}

func engineLamps(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 8, v.engineLamps())
	d[2] = byte(n % 16)
	d[3] = sum8(d[:3])
}

// engineLamps are the four lamps of the message's first byte.
func (v *vehicle) engineLamps() uint64 {
	var raw uint64
	if v.mixture.confirmed {
		raw = 1
	}
	if v.lampTest() == 1 {
		raw |= 0b010101
	}
	if v.engine.ran == 0 {
		raw |= 1<<6 | 1<<2
	}
	return raw
}

func driveChoice(v *vehicle, d []byte, n uint64) {
	up(d, 0, 0, 3, uint64(v.driver.mode))
	up(d, 0, 3, 3, uint64(v.driver.mode))
	d[1] = byte(v.driver.press)
	d[2] = byte(n % 16)
	d[3] = xor8(0xD8, d[:3])
}

func fuelTank(v *vehicle, d []byte, n uint64) {
	b := &v.body
	side := float64((b.tank + b.slosh) / 2)
	down(d, 0, 7, 16, scaled(at(floatLeft, clamp(side+b.slosh, 0, 35)), 0.1, 2800))
	down(d, 2, 7, 16, scaled(at(floatRight, clamp(side-b.slosh, 0, 35)), 0.1, 2800))
	d[4] = byte(scaled(b.level, 0.5, 140))
	d[5] = byte(scaled(480, 5, 250))
	d[6] = byte(scaled(30+float64(v.engine.flow*0.8), 0.5, 200))
	if b.level < 8.5 {
		up(d, 7, 0, 2, 1)
	}
	up(d, 7, 4, 4, n%16)
}

// faultState is 0 without a fault, 1 while it is pending, 2 when confirmed.
func (v *vehicle) faultState() uint64 {
	switch {
	case v.mixture.confirmed:
		return 2
	case v.mixture.pending:
		return 1
	}
	return 0
}

func engineFaults(v *vehicle, d []byte, n uint64) {
	for i := 2; i < 7; i++ {
		d[i] = 0xFF
	}
	if state := v.faultState(); state > 0 {
		d[0], d[1] = 1, 1
		d[2], d[3] = 0x01, 0x31 // P0131: oxygen sensor circuit low voltage
		d[4] = 1<<4 | byte(state)
		d[5] = byte(scaled(v.mixture.seenSpeed, 1, 253))
		d[6] = byte(scaled(v.mixture.seenCool+40, 1, 253))
	}
	d[7] = 0xF0 | byte(n%16)
}

func engineBroadcast(v *vehicle, d []byte, _ uint64) {
	for i := range d {
		d[i] = 0xFF
	}
	d[1] = byte(scaled(v.driver.pedal+125, 1, 250))
	d[2] = byte(scaled(clamp(v.engine.torque/3.2, -125, 125)+125, 1, 250))
	up(d, 3, 0, 16, scaled(v.engine.speed, 0.125, 64255))
}

func chargerState(v *vehicle, d []byte, _ uint64) {
	for i := range d {
		d[i] = 0xFF
	}
	up(d, 0, 0, 16, scaled(13.4, 0.05, 64255))
	current := 0.0
	d[5] = 0xF0
	if v.engine.ran > 0 {
		current = 11.5
		d[5] = 0xF1
	}
	up(d, 2, 0, 16, scaled(1600+current, 0.05, 64255))
	d[4] = byte(scaled(v.ambient+9+40, 1, 250))
}

// answer is the engine's single frame to a tester's request (services of SAE
// J1979 in the single frames of ISO 15765-2).
func answer(v *vehicle, a ask) (d [8]byte) {
	fill := func(data ...byte) {
		for i := range d {
			d[i] = 0x55
		}
		d[0] = byte(len(data))
		copy(d[1:], data)
	}
	confirmed := v.faultState() == 2
	e, m := &v.engine, &v.mixture
	one := func(raw uint64) { fill(0x41, a.parameter, byte(raw)) }
	two := func(raw uint64) { fill(0x41, a.parameter, byte(raw>>8), byte(raw)) }
	switch {
	case a.service == 0x03 && confirmed:
		fill(0x43, 1, 0x01, 0x31)
	case a.service == 0x03:
		fill(0x43, 0)
	case a.service != 0x01:
		fill(0x7F, a.service, 0x11)
	case a.parameter == 0x01 && confirmed:
		fill(0x41, 0x01, 0x81, 0x07, 0xE5, 0x00)
	case a.parameter == 0x01:
		fill(0x41, 0x01, 0x00, 0x07, 0xE5, 0x00)
	case a.parameter == 0x03:
		status := [...]byte{loopCold: 1, loopClosed: 2, loopLoad: 4, loopFault: 8}
		fill(0x41, 0x03, status[m.loop], 0)
	case a.parameter == 0x05:
		one(scaled(e.coolant+40, 1, 255))
	case a.parameter == 0x0C:
		two(scaled(e.speed, 0.25, 65535))
	case a.parameter == 0x0D:
		one(scaled(v.brake.reference*3.6, 1, 255))
	case a.parameter == 0x10:
		two(scaled(e.flow, 0.01, 65535))
	case a.parameter == 0x14:
		fill(0x41, 0x14, byte(scaled(m.probe, 0.005, 255)), trimRaw(m.short))
	default:
		fill(0x7F, a.service, 0x12)
	}
	return d
}

// request is the tester's frame.
func request(a ask) (d [8]byte) {
	d = [8]byte{2, a.service, a.parameter, 0x55, 0x55, 0x55, 0x55, 0x55}
	if a.service == 0x03 {
		d[0], d[2] = 1, 0x55
	}
	return d
}
