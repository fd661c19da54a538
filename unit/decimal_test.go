package unit

import (
	"fmt"
	"math"
	"math/big"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// Half to even, by hand.
func TestRounding(t *testing.T) {
	for _, c := range []struct {
		value  string
		digits int
		want   string
	}{
		{"1/2", 0, "0"}, {"3/2", 0, "2"}, {"5/2", 0, "2"}, {"-1/2", 0, "0"}, {"-3/2", 0, "-2"}, {"-5/2", 0, "-2"},
		{"1/3", 4, "0.3333"}, {"2/3", 4, "0.6667"}, {"-2/3", 4, "-0.6667"}, {"1/8", 2, "0.12"}, {"3/8", 2, "0.38"}, {"1/1000", 2, "0"},
		{"-1/1000", 2, "0"}, {"999/1000", 2, "1"}, {"20/51", 6, "0.392157"},
	} {
		require.Equal(t, c.want, FormatRat(number(t, c.value), c.digits), c.value)
	}
	// The nearest number of that many digits, and on a tie an even last digit:
	// held against a search around it.
	rapid.Check(t, func(t *rapid.T) {
		r := big.NewRat(rapid.Int64Range(-1e9, 1e9).Draw(t, "num"), rapid.Int64Range(1, 1e6).Draw(t, "den"))
		digits := rapid.IntRange(0, 9).Draw(t, "digits")
		n := RoundScaled(r, digits)
		scaled := new(big.Rat).Mul(r, new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(digits)), nil)))
		diff := new(big.Rat).Sub(scaled, new(big.Rat).SetInt(n))
		switch diff.Abs(diff).Cmp(big.NewRat(1, 2)) {
		case 1:
			t.Fatalf("%s is not the nearest to %s", n, scaled)
		case 0:
			require.Zero(t, n.Bit(0))
		}
	})
}

// FormatRat against long division: magnitude, remainder and tie by hand in 64
// bits. Small denominators, so that ties are common.
func TestFormatRatLongDivision(t *testing.T) {
	ties := 0
	rapid.Check(t, func(t *rapid.T) {
		num := rapid.Int64Range(-1e6, 1e6).Draw(t, "num")
		den := rapid.SampledFrom([]int64{1, 2, 3, 4, 7, 8, 16, 20, 64, 125, 200, 255, 2000}).Draw(t, "den")
		digits := rapid.IntRange(0, 6).Draw(t, "digits")
		power := int64(1)
		for range digits {
			power *= 10
		}
		magnitude := num
		if num < 0 {
			magnitude = -num
		}
		n, rest := magnitude*power/den, magnitude*power%den
		if 2*rest > den || 2*rest == den && n%2 == 1 {
			n++
		}
		if 2*rest == den {
			ties++
		}
		want := strconv.FormatInt(n/power, 10)
		if digits > 0 {
			want = strings.TrimRight(fmt.Sprintf("%s.%0*d", want, digits, n%power), "0")
			want = strings.TrimSuffix(want, ".")
		}
		if num < 0 && n != 0 {
			want = "-" + want
		}
		require.Equal(t, want, FormatRat(big.NewRat(num, den), digits), "%d/%d", num, den)
	})
	require.NotZero(t, ties, "no tie was drawn")
}

// IEEE 754-2019, 4.3.1: roundTiesToEven, as the standard library does it.
func TestHalfToEvenAsIEEE754(t *testing.T) {
	for n := int64(-101); n <= 101; n++ {
		want := strconv.FormatInt(int64(math.RoundToEven(float64(n)/2)), 10)
		require.Equal(t, want, FormatRat(big.NewRat(n, 2), 0), "%d/2", n)
	}
}

// The promise of RoundDigits: 10^-digits is at most a tenth of the resolution,
// and one digit less isn't; so neighbours print differently.
func TestRoundDigitsKeepsNeighboursApart(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := big.NewRat(rapid.Int64Range(1, 1e6).Draw(t, "num"), rapid.Int64Range(1, 1e9).Draw(t, "den"))
		digits := RoundDigits(r)
		tenth := new(big.Rat).Quo(r, big.NewRat(10, 1))
		last := new(big.Rat).SetFrac(big.NewInt(1), pow10(digits))
		require.LessOrEqual(t, last.Cmp(tenth), 0)
		if digits > 0 {
			require.Positive(t, last.Mul(last, big.NewRat(10, 1)).Cmp(tenth))
		}
		require.Equal(t, digits, RoundDigits(new(big.Rat).Neg(r)))
		k := rapid.Int64Range(-1e6, 1e6).Draw(t, "raw")
		here := new(big.Rat).Mul(r, big.NewRat(k, 1))
		require.NotEqual(t, FormatRat(here, digits), FormatRat(new(big.Rat).Add(here, r), digits))
	})
}

// A decimal is finite if and only if multiplying by ten ends at a whole number.
func TestFiniteDecimalsByTens(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		r := big.NewRat(rapid.Int64Range(-1e9, 1e9).Draw(t, "num"), rapid.Int64Range(1, 5000).Draw(t, "den"))
		digits, ok := FiniteDecimals(r)
		x, n := new(big.Rat).Set(r), 0
		for ; !x.IsInt() && n < 20; n++ {
			x.Mul(x, big.NewRat(10, 1))
		}
		require.Equal(t, x.IsInt(), ok)
		if ok {
			require.Equal(t, n, digits)
			back, read := new(big.Rat).SetString(FormatExact(r))
			require.True(t, read)
			require.Zero(t, r.Cmp(back))
		}
	})
}

func TestDigitsOfAResolution(t *testing.T) {
	for resolution, want := range map[string]int{"1": 1, "10": 0, "100": 0, "1/3": 2, "20/51": 2, "1/100": 3, "0.0999": 3, "0": 0, "-1/3": 2, "1/1000000": 7} {
		require.Equal(t, want, RoundDigits(number(t, resolution)), resolution)
	}
	for value, want := range map[string]int{"1": 0, "1/2": 1, "1/256": 8, "1/100": 2, "7/40": 3, "1/125": 3, "-3/8": 3} {
		n, ok := FiniteDecimals(number(t, value))
		require.True(t, ok)
		require.Equal(t, want, n, value)
	}
	_, ok := FiniteDecimals(number(t, "1/3"))
	require.False(t, ok)
	require.Equal(t, "1/3", FormatExact(number(t, "1/3")))
	require.Equal(t, "0.0625", FormatExact(number(t, "1/16")))
}
