package unit

import (
	"math/big"
	"regexp"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
)

func TestParseNumber(t *testing.T) {
	for text, want := range map[string]string{
		"0": "0", "12": "12", "007": "7", "0x1F": "31", "0xff_ff": "65535", "0b101": "5", "1_000_000": "1000000",
		"0.25": "1/4", "0.1_5": "3/20", "1e3": "1000", "1e-3": "1/1000", "2.5E+1": "25", "1e0_3": "1000", "0e400": "0",
		"100/255": "20/51", "0x10/0b10": "8", "0xe": "14", "0b1/0xb": "1/11", "1e400": "1" + strings.Repeat("0", 400),
		"1e00000000000000000000000002": "100",
	} {
		r, err := ParseNumber(text)
		require.NoError(t, err, text)
		require.Equal(t, want, r.RatString(), text)
	}
}

func TestParseNumberErrors(t *testing.T) {
	for text, want := range map[string]string{
		"": "is no number", "-1": "is no number", "+1": "is no number", "1.": "is no number", ".5": "is no number",
		"1e": "is no number", "1e+": "is no number", "1e+-1": "is no number", "1e1.5": "is no number", "1.2.3": "is no number",
		"0x": "is no number", "0xG": "is no number", "0x-1": "is no number", "0x1.8": "is no number", "0b2": "is no number", "0X1": "is no number",
		"x": "is no number", "Inf": "is no number", "NaN": "is no number", "1/": "is no number", "/1": "is no number",
		"1//2": "is no number", "1/2/3": "is no number", "1 ": "is no number", "\u0661": "is no number",
		"_1": "underscore", "1_": "underscore", "1__0": "underscore", "0x_1": "underscore", "0b_1": "underscore",
		"1_e5": "underscore", "1e_5": "underscore", "1_.5": "underscore", "1._5": "underscore",
		"1/0": "divides by zero", "1/0.0": "divides by zero",
		"1e401": "at most 400", "1e-401": "at most 400", "1e999999999": "at most 400", "1e-99999999999999999999999": "at most 400",
		"1/1e999999999": "at most 400", strings.Repeat("9", 401): "at most 400",
	} {
		_, err := ParseNumber(text)
		require.ErrorContains(t, err, want, text)
	}
}

const (
	decimalRun = `[0-9]+(?:_[0-9]+)*`
	simpleForm = `(?:0x([0-9A-Fa-f]+(?:_[0-9A-Fa-f]+)*)|0b([01]+(?:_[01]+)*)|(` + decimalRun + `)(?:\.(` + decimalRun + `))?(?:[eE]([+-]?)(` + decimalRun + `))?)`
)

var numberForm = regexp.MustCompile(`^` + simpleForm + `(?:/` + simpleForm + `)?$`)

// oracle reads the groups of simpleForm: value, and whether it is within the
// limits.
func oracle(t *testing.T, g []string) (*big.Rat, bool) {
	whole := func(digits string, base int) *big.Int {
		n, ok := new(big.Int).SetString(strings.ReplaceAll(digits, "_", ""), base)
		require.True(t, ok, digits)
		return n
	}
	switch {
	case g[0] != "":
		return new(big.Rat).SetInt(whole(g[0], 16)), true
	case g[1] != "":
		return new(big.Rat).SetInt(whole(g[1], 2)), true
	}
	r := new(big.Rat).SetInt(whole(g[2], 10))
	tenth, ten := big.NewRat(1, 10), big.NewRat(10, 1)
	place := big.NewRat(1, 10)
	for _, c := range strings.ReplaceAll(g[3], "_", "") {
		r.Add(r, new(big.Rat).Mul(place, big.NewRat(int64(c-'0'), 1)))
		place = new(big.Rat).Mul(place, tenth)
	}
	if g[5] == "" {
		return r, true
	}
	exponent := whole(g[5], 10)
	if exponent.Cmp(big.NewInt(400)) > 0 {
		return nil, false
	}
	for range exponent.Int64() {
		if g[4] == "-" {
			r.Mul(r, tenth)
		} else {
			r.Mul(r, ten)
		}
	}
	return r, true
}

// FuzzParseNumber holds the parser, both ways, against a regular expression of
// the form, and the value against place-by-place arithmetic.
func FuzzParseNumber(f *testing.F) {
	for _, s := range []string{"0", "0x1F", "1_000", "0.25", "1e-3", "100/255", "1e999999999", "0b", "1__0", "1e_5", "0xe_1/0b1", "1e0400"} {
		f.Add(s)
	}
	f.Fuzz(func(t *testing.T, text string) {
		if len(text) > 450 {
			text = text[:450]
		}
		got, err := ParseNumber(text)
		g := numberForm.FindStringSubmatch(text)
		if g == nil || len(text) > 400 {
			require.Error(t, err)
			return
		}
		want, ok := oracle(t, g[1:7])
		if strings.Contains(text, "/") && ok {
			var below *big.Rat
			if below, ok = oracle(t, g[7:]); ok {
				if ok = below.Sign() != 0; ok {
					want.Quo(want, below)
				}
			}
		}
		if !ok {
			require.Error(t, err)
			return
		}
		require.NoError(t, err)
		require.Equal(t, want.RatString(), got.RatString(), strconv.Quote(text))
	})
}
