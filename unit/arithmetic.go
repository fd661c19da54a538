package unit

import (
	"math/big"
	"strings"
)

// Mul is the unit of a product: V*A of V and A. Points can't be multiplied.
func Mul(u, v Unit) (Unit, error) {
	if u.Point || v.Point {
		return Unit{}, ErrPoint
	}
	over, under := fraction(u.Symbol)
	vOver, vUnder := fraction(v.Symbol)
	return Unit{
		Symbol:  quotient(product(over, vOver), product(under, vUnder)),
		Dim:     u.Dim.times(v.Dim, 1),
		Factor:  new(big.Rat).Mul(u.factor(), v.factor()),
		PiPower: u.PiPower + v.PiPower,
	}, nil
}

// Div is the unit of a quotient: V/A of V and A. Points can't be divided.
func Div(u, v Unit) (Unit, error) {
	over, under := fraction(v.Symbol)
	return Mul(u, Unit{
		Symbol:  quotient(under, over),
		Dim:     Dimension("").times(v.Dim, -1),
		Factor:  new(big.Rat).Inv(v.factor()),
		PiPower: -v.PiPower,
		Point:   v.Point,
	})
}

// fraction splits a symbol into the products above and below its slash; a
// product of nothing is "".
func fraction(symbol string) (over, under string) {
	over, under, _ = strings.Cut(symbol, "/")
	if over == "1" {
		over = ""
	}
	return over, under
}

func product(a, b string) string {
	if a == "" || b == "" {
		return a + b
	}
	return a + "*" + b
}

// quotient is the inverse of fraction. Nothing is cancelled, so that the symbol
// tells where the unit comes from, and Lookup reads it back as the same unit.
func quotient(over, under string) string {
	switch {
	case under == "":
		return over
	case over == "":
		return "1/" + under
	}
	return over + "/" + under
}
