package unit

import "math/big"

// Unit is a scale of a dimension. A value x has Factor * pi^PiPower * x + Zero
// base units. The zero Unit is the plain number.
type Unit struct {
	Symbol  string
	Dim     Dimension
	Factor  *big.Rat
	PiPower int
	// Zero is the base value of x = 0; only points have one (degC: 273.15).
	Zero *big.Rat
	// Point marks a place on a scale (a temperature), not an amount.
	Point bool
}

// Definition is a unit that a description declares: Value times Of, or a new
// base unit if Value is nil.
type Definition struct {
	Name  string
	Text  string
	Value *big.Rat
	Of    Unit
}

// IsPlain reports whether u is the plain number without a symbol.
func (u Unit) IsPlain() bool { return u.Symbol == "" && u.Dim == "" }

// factor is Factor, 1 for the zero Unit.
func (u Unit) factor() *big.Rat {
	if u.Factor == nil {
		return big.NewRat(1, 1)
	}
	return u.Factor
}

// Difference is the unit of the difference of two values of u: K for degC.
func (u Unit) Difference() Unit {
	if !u.Point {
		return u
	}
	return Unit{Symbol: "K", Dim: u.Dim, Factor: u.Factor, PiPower: u.PiPower}
}
