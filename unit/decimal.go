package unit

import (
	"math/big"
)

// FiniteDecimals returns how many digits after the point write r exactly; ok
// is false if no finite decimal does.
func FiniteDecimals(r *big.Rat) (digits int, ok bool) {
	d := new(big.Int).Set(r.Denom())
	count := func(prime int64) int {
		p, q, m, n := big.NewInt(prime), new(big.Int), new(big.Int), 0
		for {
			q.QuoRem(d, p, m)
			if m.Sign() != 0 {
				return n
			}
			d.Set(q)
			n++
		}
	}
	digits = max(count(2), count(5))
	return digits, d.Cmp(big.NewInt(1)) == 0
}

// RoundDigits is the rule for values that no finite decimal writes exactly:
// the least number of digits after the point whose last digit counts at most a
// tenth of the resolution (the step from one raw value to the next). Rounding
// then errs by at most a twentieth of a step, and neighbours stay apart.
func RoundDigits(resolution *big.Rat) int {
	if resolution.Sign() <= 0 {
		return 0
	}
	limit := new(big.Rat).Quo(resolution, big.NewRat(10, 1))
	digit, digits := big.NewRat(1, 1), 0
	tenth := big.NewRat(1, 10)
	for digit.Cmp(limit) > 0 {
		digit.Mul(digit, tenth)
		digits++
	}
	return digits
}

// RoundScaled returns r * 10^digits rounded half to even.
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

const digitPairs = "00010203040506070809" +
	"10111213141516171819" +
	"20212223242526272829" +
	"30313233343536373839" +
	"40414243444546474849" +
	"50515253545556575859" +
	"60616263646566676869" +
	"70717273747576777879" +
	"80818283848586878889" +
	"90919293949596979899"

var powers = [...]uint64{1, 10, 100, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18}

// MaxDecimals is the largest number of decimals that AppendScaled takes.
const MaxDecimals = len(powers) - 1

// AppendScaled appends coef / 10^decimals: the shortest exact decimal, without
// exponent, trailing zeros or minus zero.
func AppendScaled(dst []byte, coef int64, decimals int) []byte {
	u := uint64(coef)
	if coef < 0 {
		dst = append(dst, '-')
		u = -u
	}
	if decimals == 0 {
		return appendUint(dst, u)
	}
	p := powers[decimals]
	whole := u / p
	fraction := u - whole*p
	dst = appendUint(dst, whole)
	if fraction == 0 {
		return dst
	}
	// Trailing zeros first, so that the digits left are written once.
	for fraction%10 == 0 {
		fraction /= 10
		decimals--
	}
	var buf [24]byte
	i := len(buf)
	for ; decimals >= 2; decimals -= 2 {
		q := fraction / 100
		pair := (fraction - q*100) * 2
		fraction = q
		i -= 2
		buf[i], buf[i+1] = digitPairs[pair], digitPairs[pair+1]
	}
	if decimals == 1 {
		i--
		buf[i] = byte('0' + fraction%10)
	}
	i--
	buf[i] = '.'
	return append(dst, buf[i:]...)
}

func appendUint(dst []byte, u uint64) []byte {
	if u < 10 {
		return append(dst, byte('0'+u))
	}
	if u < 100 {
		return append(dst, digitPairs[u*2], digitPairs[u*2+1])
	}
	var buf [20]byte
	i := len(buf)
	for u >= 100 {
		q := u / 100
		pair := (u - q*100) * 2
		u = q
		i -= 2
		buf[i], buf[i+1] = digitPairs[pair], digitPairs[pair+1]
	}
	if u < 10 {
		i--
		buf[i] = byte('0' + u)
	} else {
		i -= 2
		buf[i], buf[i+1] = digitPairs[u*2], digitPairs[u*2+1]
	}
	return append(dst, buf[i:]...)
}

// AppendScaledBig is AppendScaled for numbers of any size.
func AppendScaledBig(dst []byte, coef *big.Int, decimals int) []byte {
	if coef.IsInt64() && decimals <= MaxDecimals {
		return AppendScaled(dst, coef.Int64(), decimals)
	}
	if coef.Sign() < 0 {
		dst = append(dst, '-')
	}
	text := new(big.Int).Abs(coef).Append(nil, 10)
	for len(text) <= decimals {
		text = append([]byte{'0'}, text...)
	}
	whole, fraction := text[:len(text)-decimals], text[len(text)-decimals:]
	dst = append(dst, whole...)
	for len(fraction) > 0 && fraction[len(fraction)-1] == '0' {
		fraction = fraction[:len(fraction)-1]
	}
	if len(fraction) > 0 {
		dst = append(append(dst, '.'), fraction...)
	}
	return dst
}
