package decode

import (
	"fmt"
	"math"
	"math/big"
	"strings"
	"testing"

	"busloom/bits"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// The oracle decodes one signal bit by bit, straight from the definitions of
// the language, on math/big. It shares no code with the plan: it has its own
// reading of places, kinds, codes, curves and rounding.

// oracleRaw reads the bits of a place, heaviest first; ok is false if the
// payload lacks one.
func oracleRaw(p bits.Place, payload []byte) (*big.Int, bool) {
	v := new(big.Int)
	for _, r := range p.Runs {
		b, bit := r.Heavy.Byte, r.Heavy.Bit
		for {
			if b >= len(payload) {
				return nil, false
			}
			v.Lsh(v, 1)
			if payload[b]&(1<<bit) != 0 {
				v.SetBit(v, 0, 1)
			}
			if b == r.Light.Byte && bit == r.Light.Bit {
				break
			}
			if bit > 0 {
				bit--
				continue
			}
			bit = 7
			if r.Light.Byte > r.Heavy.Byte {
				b++
			} else {
				b--
			}
		}
	}
	return v, true
}

// oracleText is what the plan's AppendText must give.
func oracleText(s *schema.Signal, payload []byte) string {
	raw, ok := oracleRaw(s.Place, payload)
	if !ok {
		return "missing"
	}
	in := func(r schema.RawRange) bool {
		return raw.Cmp(new(big.Int).SetUint64(r.Low)) >= 0 && raw.Cmp(new(big.Int).SetUint64(r.High)) <= 0
	}
	for _, c := range s.Codes {
		if in(c.Raw) {
			return strings.TrimSpace(map[schema.CodeClass]string{schema.Absent: "absent", schema.Fault: "fault", schema.Reserved: "reserved"}[c.Class] + " " + c.Name)
		}
	}
	switch s.Kind {
	case schema.Flag:
		return []string{"off", "on"}[raw.Int64()]
	case schema.States:
		for _, st := range s.States {
			if in(st.Raw) {
				return st.Name
			}
		}
		return fmt.Sprintf("unknown 0x%x", raw)
	case schema.Float:
		return oracleFloat(s, raw.Uint64())
	}
	x := new(big.Int).Set(raw)
	half := new(big.Int).Lsh(big.NewInt(1), uint(s.Width-1))
	switch s.Kind {
	case schema.Signed:
		if x.Cmp(half) >= 0 {
			x.Sub(x, new(big.Int).Lsh(half, 1))
		}
	case schema.SignMagnitude:
		if x.Cmp(half) >= 0 {
			x.Sub(x, half).Neg(x)
		}
	case schema.PackedDecimal:
		text := fmt.Sprintf("%x", raw)
		if strings.ContainsAny(text, "abcdef") {
			return fmt.Sprintf("unknown 0x%x", raw)
		}
		x.SetString(text, 10)
	}
	value := new(big.Rat).SetInt(x)
	if s.Affine == nil {
		return value.RatString()
	}
	value.Mul(value, s.Affine.A).Add(value, s.Affine.B)
	if s.Curve != nil {
		return oracleCurve(s, value)
	}
	if digits := oracleDecimals(s.Affine.A, s.Affine.B); digits >= 0 {
		return trim(value.FloatString(digits))
	}
	return trim(roundHalfEven(value, oracleDigits(new(big.Rat).Abs(s.Affine.A))))
}

// oracleDecimals finds by trial how many decimals write both exactly; -1 if
// 200 don't.
func oracleDecimals(a, b *big.Rat) int {
	for d := range 200 {
		ten := new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(d)), nil))
		if new(big.Rat).Mul(a, ten).IsInt() && new(big.Rat).Mul(b, ten).IsInt() {
			return d
		}
	}
	return -1
}

// oracleDigits is the documented rule: the least digits whose last one counts
// at most a tenth of the resolution.
func oracleDigits(resolution *big.Rat) int {
	for d := 0; ; d++ {
		unit := new(big.Rat).SetFrac(big.NewInt(10), new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(d)), nil))
		if unit.Cmp(resolution) <= 0 {
			return d
		}
	}
}

// roundHalfEven writes r with d decimals.
func roundHalfEven(r *big.Rat, d int) string {
	scaled := new(big.Rat).Mul(r, new(big.Rat).SetInt(new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(d)), nil)))
	twice := new(big.Rat).Add(scaled, scaled)
	floor := new(big.Int).Div(scaled.Num(), scaled.Denom()) // Euclidean: the denominator is above zero
	rest := new(big.Rat).Sub(twice, new(big.Rat).SetInt(new(big.Int).Lsh(floor, 1)))
	switch rest.Cmp(big.NewRat(1, 1)) {
	case 1:
		floor.Add(floor, big.NewInt(1))
	case 0:
		if new(big.Int).And(floor, big.NewInt(1)).Sign() != 0 {
			floor.Add(floor, big.NewInt(1))
		}
	}
	return new(big.Rat).SetFrac(floor, new(big.Int).Exp(big.NewInt(10), big.NewInt(int64(d)), nil)).FloatString(d)
}

// trim strips what FloatString pads.
func trim(text string) string {
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	if text == "-0" {
		return "0"
	}
	return text
}

func oracleCurve(s *schema.Signal, x *big.Rat) string {
	points := s.Curve.Points
	slope := func(i int) *big.Rat {
		return new(big.Rat).Quo(new(big.Rat).Sub(points[i+1].Y, points[i].Y), new(big.Rat).Sub(points[i+1].X, points[i].X))
	}
	on := func(i int) *big.Rat {
		y := new(big.Rat).Mul(slope(i), new(big.Rat).Sub(x, points[i].X))
		return y.Add(y, points[i].Y)
	}
	// The resolution is the least step from one raw value to the next on any
	// piece (also beyond the ends, where the curve goes on).
	var least *big.Rat
	for i := 0; i+1 < len(points); i++ {
		step := new(big.Rat).Mul(slope(i), s.Affine.A)
		step.Abs(step)
		if least == nil || step.Cmp(least) < 0 {
			least = step
		}
	}
	digits := oracleDigits(least)
	last := len(points) - 1
	below, above := x.Cmp(points[0].X) < 0, x.Cmp(points[last].X) > 0
	if below || above {
		switch s.Curve.Outside {
		case schema.None:
			return "beyond the curve"
		case schema.Hold:
			if below {
				return trim(roundHalfEven(points[0].Y, digits))
			}
			return trim(roundHalfEven(points[last].Y, digits))
		}
		if below {
			return trim(roundHalfEven(on(0), digits))
		}
		return trim(roundHalfEven(on(last-1), digits))
	}
	for i := 0; i < last; i++ {
		if x.Cmp(points[i+1].X) <= 0 {
			return trim(roundHalfEven(on(i), digits))
		}
	}
	return "?"
}

// oracleFloat reads IEEE 754 bits by their definition.
func oracleFloat(s *schema.Signal, raw uint64) string {
	fractionBits := map[int]uint{16: 10, 32: 23, 64: 52}[s.Width]
	exponentBits := uint(s.Width) - 1 - fractionBits
	fraction := raw & (1<<fractionBits - 1)
	exponent := int(raw >> fractionBits & (1<<exponentBits - 1))
	bias := 1<<(exponentBits-1) - 1
	if exponent == 1<<exponentBits-1 {
		return "not finite"
	}
	significand := new(big.Int).SetUint64(fraction)
	if exponent == 0 {
		exponent = 1
	} else {
		significand.SetBit(significand, int(fractionBits), 1)
	}
	value := new(big.Rat).SetInt(significand)
	power := exponent - bias - int(fractionBits)
	scale := new(big.Rat).SetInt(new(big.Int).Lsh(big.NewInt(1), uint(max(power, -power))))
	if power < 0 {
		value.Quo(value, scale)
	} else {
		value.Mul(value, scale)
	}
	if raw>>(s.Width-1)&1 != 0 {
		value.Neg(value)
	}
	identity := s.Affine.B.Sign() == 0 && s.Affine.A.Cmp(big.NewRat(1, 1)) == 0
	if identity && s.Width == 64 {
		// The shortest text that reads back: held against the exact value.
		f, _ := value.Float64()
		if f == 0 {
			return "0"
		}
		return "float:" + value.RatString()
	}
	if identity {
		if value.Sign() == 0 {
			return "0"
		}
		return "float:" + value.RatString()
	}
	value.Mul(value, s.Affine.A).Add(value, s.Affine.B)
	return "rounded:" + value.RatString()
}

// sameAsOracle compares a text with the oracle's.
func sameAsOracle(t require.TestingT, s *schema.Signal, raw uint64, want, got string) {
	if exact, ok := strings.CutPrefix(want, "float:"); ok {
		// It must read back to the same bits.
		f, _, err := new(big.Float).SetPrec(2000).Parse(got, 10)
		require.NoError(t, err)
		x, _ := f.Float64()
		if s.Width == 32 {
			y, _ := f.Float32()
			require.Equal(t, uint32(raw), math.Float32bits(y), got)
			return
		}
		if s.Width == 16 {
			require.Equal(t, raw, bits.PutFloat(x, 16), got)
			return
		}
		require.Equal(t, raw, math.Float64bits(x), "%s %s", got, exact)
		return
	}
	if exact, ok := strings.CutPrefix(want, "rounded:"); ok {
		// Within half a unit of the last significant digit that is promised.
		e, _ := new(big.Rat).SetString(exact)
		g, ok := new(big.Rat).SetString(got)
		require.True(t, ok, got)
		diff := new(big.Rat).Sub(e, g)
		bound := new(big.Rat).Mul(new(big.Rat).Abs(e), big.NewRat(1, int64(math.Pow10(map[int]int{16: 4, 32: 8, 64: 16}[s.Width]))))
		require.LessOrEqual(t, diff.Abs(diff).Cmp(bound), 0, "%s for %s", got, exact)
		return
	}
	require.Equal(t, want, got)
}

// layout draws a random message in the language: members one behind the other
// in either byte order, of every kind.
func layout(t *rapid.T) string {
	size := rapid.SampledFrom([]int{1, 2, 5, 8, 8, 8, 12, 24, 64}).Draw(t, "size")
	var b strings.Builder
	b.WriteString("busloom 1\nnetwork R\nbus main 500 kbit/s fd 2 Mbit/s\necu A on main\necu B on main\n")
	outside := rapid.SampledFrom([]string{"hold", "extend", "none"}).Draw(t, "outside")
	fmt.Fprintf(&b, "curve Up from V to degC outside %s {\n -5: -40\n 0: 3\n 7.5: 20\n 100: 21\n}\n", outside)
	fmt.Fprintf(&b, "curve Down from ohm to bar outside %s {\n 1: 100\n 10: 33\n 1000: -2\n}\n", outside)
	fmt.Fprintf(&b, "message M 0x123 on main, fd %d bytes {\n  from A to B\n", size)
	at := 0 // bits used, counted in the member's own order
	for i := 0; at < size*8 && i < 20; i++ {
		width := min(rapid.IntRange(1, 64).Draw(t, "width"), size*8-at)
		place := ""
		if rapid.Bool().Draw(t, "light first") {
			lo, hi := at, at+width-1
			place = fmt.Sprintf("%d.%d..%d.%d", hi/8, hi%8, lo/8, lo%8)
			// Light byte first fills each byte from bit 0; heavy byte first from
			// bit 7: keep to whole bytes where the order changes.
		} else {
			lo, hi := at, at+width-1
			place = fmt.Sprintf("%d.%d..%d.%d", lo/8, 7-lo%8, hi/8, 7-hi%8)
		}
		clause := drawClause(t, width)
		fmt.Fprintf(&b, "  s%d at %s %s\n", i, place, clause)
		at += width
		if rapid.Bool().Draw(t, "align") || at%8 != 0 {
			at = (at + 7) / 8 * 8
		}
	}
	b.WriteString("}\n")
	return b.String()
}

func drawClause(t *rapid.T, width int) string {
	formulas := []string{"", "= raw", "= raw * 0.01 km/h", "= -40 degC + raw * 1 K", "= raw * 100/255 %", "= 7 bar - raw * 1/3 bar",
		"= raw * 1/256 km/h", "= Up(raw * 0.5 V)", "= Down(5000 ohm - raw * 3 ohm)", "= raw * 1e-12 A", "= Up(raw * 1/7 V - 3 V)"}
	codes := []string{"", "", " codes { ones: absent }", " codes { ones: absent  ones - 1: fault broken }"}
	formula := rapid.SampledFrom(formulas).Draw(t, "formula")
	code := rapid.SampledFrom(codes).Draw(t, "codes")
	if width < 3 {
		code = ""
	}
	switch rapid.IntRange(0, 8).Draw(t, "kind") {
	case 1:
		if width >= 2 {
			return "signed " + formula + code
		}
	case 2:
		if width >= 2 {
			return "sign magnitude " + formula + code
		}
	case 3:
		if width == 16 || width == 32 || width == 64 {
			return "float " + rapid.SampledFrom([]string{"", "= raw", "= raw * 0.01 km/h", "= raw * 1/3 V"}).Draw(t, "float formula")
		}
	case 4:
		if width%4 == 0 {
			return "packed decimal " + formula
		}
	case 5:
		if width == 1 {
			return "flag"
		}
	case 6:
		if width >= 3 {
			return "states { 0: off  1..2: middle  5: far  ones: absent }"
		}
	}
	return formula + code
}

func checkAgainstOracle(t require.TestingT, p *Plan, payload []byte) {
	f := &frame.Frame{ID: 0x123, Len: uint8(len(payload)), Flags: frame.FD}
	for i := range f.Data {
		f.Data[i] = 0xA5 // what lies behind the payload must not matter
	}
	copy(f.Data[:], payload)
	var r Record
	p.Decode(f, &r)
	require.Equal(t, Decoded, r.Class)
	require.Equal(t, len(p.Messages[0].Model.Signals), len(r.Values))
	for i := range r.Values {
		v := &r.Values[i]
		s := v.Signal.Model
		got := string(v.Signal.AppendText(nil, v, f))
		sameAsOracle(t, s, v.Raw, oracleText(s, payload), got)
	}
}

func TestPlanEqualsOracle(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		text := layout(t)
		network, list := schema.Compile(schema.MapFiles{"r.bus": text}, "r.bus")
		if list.Failed() {
			// A curve or formula may not fit a drawn width; the compiler says so.
			t.Skip("this layout isn't legal")
		}
		p, err := NewPlan(network, Options{})
		require.NoError(t, err)
		p.Bind([]string{"vcan0"})
		size := network.Messages[0].Size
		for range 4 {
			payload := rapid.SliceOfN(rapid.Byte(), 0, size).Draw(t, "payload")
			if rapid.Bool().Draw(t, "ones") {
				for i := range payload {
					payload[i] |= 0xFE
				}
			}
			checkAgainstOracle(t, p, payload)
		}
	})
}

// FuzzPlan runs one description of every kind of member on any payload.
func FuzzPlan(f *testing.F) {
	p := planOf(f, everyKind, Options{})
	f.Add([]byte{})
	f.Add([]byte(strings.Repeat("\xff", 64)))
	f.Add([]byte(strings.Repeat("\x00", 64)))
	f.Add([]byte("\x12\x34\x56\x78\x9a\xbc\xde\xf0"))
	f.Fuzz(func(t *testing.T, payload []byte) {
		checkAgainstOracle(t, p, payload[:min(len(payload), 64)])
	})
}

const everyKind = `busloom 1
network R
bus main 500 kbit/s fd 2 Mbit/s
ecu A on main
ecu B on main
curve Up from V to degC outside none {
  0: -40
  7.5: 20
  100: 21
}
message M 0x123 on main, fd 64 bytes {
  from A to B
  a at 0.7..0.0 = raw * 100/255 %
  b at 1.7..2.4 signed = raw * 0.01 km/h  codes { ones: absent }
  c at 4.3..3.5 sign magnitude = 3 bar - raw * 1/3 bar
  d at 5.7..6.0 packed decimal = raw * 0.1 km
  e at 7.0 flag
  f at 7.7..7.5 states { 0: off  1..2: middle  7: absent }
  g at 8.7..9.0 float = raw
  h at 13.7..10.0 float = raw * 0.01 km/h
  i at 14.7..21.0 float
  j at 22.7..29.0 = raw * 1e-3 V
  k at 37.3..30.4 signed = raw * 1e-9 A
  l at 38.7..39.0 = Up(raw * 1/100 V)
  m at 40.1..40.0 then 42.7..42.0 then 41.3..41.0 = raw * 1/256 km/h
  n at 43.2..51.3 signed
}
`
