package unit

import (
	"errors"
	"math/big"
)

// ErrDimension is returned when units of different dimensions meet.
var ErrDimension = errors.New("units of different dimensions")

// ErrPoint is returned where only an amount makes sense: a point (degC) can't
// be multiplied or divided, and no unit is a multiple of one.
var ErrPoint = errors.New("a point on a scale isn't an amount")

// Convert gives a and b of to = a*from + b. It is inexact only where a power
// of pi is left over; pi is then taken with 60 digits. A point converts to an
// absolute amount and back (degC to K); for differences convert
// u.Difference().
func Convert(from, to Unit) (a, b *big.Rat, exact bool, err error) {
	if !SameDimension(from, to) {
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

// pi to 60 significant digits (OEIS A000796, from memory): a factor that needs
// it once is right to about 59 digits.
var pi = rat("3.14159265358979323846264338327950288419716939937510582097494")
