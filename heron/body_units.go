package heron

// bodyUnits is what hangs on the body bus, and the fuel tank.
type bodyUnits struct {
	tank     float64 // L
	slosh    float64 // L, what the floats see besides
	level    float64 // L, smoothed
	odometer float64 // m
	cargo    float64 // degC
	pressure [4]float64
	charge   float64 // of the battery, %
	current  float64 // A
	unlocked bool
}

func (b *bodyUnits) start(v *vehicle) {
	b.tank, b.level, b.cargo, b.charge = v.tank, v.tank, 4.5, 82
	b.odometer = 48_213_700
	b.pressure = [4]float64{3.3, 3.25, 3.6, 3.575}
	b.unlocked = v.key == 0
}

func (b *bodyUnits) cycle(v *vehicle) {
	const dt = cycleMicros / 1e6
	b.tank -= float64(v.engine.flow / stoichiometric / 745 * dt)
	b.slosh += float64(0.02 * (float64(v.acceleration*-0.8) - b.slosh))
	b.level += float64(0.001 * (b.tank + b.slosh - b.level))
	b.cargo += float64((4 + v.random.noise() - b.cargo) * 0.001)
	b.unlocked = b.unlocked || v.now > v.key-400_000
	b.current = -14 + float64(v.random.noise()*0.5)
	if v.engine.ran > 0 {
		b.current = 9 + float64(v.random.noise()*0.8)
	} else if v.engine.speed > 0 {
		b.current = -210 + float64(v.random.noise()*15)
	}
	b.charge = clamp(b.charge+float64(b.current*dt/3600/0.8), 0, 100)
}
