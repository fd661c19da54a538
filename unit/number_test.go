package unit

import (
	"math/big"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func TestParseNumber(t *testing.T) {
	for text, want := range map[string]string{
		"0": "0", "12": "12", "007": "7", "0x1F": "31", "0xff_ff": "65535", "0b101": "5", "1_000_000": "1000000",
		"0.25": "1/4", "1e3": "1000", "1e-3": "1/1000", "2.5E+1": "25", "100/255": "20/51", "0x10/0b10": "8", "1e400": "1" + strings.Repeat("0", 400),
	} {
		r, err := ParseNumber(text)
		require.NoError(t, err, text)
		require.Equal(t, want, r.RatString(), text)
	}
	for _, text := range []string{"", "-1", "+1", "1.", ".5", "1e", "1e+", "1e401", "0x", "0xG", "0b2", "0x-1", "_1", "1_", "1__0", "1/0", "1/", "1//2", "1/2/3", "x", "1.2.3", "1e1.5", "Inf", "NaN", strings.Repeat("9", 500)} {
		_, err := ParseNumber(text)
		require.Error(t, err, text)
	}
}

var (
	simpleForm = `(?:0x[0-9A-Fa-f]+(?:_[0-9A-Fa-f]+)*|0b[01]+(?:_[01]+)*|[0-9]+(?:_[0-9]+)*(?:\.[0-9]+(?:_[0-9]+)*)?(?:[eE][+-]?[0-9]+)?)`
	numberForm = regexp.MustCompile(`^` + simpleForm + `(?:/` + simpleForm + `)?$`)
)

// FuzzParseNumber holds the parser against a regular expression of the form
// and the standard library's own reading of the value.
func FuzzParseNumber(f *testing.F) {
	for _, s := range []string{"0", "0x1F", "1_000", "0.25", "1e-3", "100/255", "1e999999999", "0b", "1__0"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		got, err := ParseNumber(text)
		if err != nil {
			if numberForm.MatchString(text) && len(text) < 300 && !strings.ContainsAny(text, "eE/") {
				t.Fatalf("%q is a number, but: %v", text, err)
			}
			return
		}
		require.Regexp(t, numberForm, text)
		if strings.Contains(text, "/") {
			return
		}
		clean := strings.ReplaceAll(text, "_", "")
		if based := strings.HasPrefix(clean, "0x") || strings.HasPrefix(clean, "0b"); !based {
			clean = strings.TrimLeft(clean, "0")
			if clean == "" || clean[0] < '0' || clean[0] > '9' {
				clean = "0" + clean
			}
		}
		want, ok := new(big.Rat).SetString(clean)
		require.True(t, ok, clean)
		require.Equal(t, want.RatString(), got.RatString())
	})
}

func TestAppendScaled(t *testing.T) {
	for _, c := range []struct {
		coef     int64
		decimals int
		want     string
	}{
		{8013, 2, "80.13"}, {8000, 2, "80"}, {-8013, 2, "-80.13"}, {0, 5, "0"}, {5, 3, "0.005"}, {-5, 3, "-0.005"}, {50, 3, "0.05"},
		{1, 18, "0.000000000000000001"}, {9223372036854775807, 0, "9223372036854775807"}, {-9223372036854775808, 18, "-9.223372036854775808"},
		{10, 1, "1"}, {101, 1, "10.1"}, {99, 0, "99"}, {100, 0, "100"},
	} {
		require.Equal(t, c.want, string(AppendScaled(nil, c.coef, c.decimals)))
		require.Equal(t, c.want, string(AppendScaledBig(nil, big.NewInt(c.coef), c.decimals)))
	}
}

// What is written reads back as the same number, and no shorter text would.
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
		coef, decimals := rapid.Int64().Draw(t, "coef"), rapid.IntRange(0, MaxDecimals).Draw(t, "decimals")
		checkDecimal(t, string(AppendScaled([]byte{}, coef, decimals)), big.NewInt(coef), decimals)
		big1 := new(big.Int).Mul(big.NewInt(coef), big.NewInt(rapid.Int64().Draw(t, "more")))
		wide := rapid.IntRange(0, 60).Draw(t, "wide")
		checkDecimal(t, string(AppendScaledBig([]byte{}, big1, wide)), big1, wide)
	})
}

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

func TestDigitsOfAResolution(t *testing.T) {
	for resolution, want := range map[string]int{"1": 1, "10": 0, "100": 0, "1/3": 2, "20/51": 2, "1/100": 3, "0.0999": 3, "1/1000000": 7} {
		require.Equal(t, want, RoundDigits(number(t, resolution)), resolution)
	}
	for value, want := range map[string]int{"1": 0, "1/2": 1, "1/256": 8, "1/100": 2, "7/40": 3} {
		n, ok := FiniteDecimals(number(t, value))
		require.True(t, ok)
		require.Equal(t, want, n, value)
	}
	_, ok := FiniteDecimals(number(t, "1/3"))
	require.False(t, ok)
	require.Equal(t, "1/3", FormatExact(number(t, "1/3")))
	require.Equal(t, "0.0625", FormatExact(number(t, "1/16")))
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
