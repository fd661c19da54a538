package bits

import "math"

// The raw values of this file are right-aligned and have no bit above width.

// SignExtend reads width bits (1 to 64) as two's complement.
func SignExtend(raw uint64, width int) int64 {
	shift := uint(64 - width)
	return int64(raw<<shift) >> shift
}

// PutSigned is the inverse of SignExtend; ok is false if the value doesn't fit.
func PutSigned(v int64, width int) (raw uint64, ok bool) {
	raw = uint64(v) & (^uint64(0) >> (64 - width))
	return raw, SignExtend(raw, width) == v
}

// SignMagnitude reads width bits as a sign (heaviest bit) and a magnitude.
// Minus zero reads as zero.
func SignMagnitude(raw uint64, width int) int64 {
	magnitude := int64(raw &^ (1 << (width - 1)))
	if raw>>(width-1)&1 != 0 {
		return -magnitude
	}
	return magnitude
}

// PutSignMagnitude is the inverse of SignMagnitude; ok is false if the value
// doesn't fit.
func PutSignMagnitude(v int64, width int) (raw uint64, ok bool) {
	sign := uint64(0)
	m := uint64(v)
	if v < 0 {
		sign, m = 1<<(width-1), -m
	}
	return sign | m, m < 1<<(width-1)
}

// PackedDecimal reads width bits as decimal digits of four bits each, counted
// from the lightest; the heaviest digit may have fewer. ok is false if a digit
// is above 9.
func PackedDecimal(raw uint64, width int) (v uint64, ok bool) {
	power := uint64(1)
	for shift := 0; shift < width; shift += 4 {
		digit := raw >> shift & 15
		if digit > 9 {
			return 0, false
		}
		v += digit * power
		power *= 10
	}
	return v, true
}

// PutPackedDecimal is the inverse of PackedDecimal; ok is false if the value
// doesn't fit.
func PutPackedDecimal(v uint64, width int) (raw uint64, ok bool) {
	for shift := 0; shift < width; shift += 4 {
		raw |= v % 10 << shift
		v /= 10
	}
	return raw, v == 0 && raw&^(^uint64(0)>>(64-width)) == 0
}

// Float reads 16, 32 or 64 bits as an IEEE 754 number (binary16, binary32,
// binary64). Every such number is exact in a float64.
func Float(raw uint64, width int) float64 {
	switch width {
	case 16:
		return half(uint16(raw))
	case 32:
		return float64(math.Float32frombits(uint32(raw)))
	}
	return math.Float64frombits(raw)
}

// half reads an IEEE 754 binary16 number.
func half(h uint16) float64 {
	sign := 1.0
	if h>>15 != 0 {
		sign = -1
	}
	exponent, fraction := int(h>>10&31), float64(h&1023)
	switch exponent {
	case 0:
		return sign * math.Ldexp(fraction, -24)
	case 31:
		if fraction != 0 {
			return math.NaN()
		}
		return math.Inf(int(sign))
	}
	return sign * math.Ldexp(1024+fraction, exponent-25)
}

// PutFloat is the inverse of Float, rounding half to even; what is too large
// becomes an infinity. A NaN stays one, but its payload may change.
func PutFloat(v float64, width int) uint64 {
	switch width {
	case 16:
		return uint64(putHalf(v))
	case 32:
		return uint64(math.Float32bits(float32(v)))
	}
	return math.Float64bits(v)
}

func putHalf(v float64) uint16 {
	sign := uint16(0)
	if math.Signbit(v) {
		sign = 1 << 15
		v = -v
	}
	switch {
	case math.IsNaN(v):
		return sign | 0x7E00
	case v >= 65520: // half way to the number above the largest
		return sign | 0x7C00
	case v < 0x1p-14:
		return sign | uint16(math.RoundToEven(math.Ldexp(v, 24)))
	}
	fraction, exponent := math.Frexp(v)                            // v = fraction * 2^exponent, fraction in [0.5, 1)
	mantissa := uint16(math.RoundToEven(math.Ldexp(fraction, 11))) // 1024 to 2048
	// The leading one of the mantissa raises the exponent field by one, and a
	// mantissa that rounded up to 2048 by two: both are right.
	return sign | (uint16(exponent+13)<<10 + mantissa)
}
