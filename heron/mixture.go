package heron

// The mixture loop's raw states.
const (
	loopCold   = 0
	loopClosed = 1
	loopLoad   = 2
	loopFault  = 3
)

// Facts of mixture and probe (common practice): petrol burns completely with
// 14.7 times its weight of air; a hot zirconia probe gives about 0.9 V when rich
// and about 0.1 V when lean; a cold one stays at the bias of its input, 0.45 V.
const (
	stoichiometric  = 14.7
	probeRich       = 0.88
	probeLean       = 0.11
	probeBias       = 0.45
	probeReadyAt    = 350.0 // degC
	loopCoolant     = 20.0  // degC from which the loop may close
	probeDead       = 0.05  // V; a probe below it is suspected
	probePending    = 1 * second
	probeConfirmed  = 5 * second
	probeStuck      = 0.02 // V with the signal wire on ground
	transportCycles = 22   // from injection to probe, in cycles
)

// mixture is the oxygen sensor and its loop.
type mixture struct {
	loop      int
	wanted    float64 // lambda
	short     float64 // share
	long      float64
	offset    float64 // the engine needs this much more fuel than reckoned
	lambda    float64 // as burnt
	delay     [transportCycles]float64
	slot      int
	probe     float64 // V
	after     float64 // V
	heat      float64 // of the probe, degC
	heater    float64 // duty, %
	ready     bool
	rich      bool
	dead      int64 // microseconds below probeDead while believed
	pending   bool
	confirmed bool
	seenSpeed float64 // km/h when the fault was first seen
	seenCool  float64
}

func (m *mixture) start(v *vehicle) {
	m.offset, m.wanted, m.lambda = 0.045, 1, 1
	m.probe, m.after, m.heat = probeBias, probeBias, v.ambient
	if v.key == 0 {
		m.loop, m.ready, m.heat, m.long, m.after = loopClosed, true, 620, 0.043, 0.64
		m.probe = probeRich
	}
	for i := range m.delay {
		m.delay[i] = 1
	}
}

// trim is the factor on the fuel.
func (m *mixture) trim() float64 { return float64((1 + m.short) * (1 + m.long)) }

func (m *mixture) cycle(v *vehicle) {
	const dt = cycleMicros / 1e6
	e := &v.engine
	if e.ran == 0 {
		return
	}
	// The heater is held back while water may still be in the exhaust.
	m.heater = 30
	if m.heat < 600 {
		m.heater = clamp(20+float64(float64(e.ran/second)*5), 20, 90)
	}
	m.heat += float64((float64(m.heater*7) + float64(e.flow*14) + v.ambient - m.heat) * dt / 16)
	m.ready = m.ready || m.heat > probeReadyAt

	m.choose(v)
	// Rich while cold, and at full load; exactly stoichiometric in the loop.
	switch m.loop {
	case loopCold:
		m.wanted = clamp(0.86+float64((e.coolant+10)*0.0035), 0.86, 0.97)
	case loopLoad:
		m.wanted = 0.9
		if e.cut {
			m.wanted = 1
		}
	case loopFault:
		m.wanted = 0.98
	default:
		m.wanted = 1
	}

	// What is burnt, and what of it reaches the probe later.
	m.lambda = m.wanted * (1 + m.offset) / m.trim()
	if e.cut {
		m.lambda = 1.9
	}
	seen := m.delay[m.slot]
	m.delay[m.slot] = m.lambda
	m.slot = (m.slot + 1) % transportCycles
	target := probeBias
	if m.ready {
		target = clamp(probeBias+float64((1-seen)*60), probeLean, probeRich) + float64(v.random.noise()*0.012)
		if seen > 1.3 {
			target = 0.06
		}
	}
	m.probe += float64(0.22 * (target - m.probe))
	if v.probe > 0 && v.now >= v.probe {
		m.probe = probeStuck
	}
	if m.ready {
		m.after += float64(0.01 * (0.62 + float64((1-seen)*0.8) - m.after))
	}
	m.watch(v)
	if m.loop != loopClosed {
		m.short = toward(m.short, 0, 0.002)
		return
	}
	// Two-point control: jump when the probe switches, then ramp.
	rich := m.probe > probeBias
	step := 0.00035
	if rich != m.rich {
		m.rich, step = rich, 0.012
	}
	if rich {
		step = -step
	}
	m.short = clamp(m.short+step, -0.25, 0.25)
	m.long = clamp(m.long+float64(0.0006*m.short), -0.2, 0.2)
}

// choose chooses the loop's state.
func (m *mixture) choose(v *vehicle) {
	e := &v.engine
	switch {
	case m.confirmed:
		m.loop = loopFault
	case e.coolant < loopCoolant || !m.ready || e.ran < 20*second:
		m.loop = loopCold
	case e.cut || e.charge > 0.92:
		m.loop = loopLoad
	default:
		m.loop = loopClosed
	}
}

// watch debounces a probe that says lean for longer than any engine is.
func (m *mixture) watch(v *vehicle) {
	if !m.ready || v.engine.cut || m.probe >= probeDead {
		if m.probe >= probeDead {
			m.dead = 0
		}
		return
	}
	m.dead += cycleMicros
	if m.dead >= probePending && !m.pending {
		m.pending, m.seenSpeed, m.seenCool = true, float64(v.speed*3.6), v.engine.coolant
	}
	m.confirmed = m.confirmed || m.dead >= probeConfirmed
}
