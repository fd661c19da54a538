package unit

import (
	"fmt"
	"math/big"
	"strconv"
	"strings"
)

// Limits of written numbers, so that no text costs more than it is long.
const (
	maxDigits   = 400
	maxExponent = 400
)

// ParseNumber reads an unsigned number of the language exactly: 12, 0x1F,
// 0b101, 1_000, 0.25, 1e-3, or a fraction without spaces such as 100/255.
func ParseNumber(text string) (*big.Rat, error) {
	if len(text) > maxDigits {
		return nil, fmt.Errorf("a number has at most %d characters", maxDigits)
	}
	if over, under, ok := strings.Cut(text, "/"); ok {
		a, err := parseSimple(over)
		if err != nil {
			return nil, err
		}
		b, err := parseSimple(under)
		if err != nil {
			return nil, err
		}
		if b.Sign() == 0 {
			return nil, fmt.Errorf("%s divides by zero", text)
		}
		return a.Quo(a, b), nil
	}
	return parseSimple(text)
}

func parseSimple(text string) (*big.Rat, error) {
	bad := fmt.Errorf("%q is no number", text)
	for i, c := range []byte(text) {
		if c == '_' && (i == 0 || i == len(text)-1 || !isAlphanumeric(text[i-1]) || !isAlphanumeric(text[i+1])) {
			return nil, fmt.Errorf("%q: an underscore stands between digits", text)
		}
	}
	digits := strings.ReplaceAll(text, "_", "")
	for base, lead := range map[int]string{16: "0x", 2: "0b"} {
		if rest, ok := strings.CutPrefix(digits, lead); ok {
			n, ok := new(big.Int).SetString(rest, base)
			if !ok || rest[0] == '-' || rest[0] == '+' {
				return nil, bad
			}
			return new(big.Rat).SetInt(n), nil
		}
	}
	mantissa, exponent, hasExponent := strings.Cut(strings.ToLower(digits), "e")
	whole, fraction, hasPoint := strings.Cut(mantissa, ".")
	if !allDigits(whole) || (hasPoint && !allDigits(fraction)) {
		return nil, bad
	}
	n, _ := new(big.Int).SetString(whole+fraction, 10)
	power := -len(fraction)
	if hasExponent {
		e, err := strconv.Atoi(exponent)
		if err != nil || exponent == "" {
			return nil, bad
		}
		if e > maxExponent || e < -maxExponent {
			return nil, fmt.Errorf("%q: an exponent is at most %d", text, maxExponent)
		}
		power += e
	}
	r := new(big.Rat).SetInt(n)
	ten := new(big.Rat).SetInt(pow10(max(power, -power)))
	if power < 0 {
		return r.Quo(r, ten), nil
	}
	return r.Mul(r, ten), nil
}

func isAlphanumeric(c byte) bool {
	return c >= '0' && c <= '9' || c >= 'a' && c <= 'f' || c >= 'A' && c <= 'F'
}

func allDigits(s string) bool {
	for _, c := range []byte(s) {
		if c < '0' || c > '9' {
			return false
		}
	}
	return s != ""
}

func pow10(n int) *big.Int { return new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(n)), nil) }
