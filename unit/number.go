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
// 0b101, 1_000, 0.25, 1e-3, or a fraction without spaces such as 100/255. It
// has at most 400 characters, and exponents of -400 to 400.
func ParseNumber(text string) (*big.Rat, error) {
	if len(text) > maxDigits {
		return nil, fmt.Errorf("a number has at most %d characters", maxDigits)
	}
	over, under, divided := strings.Cut(text, "/")
	a, err := parseSimple(over)
	if err != nil || !divided {
		return a, err
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

// parseSimple reads a number that is no fraction.
func parseSimple(text string) (*big.Rat, error) {
	s := digitScanner{rest: text}
	for _, b := range []struct {
		lead string
		base int
	}{{"0x", 16}, {"0b", 2}} {
		rest, ok := strings.CutPrefix(text, b.lead)
		if !ok {
			continue
		}
		s.rest = rest
		digits := s.take(b.base)
		if err := s.end(text); err != nil {
			return nil, err
		}
		n, _ := new(big.Int).SetString(digits, b.base)
		return new(big.Rat).SetInt(n), nil
	}
	digits, power := s.take(10), 0
	if s.skip(".") {
		fraction := s.take(10)
		digits += fraction
		power = -len(fraction)
	}
	if s.skip("eE") {
		sign := 1
		if s.skip("-") {
			sign = -1
		} else {
			s.skip("+")
		}
		exponent := s.take(10)
		if err := s.end(text); err != nil {
			return nil, err
		}
		e, err := strconv.Atoi(exponent)
		if err != nil || e > maxExponent {
			return nil, fmt.Errorf("%q: an exponent is at most %d", text, maxExponent)
		}
		power += sign * e
	}
	if err := s.end(text); err != nil {
		return nil, err
	}
	n, _ := new(big.Int).SetString(digits, 10)
	if power < 0 {
		return new(big.Rat).SetFrac(n, pow10(-power)), nil
	}
	return new(big.Rat).SetInt(n.Mul(n, pow10(power))), nil
}

// digitScanner takes a number apart. What goes wrong first sticks.
type digitScanner struct {
	rest        string
	bad, unders bool // no digit where one must be; a misplaced underscore
}

// take returns the digits ahead, at least one, without the underscores
// between them.
func (s *digitScanner) take(base int) string {
	n := 0
	for n < len(s.rest) && (s.rest[n] == '_' || isDigit(s.rest[n], base)) {
		n++
	}
	digits := s.rest[:n]
	s.rest = s.rest[n:]
	s.bad = s.bad || n == 0
	s.unders = s.unders || strings.HasPrefix(digits, "_") || strings.HasSuffix(digits, "_") || strings.Contains(digits, "__")
	return strings.ReplaceAll(digits, "_", "")
}

// skip takes one of the bytes, if it is ahead.
func (s *digitScanner) skip(bytes string) bool {
	if s.rest == "" || strings.IndexByte(bytes, s.rest[0]) < 0 {
		return false
	}
	s.rest = s.rest[1:]
	return true
}

// end is nil if all of the text was a number.
func (s *digitScanner) end(text string) error {
	switch {
	case s.bad || s.rest != "":
		return fmt.Errorf("%q is no number", text)
	case s.unders:
		return fmt.Errorf("%q: an underscore stands between digits", text)
	}
	return nil
}

func isDigit(c byte, base int) bool {
	switch base {
	case 2:
		return c == '0' || c == '1'
	case 16:
		return c >= '0' && c <= '9' || c|0x20 >= 'a' && c|0x20 <= 'f'
	}
	return c >= '0' && c <= '9'
}

func pow10(n int) *big.Int { return new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(n)), nil) }
