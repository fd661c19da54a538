package unit

import "math/big"

// FiniteDecimals returns how many digits after the point write r exactly; ok
// is false if no finite decimal does (digits then says nothing).
func FiniteDecimals(r *big.Rat) (digits int, ok bool) {
	twos := r.Denom().TrailingZeroBits()
	d := new(big.Int).Rsh(r.Denom(), twos)
	five, q, m, fives := big.NewInt(5), new(big.Int), new(big.Int), 0
	for {
		if q.QuoRem(d, five, m); m.Sign() != 0 {
			break
		}
		d, q = q, d
		fives++
	}
	return max(int(twos), fives), d.IsInt64() && d.Int64() == 1
}

// RoundDigits is the rule for values that no finite decimal writes exactly:
// the least number of digits after the point whose last digit counts at most a
// tenth of the resolution (the step from one raw value to the next). Rounding
// then errs by at most a twentieth of a step, and neighbours stay apart.
func RoundDigits(resolution *big.Rat) int {
	if resolution.Sign() == 0 {
		return 0
	}
	limit := new(big.Rat).Abs(resolution)
	limit.Quo(limit, big.NewRat(10, 1))
	digit, digits := big.NewRat(1, 1), 0
	tenth := big.NewRat(1, 10)
	for digit.Cmp(limit) > 0 {
		digit.Mul(digit, tenth)
		digits++
	}
	return digits
}

// RoundScaled returns r * 10^digits (digits 0 and up) rounded half to even.
func RoundScaled(r *big.Rat, digits int) *big.Int {
	num := new(big.Int).Mul(r.Num(), pow10(digits))
	return DivRound(num, r.Denom())
}

// DivRound returns num/den (den above zero) rounded half to even.
func DivRound(num, den *big.Int) *big.Int {
	q, m := new(big.Int).DivMod(num, den, new(big.Int)) // 0 <= m < den
	switch m.Lsh(m, 1).Cmp(den) {
	case 1:
		q.Add(q, big.NewInt(1))
	case 0:
		if q.Bit(0) == 1 {
			q.Add(q, big.NewInt(1))
		}
	}
	return q
}

// FormatRat writes r with at most digits digits after the point, rounded half
// to even, trailing zeros stripped.
func FormatRat(r *big.Rat, digits int) string {
	return string(AppendScaledBig(nil, RoundScaled(r, digits), digits))
}

// FormatExact writes r exactly if a finite decimal does, otherwise as a
// fraction such as 100/255.
func FormatExact(r *big.Rat) string {
	if digits, ok := FiniteDecimals(r); ok {
		return FormatRat(r, digits)
	}
	return r.RatString()
}
