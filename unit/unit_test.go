package unit

import (
	"math/big"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

func number(t require.TestingT, text string) *big.Rat {
	r, ok := new(big.Rat).SetString(text)
	require.True(t, ok, text)
	return r
}

// Conversions by the SI Brochure, 9th edition (2019): tables 2, 4 and 8, the
// prefixes of table 7, and the definition of degree Celsius; bar by the 8th
// edition (2006), table 8; byte by IEC 80000-13. All from memory. The rest is
// common practice.
func TestConversions(t *testing.T) {
	table := NewTable()
	for _, c := range []struct{ from, to, a, b string }{
		{"km/h", "m/s", "1000/3600", "0"},
		{"m/s", "km/h", "3.6", "0"},
		{"bar", "kPa", "100", "0"},
		{"mbar", "hPa", "1", "0"},
		{"kohm", "ohm", "1000", "0"},
		{"degC", "K", "1", "273.15"},
		{"K", "degC", "1", "-273.15"},
		{"g/s", "kg/h", "3.6", "0"},
		{"L/h", "mL/s", "1000/3600", "0"},
		{"kWh", "MJ", "3.6", "0"},
		{"Nm", "J", "1", "0"},
		{"rpm", "deg/s", "6", "0"},
		{"turn/s", "rpm", "60", "0"},
		{"%", "permille", "10", "0"},
		{"ppm", "%", "1/10000", "0"},
		{"Ah", "mA*s", "3600000", "0"},
		{"V*A", "W", "1", "0"},
		{"kbit/s", "bit/s", "1000", "0"},
		{"min", "ms", "60000", "0"},
		{"d", "h", "24", "0"},
		{"t", "kg", "1000", "0"},
		{"lx", "cd/m^2", "1", "0"},
		{"V/ohm", "A", "1", "0"},
		{"J/C", "V", "1", "0"},
		{"F", "C/V", "1", "0"},
		{"H", "V*s/A", "1", "0"},
		{"T", "V*s/m^2", "1", "0"},
		{"Wh", "J", "3600", "0"},
		{"W", "J/s", "1", "0"},
		{"N", "kg*m/s^2", "1", "0"},
		{"Pa", "N/m^2", "1", "0"},
		{"Hz", "1/s", "1", "0"},
		{"kHz", "1/ms", "1", "0"},
		{"L", "dm^3", "1", "0"},
		{"mL", "cm^3", "1", "0"},
		{"byte", "bit", "8", "0"},
		{"Mbit/s", "kbyte/s", "125", "0"},
		{"uF", "pF", "1000000", "0"},
		{"turn", "deg", "360", "0"},
		{"mrad", "rad", "1/1000", "0"},
	} {
		from, err := table.Lookup(c.from)
		require.NoError(t, err, c.from)
		to, err := table.Lookup(c.to)
		require.NoError(t, err, c.to)
		a, b, exact, err := Convert(from, to)
		require.NoError(t, err, "%s %s", c.from, c.to)
		require.True(t, exact)
		require.Equal(t, number(t, c.a).String(), a.String(), "%s %s", c.from, c.to)
		require.Equal(t, number(t, c.b).String(), b.String(), "%s %s", c.from, c.to)
	}
}

// 1 rpm = pi/30 rad/s; digits of pi from OEIS A000796 (from memory).
func TestRadiansNeedPi(t *testing.T) {
	table := NewTable()
	rpm, err := table.Lookup("rpm")
	require.NoError(t, err)
	rad, err := table.Lookup("rad/s")
	require.NoError(t, err)
	a, _, exact, err := Convert(rpm, rad)
	require.NoError(t, err)
	require.False(t, exact)
	require.Equal(t, "3.141592653589793238462643383279", new(big.Rat).Mul(a, big.NewRat(30, 1)).FloatString(40)[:32])
	back, _, _, err := Convert(rad, rpm)
	require.NoError(t, err)
	require.Equal(t, "1", new(big.Rat).Mul(a, back).RatString())
}

func TestDimensionsThatDiffer(t *testing.T) {
	table := NewTable()
	for _, pair := range [][2]string{{"rpm", "Hz"}, {"km", "h"}, {"V", "A"}, {"Nm", "N"}, {"bit/s", "Hz"}, {"deg", "%"}} {
		a, err := table.Lookup(pair[0])
		require.NoError(t, err)
		b, err := table.Lookup(pair[1])
		require.NoError(t, err)
		_, _, _, err = Convert(a, b)
		require.ErrorIs(t, err, ErrDimension, "%s %s", pair[0], pair[1])
	}
}

func TestLookupErrors(t *testing.T) {
	table := NewTable()
	for _, c := range []struct{ text, want string }{
		{"kmh", "there is no unit kmh"},
		{"KM", "there is no unit KM"},
		{"g/km/h", "two slashes"},
		{"m^1", "power"},
		{"m^10", "power"},
		{"m^+2", "power"},
		{"m^02", "power"},
		{"m^", "power"},
		{"1", "there is no unit 1"},
		{"1*m", "there is no unit 1"},
		{"m/1", "there is no unit 1"},
		{"mbit", "there is no unit mbit"},
		{"k%", "there is no unit"},
		{"kmin", "there is no unit"},
		{"mkm", "there is no unit"},
		{"1/degC", "point"},
		{"degC^2", "point"},
		{"K/degC", "point"},
		{"m^x", "power"},
		{"degC/s", "point"},
		{"degC*m", "point"},
		{"mdegC", "there is no unit"},
		{"", "a unit is missing"},
		{"/s", "a unit is missing"},
		{"m/", "a unit is missing"},
		{"^2", "a unit is missing"},
		{"m*", "a unit is missing"},
		{strings.Repeat("m", 100), "longer"},
	} {
		_, err := table.Lookup(c.text)
		require.ErrorContains(t, err, c.want, c.text)
	}
}

func TestNearestUnit(t *testing.T) {
	table := NewTable()
	for text, want := range map[string]string{
		"KM/h": "km", "KPA": "kPa", "RPM": "rpm", "Ohm": "ohm", "l/h": "L", "degc": "degC", "MOHM": "Mohm",
		"kmh": "km/h", "kph": "km/h", "sec": "s", "Celsius": "degC", "Percent": "%", "mbit": "Mbit", "zzz": "",
	} {
		_, err := table.Lookup(text)
		var unknown *UnknownUnit
		require.ErrorAs(t, err, &unknown, text)
		require.Equal(t, want, unknown.Nearest, text)
	}
	for slip, means := range slips {
		_, err := table.Lookup(slip)
		require.Error(t, err, "%s is a unit, so no slip", slip)
		_, err = table.Lookup(means)
		require.NoError(t, err, means)
	}
}

func TestLettersBeyondASCII(t *testing.T) {
	table := NewTable()
	for text, want := range map[string]string{
		"\u00b5s": "us", "\u03bcs": "us", "k\u03a9": "kohm", "k\u2126": "kohm", "°C": "degC", "°": "deg", "°/s": "deg/s", "V/\u00b5s": "V/us",
	} {
		u, err := table.Lookup(text)
		require.NoError(t, err, text)
		require.Equal(t, want, u.Symbol)
		same, err := table.Lookup(want)
		require.NoError(t, err)
		require.Equal(t, same, u)
	}
}

func TestDifference(t *testing.T) {
	table := NewTable()
	degC, err := table.Lookup("degC")
	require.NoError(t, err)
	require.True(t, degC.Point)
	kelvin, err := table.Lookup("K")
	require.NoError(t, err)
	require.Equal(t, "K", degC.Difference().Symbol)
	a, b, exact, err := Convert(degC.Difference(), kelvin)
	require.NoError(t, err)
	require.True(t, exact)
	require.Equal(t, "1", a.RatString())
	require.Zero(t, b.Sign())
	require.Equal(t, kelvin, kelvin.Difference())
}

// The prefixes of the SI Brochure, 9th edition (2019), table 7, as powers of
// ten (from memory); micro is written u.
func TestPrefixes(t *testing.T) {
	table := NewTable()
	want := map[string]int{"p": -12, "n": -9, "u": -6, "m": -3, "c": -2, "d": -1, "h": 2, "k": 3, "M": 6, "G": 9}
	require.Len(t, siPrefixes, len(want))
	base, err := table.Lookup("Pa")
	require.NoError(t, err)
	for p, power := range want {
		u, err := table.Lookup(p + "Pa")
		require.NoError(t, err, p)
		a, _, exact, err := Convert(u, base)
		require.NoError(t, err)
		require.True(t, exact)
		require.Equal(t, number(t, "1e"+strconv.Itoa(power)).String(), a.String(), p)
	}
}

// No symbol can be read in two ways: as a unit and as a prefixed one, or with
// two prefixes.
func TestSymbolsAreUnambiguous(t *testing.T) {
	seen := map[string]bool{"degC": true}
	add := func(symbol string) {
		require.False(t, seen[symbol], symbol)
		seen[symbol] = true
	}
	for _, b := range builtin {
		add(b.symbol)
		for _, p := range b.prefixes {
			add(string(p) + b.symbol)
		}
	}
	table := NewTable()
	for _, s := range table.Symbols() {
		u, err := table.Lookup(s)
		require.NoError(t, err, s)
		require.Equal(t, s, u.Symbol)
	}
	require.True(t, slices.IsSorted(table.Symbols()))
}

func TestDefinedUnits(t *testing.T) {
	table := NewTable()
	require.NoError(t, table.Define("tooth", nil, Unit{}))
	require.NoError(t, table.Define("pulse", nil, Unit{}))
	m, err := table.Lookup("m")
	require.NoError(t, err)
	require.NoError(t, table.Define("lap", big.NewRat(400, 1), m))
	tooth, err := table.Lookup("tooth/s")
	require.NoError(t, err)
	pulse, err := table.Lookup("pulse/s")
	require.NoError(t, err)
	_, _, _, err = Convert(tooth, pulse)
	require.ErrorIs(t, err, ErrDimension)
	lap, err := table.Lookup("lap/h")
	require.NoError(t, err)
	speed, err := table.Lookup("km/h")
	require.NoError(t, err)
	a, _, exact, err := Convert(lap, speed)
	require.NoError(t, err)
	require.True(t, exact)
	require.Equal(t, "2/5", a.RatString())

	for _, name := range []string{"", "_", "2nd", "a b", "x^2", "a*b", "a/b", "\u00b5x", "it's", "-"} {
		require.ErrorContains(t, table.Define(name, nil, Unit{}), "can't name a unit", name)
	}
	// Defined units take no prefixes.
	_, err = table.Lookup("ktooth")
	require.Error(t, err)
	require.NoError(t, table.Define("dozen", big.NewRat(12, 1), Unit{}))
	dozen, err := table.Lookup("dozen")
	require.NoError(t, err)
	require.True(t, SameDimension(dozen, Unit{}))
	require.Equal(t, "12", dozen.Factor.RatString())
	require.Error(t, table.Define("lap", nil, Unit{}))
	require.Error(t, table.Define("km", big.NewRat(1, 1), m))
	require.Error(t, table.Define("nothing", new(big.Rat), m))
	degC, err := table.Lookup("degC")
	require.NoError(t, err)
	require.ErrorIs(t, table.Define("hot", big.NewRat(1, 1), degC), ErrPoint)
}

func TestUnitArithmetic(t *testing.T) {
	table := NewTable()
	units := []string{"V", "mA", "ohm", "km/h", "rpm", "K", "%", "bar", "rad/s", "1/s", "m/s^2", "kg*m^2"}
	rapid.Check(t, func(t *rapid.T) {
		u, err := table.Lookup(rapid.SampledFrom(units).Draw(t, "u"))
		require.NoError(t, err)
		v, err := table.Lookup(rapid.SampledFrom(units).Draw(t, "v"))
		require.NoError(t, err)
		product, err := Mul(u, v)
		require.NoError(t, err)
		quotient, err := Div(u, v)
		require.NoError(t, err)
		// The symbol of a result means the result.
		for _, want := range []Unit{product, quotient} {
			got, err := table.Lookup(want.Symbol)
			require.NoError(t, err, want.Symbol)
			require.Equal(t, want.Dim, got.Dim, want.Symbol)
			require.Equal(t, want.PiPower, got.PiPower, want.Symbol)
			require.Zero(t, want.Factor.Cmp(got.Factor), want.Symbol)
		}
		back, err := Div(product, v)
		require.NoError(t, err)
		require.True(t, SameDimension(u, back))
		a, b, exact, err := Convert(u, back)
		require.NoError(t, err)
		require.True(t, exact)
		require.Equal(t, "1", a.RatString())
		require.Zero(t, b.Sign())
	})
	degC, err := table.Lookup("degC")
	require.NoError(t, err)
	_, err = Mul(degC, degC)
	require.ErrorIs(t, err, ErrPoint)
	require.True(t, Unit{}.IsPlain())
	mps, err := table.Lookup("m/s")
	require.NoError(t, err)
	_, err = Div(mps, degC)
	require.ErrorIs(t, err, ErrPoint)
	_, err = Div(degC, mps)
	require.ErrorIs(t, err, ErrPoint)

	// What is below the slash stays below it: 1 % of 1 m/s isn't m/(s*%).
	percent, err := table.Lookup("%")
	require.NoError(t, err)
	for _, c := range []struct {
		op   func(u, v Unit) (Unit, error)
		u, v Unit
		want string
	}{
		{Mul, mps, percent, "m*%/s"}, {Div, mps, mps, "m*s/s*m"}, {Div, Unit{}, mps, "s/m"}, {Mul, Unit{}, mps, "m/s"},
		{Mul, mps, Unit{}, "m/s"}, {Div, mps, Unit{}, "m/s"}, {Div, Unit{}, percent, "1/%"}, {Div, Unit{}, Unit{}, ""},
	} {
		got, err := c.op(c.u, c.v)
		require.NoError(t, err)
		require.Equal(t, c.want, got.Symbol)
	}
}

// FuzzLookup: any text gives a unit or an error, and a unit's own symbol gives
// it again.
func FuzzLookup(f *testing.F) {
	for _, s := range []string{"km/h", "kg*m^2/s^2", "°C", "µs", "m^9*m^9*m^9/s", "1/s", "//", "*"} {
		f.Add(s)
	}
	table := NewTable()
	f.Fuzz(func(t *testing.T, text string) {
		u, err := table.Lookup(text)
		if err != nil {
			return
		}
		again, err := table.Lookup(u.Symbol)
		require.NoError(t, err)
		require.Equal(t, u, again)
		require.LessOrEqual(t, len(text), maxSymbol)
		require.Positive(t, u.factor().Sign())
	})
}
