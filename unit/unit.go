package unit

import (
	"errors"
	"fmt"
	"math/big"
	"sort"
	"strconv"
	"strings"
)

// Dimension is what a unit measures, in canonical form: base names with their
// exponents, sorted, such as "m s^-2". The empty Dimension is a plain number.
type Dimension string

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

// ErrDimension is returned when units of different dimensions meet.
var ErrDimension = errors.New("units of different dimensions")

// ErrPoint is returned when a point and an amount meet in a conversion.
var ErrPoint = errors.New("a point on a scale isn't an amount")

// Convert gives a and b of to = a*from + b. It is inexact only where a power
// of pi is left over; pi is then taken with 60 digits. A point converts to an
// absolute amount and back (degC to K); for differences convert
// u.Difference().
func Convert(from, to Unit) (a, b *big.Rat, exact bool, err error) {
	if from.Dim != to.Dim {
		return nil, nil, false, ErrDimension
	}
	a = new(big.Rat).Quo(from.factor(), to.factor())
	b = new(big.Rat)
	if from.Zero != nil {
		b.Set(from.Zero)
	}
	if to.Zero != nil {
		b.Sub(b, to.Zero)
	}
	b.Quo(b, to.factor())
	exact = from.PiPower == to.PiPower
	for i := from.PiPower; i > to.PiPower; i-- {
		a.Mul(a, pi)
	}
	for i := from.PiPower; i < to.PiPower; i++ {
		a.Quo(a, pi)
	}
	return a, b, exact, nil
}

// pi to 60 digits (OEIS A000796, from memory).
var pi, _ = new(big.Rat).SetString("3.14159265358979323846264338327950288419716939937510582097494")

// Mul is the unit of a product. Points can't be multiplied.
func Mul(u, v Unit) (Unit, error) { return combine(u, v, 1) }

// Div is the unit of a quotient. Points can't be divided.
func Div(u, v Unit) (Unit, error) { return combine(u, v, -1) }

func combine(u, v Unit, sign int) (Unit, error) {
	if u.Point || v.Point {
		return Unit{}, ErrPoint
	}
	out := Unit{Dim: u.Dim.times(v.Dim, sign), PiPower: u.PiPower + sign*v.PiPower}
	if sign > 0 {
		out.Factor = new(big.Rat).Mul(u.factor(), v.factor())
	} else {
		out.Factor = new(big.Rat).Quo(u.factor(), v.factor())
	}
	switch {
	case v.Symbol == "":
		out.Symbol = u.Symbol
	case u.Symbol == "" && sign > 0:
		out.Symbol = v.Symbol
	case u.Symbol == "":
		out.Symbol = "1/" + v.Symbol
	case sign > 0:
		out.Symbol = u.Symbol + "*" + v.Symbol
	default:
		out.Symbol = u.Symbol + "/" + v.Symbol
	}
	return out, nil
}

// exponents splits a dimension into its base names and their powers.
func (d Dimension) exponents() map[string]int {
	out := map[string]int{}
	for part := range strings.FieldsSeq(string(d)) {
		name, power, ok := strings.Cut(part, "^")
		n := 1
		if ok {
			n, _ = strconv.Atoi(power)
		}
		out[name] += n
	}
	return out
}

func (d Dimension) times(other Dimension, sign int) Dimension {
	e := d.exponents()
	for name, n := range other.exponents() {
		e[name] += sign * n
	}
	var parts []string
	for name, n := range e {
		switch n {
		case 0:
		case 1:
			parts = append(parts, name)
		default:
			parts = append(parts, fmt.Sprintf("%s^%d", name, n))
		}
	}
	sort.Strings(parts)
	return Dimension(strings.Join(parts, " "))
}
