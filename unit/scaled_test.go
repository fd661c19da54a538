package unit

import (
	"encoding/binary"
	"fmt"
	"math"
	"math/big"
	"math/bits"
	"math/rand/v2"
	"strconv"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func TestAppendScaled(t *testing.T) {
	for _, c := range []struct {
		coef     int64
		decimals int
		want     string
	}{
		{8013, 2, "80.13"}, {8000, 2, "80"}, {-8013, 2, "-80.13"}, {0, 5, "0"}, {5, 3, "0.005"}, {-5, 3, "-0.005"}, {50, 3, "0.05"},
		{1, 18, "0.000000000000000001"}, {9223372036854775807, 0, "9223372036854775807"}, {-9223372036854775808, 18, "-9.223372036854775808"},
		{10, 1, "1"}, {101, 1, "10.1"}, {99, 0, "99"}, {100, 0, "100"}, {-9223372036854775808, 0, "-9223372036854775808"},
		{-9223372036854775808, 1, "-922337203685477580.8"}, {1000000000000000000, 18, "1"}, {-1, 18, "-0.000000000000000001"},
		{4294967295, 9, "4.294967295"}, {4294967296, 9, "4.294967296"}, {4294967295, 3, "4294967.295"}, {-100, 2, "-1"},
	} {
		require.Equal(t, c.want, string(AppendScaled(nil, c.coef, c.decimals)))
		require.Equal(t, c.want, string(AppendScaledBig(nil, big.NewInt(c.coef), c.decimals)))
	}
}

// checkDecimal: what is written reads back as the same number, and no shorter
// text would. The reader is math/big's.
func checkDecimal(t require.TestingT, text string, coef *big.Int, decimals int) {
	got, ok := new(big.Rat).SetString(text)
	require.True(t, ok, text)
	want := new(big.Rat).SetFrac(coef, new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(decimals)), nil))
	require.Zero(t, want.Cmp(got), text)
	require.NotEqual(t, "-0", text)
	require.Regexp(t, `^-?(0|[1-9][0-9]*)(\.[0-9]*[1-9])?$`, text)
}

func TestScaledReadsBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		// Numbers of every length, not only long ones, and with zeros behind.
		coef := rapid.Int64().Draw(t, "coef") >> rapid.IntRange(0, 63).Draw(t, "shift")
		if power := int64(powers[rapid.IntRange(0, 6).Draw(t, "zeros")]); coef > math.MinInt64/power && coef < math.MaxInt64/power {
			coef *= power
		}
		decimals := rapid.IntRange(0, MaxDecimals).Draw(t, "decimals")
		checkDecimal(t, string(AppendScaled([]byte{}, coef, decimals)), big.NewInt(coef), decimals)
		product := new(big.Int).Mul(big.NewInt(coef), big.NewInt(rapid.Int64().Draw(t, "more")))
		wide := rapid.IntRange(0, 60).Draw(t, "wide")
		checkDecimal(t, string(AppendScaledBig([]byte{}, product, wide)), product, wide)
	})
}

// Every length of number at the edges of its digits, with every number of
// decimals, behind a text that must stay, in a buffer of any capacity.
func TestScaledEdges(t *testing.T) {
	for decimals := range MaxDecimals + 1 {
		for _, p := range powers[:19] {
			for _, d := range []int64{-1, 0, 1} {
				for _, coef := range []int64{int64(p) + d, -int64(p) + d, math.MaxInt64 - int64(p) + 1, 1<<32 + d, 1e8 + d} {
					got := AppendScaled(append(make([]byte, 0, 3+coef&31), "v=-"...), coef, decimals)
					require.Equal(t, "v=-", string(got[:3]))
					checkDecimal(t, string(got[3:]), big.NewInt(coef), decimals)
				}
			}
		}
	}
}

// Division by multiplication is held against the division of the processor, at
// the multiples of the divisor, where it would go wrong.
func TestInverses(t *testing.T) {
	for n := 1; n < len(inverses); n++ {
		for _, q := range []uint64{0, 1, 2, 9, 1e4, 1e8, math.MaxUint32 / powers[n]} {
			for _, d := range []uint64{0, 1, powers[n] - 1} {
				u := q*powers[n] + d
				if u > math.MaxUint32 {
					continue
				}
				got, _ := bits.Mul64(u, inverses[n])
				require.Equal(t, u/powers[n], got, "%d / 10^%d", u, n)
			}
		}
	}
}

// The two halves of eight digits don't touch each other, so all four-digit
// numbers in either half are all there is.
func TestEightDigits(t *testing.T) {
	for n := range uint64(10000) {
		for _, u := range []uint64{n, n * 10000, n*10000 + 9999, 9999*10000 + n} {
			var b [8]byte
			binary.LittleEndian.PutUint64(b[:], digits8(u)|ascii8)
			require.Equal(t, fmt.Sprintf("%08d", u), string(b[:]))
			require.Equal(t, strconv.FormatUint(u, 10), string(AppendScaled(nil, int64(u), 0)))
		}
	}
}

func TestScaledDoesNotAllocate(t *testing.T) {
	buf := make([]byte, 0, 64)
	require.Zero(t, testing.AllocsPerRun(100, func() { buf = AppendScaled(buf[:0], -123456, 2) }))
}

// Numbers of a typical capture: 4 to 6 digits, in no order that a branch
// predictor learns.
func typical() []int64 {
	r := rand.New(rand.NewPCG(1, 2))
	out := make([]int64, 4096)
	for i := range out {
		out[i] = 1000 + r.Int64N(999000)>>r.IntN(8)
	}
	return out
}

// BenchmarkPrint prints the same numbers exactly and by the standard library's
// floating point (which also has to multiply, and gets the last digit wrong).
func BenchmarkPrint(b *testing.B) {
	numbers := typical()
	for _, decimals := range []int{0, 1, 2, 3} {
		b.Run(fmt.Sprintf("scaled/%d", decimals), func(b *testing.B) {
			buf := make([]byte, 0, 64)
			for i := 0; b.Loop(); i++ {
				buf = AppendScaled(buf[:0], numbers[i&4095], decimals)
			}
		})
		b.Run(fmt.Sprintf("float/%d", decimals), func(b *testing.B) {
			buf := make([]byte, 0, 64)
			scale := 1 / float64(powers[decimals])
			for i := 0; b.Loop(); i++ {
				buf = strconv.AppendFloat(buf[:0], float64(numbers[i&4095])*scale, 'f', -1, 64)
			}
		})
	}
}

func BenchmarkAppendScaled(b *testing.B) {
	buf := make([]byte, 0, 64)
	for i := 0; b.Loop(); i++ {
		buf = AppendScaled(buf[:0], int64(8013+i&0xFFFF), 2)
	}
}

// The same numbers through the standard library's floating point.
func BenchmarkAppendFloat(b *testing.B) {
	buf := make([]byte, 0, 64)
	for i := 0; b.Loop(); i++ {
		buf = strconv.AppendFloat(buf[:0], float64(8013+i&0xFFFF)*0.01, 'f', -1, 64)
	}
}
