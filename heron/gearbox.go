package heron

// gearbox is an automatic with a torque converter.
type gearbox struct {
	gear    int // 1 to 6; 0 is park
	target  int
	shift   int // cycles until the shift has ended
	turbine float64
	output  float64
	oil     float64
}

func (g *gearbox) start(v *vehicle) {
	g.oil = v.coolant
	if g.oil > 60 {
		g.oil -= 8
	}
	if v.key > 0 {
		return
	}
	g.gear = 1
	for g.gear < 6 && v.speed > upshift[g.gear] {
		g.gear++
	}
	g.target = g.gear
	g.cycle(v)
}

// ratio is that of gear and axle together.
func (g *gearbox) ratio() float64 { return ratios[max(g.gear, 1)] * final }

func (g *gearbox) cycle(v *vehicle) {
	front := (v.wheels[frontLeft].speed + v.wheels[frontRight].speed) / 2
	switch {
	case v.key > 0 && v.now < v.key+4*second:
		g.target = 0
	case g.target == 0:
		g.target = 1
	case g.shift > 0:
	case g.target < 6 && v.speed > upshift[g.target] && v.driver.brake < 1:
		g.target++
	case g.target > 1 && v.speed < upshift[g.target-1]-2:
		g.target--
	}
	if g.target != g.gear {
		if g.shift == 0 {
			g.shift = 30
		}
		if g.shift--; g.shift == 0 {
			g.gear = g.target
		}
	}
	g.output = front / circumference * 60 * final
	g.turbine = g.output * ratios[max(g.gear, 1)]
	if g.gear == 0 {
		g.turbine = v.engine.speed
	}
	if g.oil < 82 {
		g.oil += 0.0012
	}
}
