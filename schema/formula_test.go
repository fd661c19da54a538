package schema

import (
	"fmt"
	"math/big"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// compileMember compiles one member in a message of its own.
func compileMember(t *testing.T, clauses string) (*Signal, *diag.List) {
	text := fmt.Sprintf(`busloom 1
bus chassis 500 kbit/s fd 2 Mbit/s
ecu Brake on chassis
ecu Cluster on chassis
unit tooth
unit revolution = 48 tooth
const tyre = 1.935 m
const half = 1/2
const volts = 5 V
curve Ntc from ohm to degC outside hold { 45313: -40  2500: 20  72: 140 }
curve Heat from degC to V outside extend { -40: 5  140: 0 }
message Test 0x100 on chassis, fd 8 bytes {
  from Brake to Cluster
  value %s
}
`, clauses)
	network, list := Compile(MapFiles{"test.bus": text}, "test.bus")
	if network == nil {
		return nil, list
	}
	return network.Messages[0].Signals[0], list
}

// Factors and offsets computed by hand from the units' definitions: 1 h =
// 3600 s, 1 bar = 100 kPa, 0 degC = 273.15 K, 1 turn = 360 deg.
func TestFormulas(t *testing.T) {
	for _, c := range []struct {
		formula    string
		a, b, unit string
	}{
		// factor and offset
		{"", "1", "0", ""},
		{"= raw", "1", "0", ""},
		{"= raw * 0.01 km/h", "1/100", "0", "km/h"},
		{"= 0.01 km/h * raw", "1/100", "0", "km/h"},
		{"= raw * 100/255 %", "20/51", "0", "%"},
		{"= -64 deg + raw * 1/2 deg", "1/2", "-64", "deg"},
		{"= raw * 1/2 deg - 64 deg", "1/2", "-64", "deg"},
		{"= -(raw * 1/2 deg) - 64 deg", "-1/2", "-64", "deg"},
		{"= 100 % - raw * 0.4 %", "-2/5", "100", "%"},
		{"= (raw - 128) * 0.5 A", "1/2", "-64", "A"},
		{"= (raw + 3) / 4", "1/4", "3/4", ""},
		{"= (raw + 3) / 4 - raw / 8", "1/8", "3/4", ""},
		{"= raw * 5 V / 1023", "5/1023", "0", "V"},
		{"= 0.5 + raw * 1/256", "1/256", "1/2", ""},
		{"= raw * 1e-3 kPa", "1/1000", "0", "kPa"},
		{"= raw * 0x10 mm", "16", "0", "mm"},
		// another unit
		{"= raw / 256 in %", "25/64", "0", "%"},
		{"= raw * 1 m/s in km/h", "18/5", "0", "km/h"},
		{"= raw * 0.01 km/h in m/s", "1/360", "0", "m/s"},
		{"= raw * 1 kPa + 1 bar in kPa", "1", "100", "kPa"},
		{"= raw * 1 kPa + 1 bar in bar", "1/100", "1", "bar"},
		{"= raw * 2 V * 3 A in W", "6", "0", "W"},
		{"= raw * 10 mV / 5 ohm in mA", "2", "0", "mA"},
		{"= raw * 6 m / 2 s in km/h", "54/5", "0", "km/h"},
		{"= raw * 1 rpm in deg/s", "6", "0", "deg/s"},
		{"= raw * 1 tooth in revolution", "1/48", "0", "revolution"},
		// temperatures
		{"= -40 degC + raw * 1 K", "1", "-40", "degC"},
		{"= raw * 1 K + -40 degC", "1", "-40", "degC"},
		{"= raw * 0.1 K - 40 K", "1/10", "-40", "K"},
		{"= -40 degC + raw * 0.5 K in K", "1/2", "23315/100", "K"},
		{"= raw * 0.5 K in degC", "1/2", "-27315/100", "degC"},
		{"= (25 degC + raw * 1 K) - 20 degC in K", "1", "5", "K"},
		{"= 25 degC - raw * 1 K - 5 K", "-1", "20", "degC"},
		// constants
		{"= raw * half", "1/2", "0", ""},
		{"= raw * tyre in m", "387/200", "0", "m"},
		{"= raw * tyre in mm", "1935", "0", "mm"},
		{"= 2 m + raw * tyre", "387/200", "2", "m"},
		{"= raw * volts / 1000 in mV", "5", "0", "mV"},
		// curves
		{"= Ntc(raw * 20 ohm)", "20", "0", "degC"},
		{"= Ntc(10 ohm + raw * 0.02 kohm)", "20", "10", "degC"},
		{"= Heat(-40 degC + raw * 1 K)", "1", "-40", "V"},
		{"= Heat(raw * 1 K)", "1", "-27315/100", "V"},
	} {
		t.Run(c.formula, func(t *testing.T) {
			s, list := compileMember(t, "at 0.7..0.0 "+c.formula+"\n  unused 1.7..7.0")
			require.NotNil(t, s, render(t, list))
			a, ok := new(big.Rat).SetString(c.a)
			require.True(t, ok)
			b, ok := new(big.Rat).SetString(c.b)
			require.True(t, ok)
			require.Equal(t, a.RatString(), s.Affine.A.RatString(), "factor")
			require.Equal(t, b.RatString(), s.Affine.B.RatString(), "offset")
			require.Equal(t, c.unit, s.Unit.Symbol)
		})
	}
}

// Formulas whose mistake is one of dimension, of points or of a missing unit.
func TestFormulaMistakes(t *testing.T) {
	for _, c := range []struct {
		formula string
		code    diag.Code
	}{
		{"= raw * 1 K - 40 degC", diag.PointArithmetic},
		{"= raw * 1 degC - 40 degC", diag.PointArithmetic},
		{"= -(5 degC + raw * 1 K)", diag.PointArithmetic},
		{"= (5 degC + raw * 1 K) / 2", diag.PointArithmetic},
		{"= (25 degC + raw * 1 K) - 20 degC in degC", diag.PointArithmetic},
		{"= (25 degC + raw * 1 K) - 20 degC", diag.NoUnit},
		{"= raw * 0.01 km/h in km", diag.DimensionMistake},
		{"= raw * 1 rpm in Hz", diag.DimensionMistake},
		{"= raw in km/h", diag.DimensionMistake},
		{"= raw * 1 tooth in m", diag.DimensionMistake},
		{"= 1 + raw * 1 %", diag.DimensionMistake},
		{"= raw * tyre", diag.NoUnit},
		{"= raw / 1 s", diag.NoUnit},
		{"= raw * 1 V / 2 V", diag.NoUnit},
		{"= raw / (1 - 1)", diag.DivisionByZero},
		{"= raw / (half - half)", diag.DivisionByZero},
		{"= raw - raw", diag.ConstantFormula},
		{"= raw / raw", diag.NotAffine},
		{"= (raw + 1) * (raw - 1)", diag.NotAffine},
		{"= Ntc(Ntc(raw * 1 ohm))", diag.NotAffine},
		{"= -Ntc(raw * 1 ohm)", diag.NotAffine},
		{"= Ntc(raw * 1 ohm) in K", diag.NotAffine},
		{"= Ntc(5 ohm)", diag.ConstantFormula},
		{"= raw * 1 rad in deg", diag.TooPrecise},
		{"= raw * 1e300 m", diag.TooPrecise},
	} {
		t.Run(c.formula, func(t *testing.T) {
			_, list := compileMember(t, "at 0.7..0.0 "+c.formula+"\n  unused 1.7..7.0")
			require.Equal(t, 1, list.Count(diag.Error), render(t, list))
			for _, d := range list.Sorted() {
				if d.Severity == diag.Error {
					require.Equal(t, c.code, d.Code, render(t, list))
				}
			}
		})
	}
}

// Raw bit patterns of initial values, worked out by hand; floats by IEEE
// 754-2019 (1.5 is 0x3E00, 0x3FC00000, 0x3FF8000000000000).
func TestInitialValues(t *testing.T) {
	for _, c := range []struct {
		clauses string
		raw     uint64
	}{
		{"at 0.7..0.0 = raw * 0.5 m  initial 10 m", 20},
		{"at 0.7..0.0 = -40 degC + raw * 1 K  initial 20 degC", 60},
		{"at 0.7..0.0 = -40 degC + raw * 1 K  initial 273.15 K", 40},
		{"at 0.7..0.0 signed  initial -1", 0xFF},
		{"at 0.7..0.4 signed = raw * 1 A  initial -8 A", 0x8},
		{"at 0.7..0.0 sign magnitude  initial -1", 0x81},
		{"at 0.7..1.0 packed decimal  initial 1234", 0x1234},
		{"at 0.7..1.0 float  initial 1.5", 0x3E00},
		{"at 0.7..3.0 float  initial -1.5", 0xBFC00000},
		{"at 0.7..7.0 float  initial 1.5", 0x3FF8000000000000},
		{"at 0.0 flag  initial on", 1},
		{"at 0.7..0.0 states { 3: off  4: lit }  initial lit", 4},
		{"at 0.7..0.0 states { 3: off  4: lit }  initial 3", 3},
		{"at 0.7..0.0 codes { ones: absent  ones - 1: fault cut }  initial absent", 0xFF},
		{"at 0.7..0.0 codes { ones: absent  ones - 1: fault cut }  initial cut", 0xFE},
		{"at 0.3..0.0 counter 1..15 step 2  initial 3", 3},
		{"at 0.7..1.0 = Ntc(raw * 20 ohm)  initial 20 degC", 125}, // 2500 ohm
		{"at 0.7..0.0 = Heat(-40 degC + raw * 1 K)  initial 2.5 V", 90},
		{"at 0.7..7.0  initial 0xFFFFFFFFFFFFFFFF", ^uint64(0)},
	} {
		t.Run(c.clauses, func(t *testing.T) {
			s, list := compileMember(t, c.clauses)
			require.NotNil(t, s, render(t, list))
			require.NotNil(t, s.Initial)
			require.Equal(t, c.raw, *s.Initial)
		})
	}
}

// Which codes cut into which ranges, by kind.
func TestRangesAndCodes(t *testing.T) {
	for _, c := range []struct {
		clauses string
		code    diag.Code // "" is clean
	}{
		{"at 0.7..0.0  within 0..254  codes { ones: absent }", ""},
		{"at 0.7..0.0  within 0..255  codes { ones: absent }", diag.RangeCutByCodes},
		{"at 0.7..0.0  within 0..10  codes { 11..255: reserved }", ""},
		{"at 0.7..0.0  within 0..10.5  codes { 11..255: reserved }", ""}, // 11 is beyond 10.5
		{"at 0.7..0.0  within 12..20  codes { 11..255: reserved }", diag.RangeCutByCodes},
		{"at 0.7..0.0  within 11.2..11.8  codes { 11..12: reserved }", ""}, // no whole number between
		{"at 0.7..0.0 signed  within -127..127  codes { 0x80: absent }", ""},
		{"at 0.7..0.0 signed  within -128..127  codes { 0x80: absent }", diag.RangeCutByCodes},
		{"at 0.7..0.0 signed  within 0..127  codes { 0x80..0xFF: reserved }", ""},
		{"at 0.7..0.0 signed  within -5..5  codes { 0x70..0xF0: reserved }", ""},
		{"at 0.7..0.0 signed  within -5..5  codes { 0x70..0xFC: reserved }", diag.RangeCutByCodes},
		{"at 0.7..0.0 sign magnitude  within -127..127  codes { 0x80: absent }", ""}, // minus zero
		{"at 0.7..0.0 sign magnitude  within -127..127  codes { 0x81: absent }", diag.RangeCutByCodes},
		{"at 0.7..0.0 packed decimal  within 0..99  codes { 0xA0..0xFF: absent  0x9A..0x9F: fault }", ""},
		{"at 0.7..0.0 packed decimal  within 0..99  codes { 0x9A..0xFF: absent }", ""},
		{"at 0.7..0.0 packed decimal  within 0..99  codes { 0x99..0xFF: absent }", diag.RangeCutByCodes},
		{"at 0.7..0.0 packed decimal  within 0..10  codes { 0x0A..0x0F: absent }", ""},
		{"at 0.7..0.0 packed decimal  within 0..10  codes { 0x0A..0x10: absent }", diag.RangeCutByCodes},
		{"at 0.7..1.0 float  within -10..10  codes { 0x7C00..0xFBFF: absent }", diag.RangeCutByCodes}, // -0 is in it
		{"at 0.7..1.0 float  within -10..10  codes { 0x7C00..0x7FFF: absent }", ""},                   // infinity and NaN
		{"at 0.7..0.0 = 100 % - raw * 1 %  within -154..100 %  codes { ones: absent }", ""},
		{"at 0.7..0.0 = 100 % - raw * 1 %  within -155..100 %  codes { ones: absent }", diag.RangeCutByCodes},
		{"at 0.7..0.0 packed decimal  within 0..100", diag.RangeUnreachable},
		{"at 0.7..1.0 float  within 0..65504", ""},
		{"at 0.7..1.0 float  within 0..65505", diag.RangeUnreachable},
		{"at 0.7..1.0 = Ntc(raw * 20 ohm)  within -40..140 degC", ""},
		{"at 0.7..1.0 = Ntc(raw * 20 ohm)  within -41..140 degC", diag.RangeUnreachable},
		{"at 0.7..0.0 = Heat(-40 degC + raw * 1 K)  within -2..5 V", ""}, // extended to 215 degC: -75/36 V
		{"at 0.7..0.0 = Heat(-40 degC + raw * 1 K)  within -3..5 V", diag.RangeUnreachable},
		{"at 0.7..0.0 = raw * 0.5 m  tolerance 0.5 m", ""},
		{"at 0.7..0.0 = raw * 0.5 m  tolerance 499 mm", diag.CoarseResolution},
		{"at 0.7..0.0 = -40 degC + raw * 0.5 K  tolerance 0.5 K", ""},
		{"at 0.7..0.0 = -40 degC + raw * 0.5 K  tolerance 0.5 degC", diag.PointArithmetic},
		{"at 0.7..1.0 float  within 0..1000  tolerance 0.5", ""}, // neighbours below 1024 are 1/2 apart
		{"at 0.7..1.0 float  within 0..1000  tolerance 0.4", diag.CoarseResolution},
		{"at 0.7..0.0 = Heat(-40 degC + raw * 1 K)  tolerance 28 mV", ""}, // 5 V over 180 K: 27.8 mV
		{"at 0.7..0.0 = Heat(-40 degC + raw * 1 K)  tolerance 27 mV", diag.CoarseResolution},
	} {
		t.Run(c.clauses, func(t *testing.T) {
			_, list := compileMember(t, c.clauses)
			var found []diag.Code
			for _, d := range list.Sorted() {
				if d.Severity == diag.Error {
					found = append(found, d.Code)
				}
			}
			if c.code == "" {
				require.Empty(t, found, render(t, list))
				return
			}
			require.Equal(t, []diag.Code{c.code}, found, render(t, list))
		})
	}
}
