package heron

import "math"

// The plain encoder: bits one after the other, as the layout says them.

// down writes the width lightest bits of value, heaviest first, from bit
// heavy of byte from: down to bit 0 and on at bit 7 of the next byte.
func down(d []byte, from, heavy, width int, value uint64) {
	for i := width - 1; i >= 0; i-- {
		if value>>i&1 != 0 {
			d[from] |= 1 << heavy
		} else {
			d[from] &^= 1 << heavy
		}
		if heavy--; heavy < 0 {
			from, heavy = from+1, 7
		}
	}
}

// up writes the width lightest bits of value, lightest first, from bit light
// of byte from: up to bit 7 and on at bit 0 of the next byte.
func up(d []byte, from, light, width int, value uint64) {
	for i := range width {
		if value>>i&1 != 0 {
			d[from] |= 1 << light
		} else {
			d[from] &^= 1 << light
		}
		if light++; light > 7 {
			from, light = from+1, 0
		}
	}
}

// flag writes one bit.
func flag(d []byte, from, bit int, on bool) {
	if on {
		d[from] |= 1 << bit
	} else {
		d[from] &^= 1 << bit
	}
}

// whole rounds to the nearest whole number and keeps it within low..high.
func whole(x float64, low, high int64) int64 {
	if !(x > float64(low)) {
		return low
	}
	if x >= float64(high) {
		return high
	}
	if x < 0 {
		return -int64(0.5 - x)
	}
	return int64(x + 0.5)
}

// scaled is the raw value of a quantity x in steps, never above high.
func scaled(x, step float64, high int64) uint64 { return uint64(whole(float64(x/step), 0, high)) }

// signed is the two's complement raw value of x in steps, within +-high.
func signed(x, step float64, high int64) uint64 { return uint64(whole(float64(x/step), -high, high)) }

// signMagnitude is the raw value of x with a sign bit above width-1 bits.
func signMagnitude(x, step float64, width int, high int64) uint64 {
	n := whole(float64(x/step), -high, high)
	if n < 0 {
		return 1<<(width-1) | uint64(-n)
	}
	return uint64(n)
}

// digits is a whole number as packed decimal digits.
func digits(n, count int) uint64 {
	var out uint64
	for i := range count {
		out |= uint64(n%10) << (4 * i)
		n /= 10
	}
	return out
}

// half is x as an IEEE 754 half precision number, rounded toward zero; only
// for magnitudes between 2^-14 and 65504, smaller ones become 0.
func half(x float64) uint64 {
	var sign uint64
	if x < 0 {
		sign, x = 0x8000, -x
	}
	exponent := uint64(15)
	for x >= 2 {
		x, exponent = float64(x/2), exponent+1
	}
	for x < 1 {
		if exponent == 1 {
			return sign
		}
		x, exponent = float64(x*2), exponent-1
	}
	return sign | exponent<<10 | uint64(int64((x-1)*1024))
}

// single is x as an IEEE 754 single precision number.
func single(x float64) uint64 { return uint64(math.Float32bits(float32(x))) }
