package unit

import (
	"math/big"
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
// prefixes of table 7, and the definition of degree Celsius.
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
		{"m^x", "power"},
		{"degC/s", "point"},
		{"degC*m", "point"},
		{"mdegC", "there is no unit"},
		{"", "there is no unit"},
		{"m*", "there is no unit"},
		{strings.Repeat("m", 100), "longer"},
	} {
		_, err := table.Lookup(c.text)
		require.ErrorContains(t, err, c.want, c.text)
	}
	var unknown *UnknownUnit
	_, err := table.Lookup("KM/h")
	require.ErrorAs(t, err, &unknown)
	require.Equal(t, "km", unknown.Nearest)
	u, err := table.Lookup("µs")
	require.NoError(t, err)
	require.Equal(t, "us", u.Symbol)
	u, err = table.Lookup("°C")
	require.NoError(t, err)
	require.Equal(t, "degC", u.Symbol)
	require.Equal(t, "K", u.Difference().Symbol)
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

	require.Error(t, table.Define("lap", nil, Unit{}))
	require.Error(t, table.Define("km", big.NewRat(1, 1), m))
	require.Error(t, table.Define("nothing", new(big.Rat), m))
	degC, err := table.Lookup("degC")
	require.NoError(t, err)
	require.ErrorIs(t, table.Define("hot", big.NewRat(1, 1), degC), ErrPoint)
}

func TestUnitArithmetic(t *testing.T) {
	table := NewTable()
	units := []string{"V", "mA", "ohm", "km/h", "rpm", "K", "%", "bar", "rad/s"}
	rapid.Check(t, func(t *rapid.T) {
		u, err := table.Lookup(rapid.SampledFrom(units).Draw(t, "u"))
		require.NoError(t, err)
		v, err := table.Lookup(rapid.SampledFrom(units).Draw(t, "v"))
		require.NoError(t, err)
		product, err := Mul(u, v)
		require.NoError(t, err)
		back, err := Div(product, v)
		require.NoError(t, err)
		require.Equal(t, u.Dim, back.Dim)
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
	})
}
