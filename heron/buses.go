package heron

// The buses, in the order of the interfaces can0, can1, can2.
const (
	chassis = iota
	powertrain
	body
	busCount
)
