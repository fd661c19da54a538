package output

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"math/big"
	"strconv"
	"strings"
	"testing"
	"unicode/utf8"

	"busloom/decode"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"
)

// physical is what the description says a raw value is, in plain rational
// arithmetic; nil for kinds that it leaves to other tests.
func physical(s *schema.Signal, raw uint64) *big.Rat {
	x := new(big.Int).SetUint64(raw)
	switch s.Kind {
	case schema.Signed:
		if x.Bit(s.Width-1) == 1 {
			x.Sub(x, new(big.Int).Lsh(big.NewInt(1), uint(s.Width)))
		}
	case schema.PackedDecimal:
		var ok bool
		if x, ok = x.SetString(strconv.FormatUint(raw, 16), 10); !ok {
			return nil
		}
	case schema.Unsigned, schema.Counter, schema.Checksum:
	default:
		return nil
	}
	y := new(big.Rat).SetInt(x)
	if s.Affine != nil {
		y.Add(y.Mul(y, s.Affine.A), s.Affine.B)
	}
	if s.Curve != nil {
		return interpolate(s.Curve, y)
	}
	return y
}

func interpolate(c *schema.Curve, x *big.Rat) *big.Rat {
	for i := 1; i < len(c.Points); i++ {
		p, q := c.Points[i-1], c.Points[i]
		if x.Cmp(p.X) < 0 || x.Cmp(q.X) > 0 {
			continue
		}
		slope := new(big.Rat).Quo(new(big.Rat).Sub(q.Y, p.Y), new(big.Rat).Sub(q.X, p.X))
		return slope.Add(slope.Mul(slope, new(big.Rat).Sub(x, p.X)), p.Y)
	}
	return nil
}

// expect is what a value's number, word and code columns must hold, found from
// the description alone. A number that no finite decimal writes may be off by
// half of its last digit.
type expect struct {
	number     *big.Rat
	word, code string
	known      bool
}

func expected(v *decode.Value) expect {
	s := v.Signal.Model
	if s == nil {
		return expect{number: new(big.Rat).SetInt(new(big.Int).SetUint64(v.Raw)), known: true}
	}
	for _, c := range s.Codes {
		if v.Raw >= c.Raw.Low && v.Raw <= c.Raw.High {
			class := map[schema.CodeClass]string{schema.Absent: "absent", schema.Fault: "fault", schema.Reserved: "reserved"}[c.Class]
			return expect{code: strings.TrimSpace(class + " " + c.Name), known: v.State != decode.Missing}
		}
	}
	switch s.Kind {
	case schema.Flag:
		return expect{word: [2]string{"off", "on"}[v.Raw&1], known: v.State == decode.Word}
	case schema.States:
		for _, x := range s.States {
			if v.Raw >= x.Raw.Low && v.Raw <= x.Raw.High {
				return expect{word: x.Name, known: v.State == decode.Word}
			}
		}
		return expect{}
	}
	number := physical(s, v.Raw)
	return expect{number: number, known: number != nil && v.State == decode.Number}
}

// TestReadBack reads CSV and JSON Lines of a whole drive with the standard
// library and holds every row against the raw value and the description.
func TestReadBack(t *testing.T) {
	plan, records := heronRecords(t, 1<<30)
	text := write(t, "csv", plan, Options{}, records)
	require.Equal(t, strings.Count(text, "\n"), strings.Count(text, "\r\n"), "lines end in CR LF")
	rows, err := csv.NewReader(strings.NewReader(text)).ReadAll()
	require.NoError(t, err)
	lines := bytes.Split([]byte(write(t, "jsonl", plan, Options{}, records)), []byte("\n"))
	require.Equal(t, []string{"time", "bus", "message", "signal", "value", "unit", "word", "code", "check"}, rows[0])
	row, line, checked := 1, 0, 0
	for i := range records {
		r := &records[i]
		var object struct {
			Time         json.Number
			Bus, Message string
			Signals      []map[string]any
			Check        []string
			Error        []string
		}
		if r.Class == decode.Decoded || r.Class == decode.ErrorFrame {
			d := json.NewDecoder(bytes.NewReader(lines[line]))
			d.UseNumber()
			require.NoError(t, d.Decode(&object))
			line++
		}
		if r.Class == decode.ErrorFrame {
			require.NotEmpty(t, object.Error)
		}
		require.Len(t, object.Signals, len(r.Values))
		for j := range r.Values {
			v := &r.Values[j]
			got, signal := rows[row], object.Signals[j]
			row++
			time, ok := new(big.Rat).SetString(got[0])
			require.True(t, ok)
			require.Zero(t, time.Cmp(big.NewRat(r.Frame.Time, second)), got)
			require.Equal(t, []string{r.Message.Bus, r.Message.Model.Name, v.Signal.Path}, got[1:4])
			require.Equal(t, got[:3], []string{object.Time.String(), object.Bus, object.Message})
			require.Equal(t, got[3], signal["name"])
			require.Equal(t, got[8], strings.Join(object.Check, "; "))
			for k, key := range map[int]string{4: "value", 6: "word", 7: "code"} {
				cell, ok := signal[key]
				switch {
				case !ok && key == "word" && (v.State == decode.Text || v.State == decode.Octets):
				case !ok:
					require.Empty(t, got[k], got)
				default:
					require.EqualValues(t, got[k], cell, got)
				}
			}
			if unit, ok := signal["unit"]; ok && v.State != decode.Word {
				require.Equal(t, got[5], unit)
			}
			want := expected(v)
			if !want.known {
				continue
			}
			checked++
			require.Equal(t, []string{want.word, want.code}, got[6:8], got)
			if want.number == nil {
				require.Empty(t, got[4], got)
				continue
			}
			number, ok := new(big.Rat).SetString(got[4])
			require.True(t, ok, got)
			off := number.Sub(number, want.number)
			if v.Signal.Exact || v.Signal.Model == nil {
				require.Zero(t, off.Sign(), got)
				continue
			}
			limit := big.NewRat(1, 2)
			for range v.Signal.Decimals {
				limit.Mul(limit, big.NewRat(1, 10))
			}
			require.LessOrEqual(t, off.Abs(off).Cmp(limit), 0, got)
		}
	}
	require.Equal(t, len(rows), row)
	require.Empty(t, lines[line])
	require.Greater(t, checked, row*9/10, "most values have an expectation")
}

// TestCSVRows has rows by hand, from the payloads in the fixture.
func TestCSVRows(t *testing.T) {
	plan := smallPlan(t)
	rows, err := csv.NewReader(strings.NewReader(write(t, "csv", plan, Options{}, decodeShots(plan, shots)))).ReadAll()
	require.NoError(t, err)
	for _, want := range [][]string{
		{"1700000000.000000", "chassis", "Wheels", "wheel[right].speed", "79.99", "km/h", "", "", ""},
		{"1700000000.000000", "chassis", "Wheels", "slope", "-0.5", "%", "", "", ""},
		{"1700000000.010000", "chassis", "Wheels", "wheel[left].speed", "", "km/h", "", "fault circuit_open", "checksum wrong"},
		{"1700000000.020000001", "chassis", "Wheels", "gear", "", "", "", "unknown 0x7", "counter repeated"},
		{"1700000000.030000", "chassis", "Wheels", "gear", "", "", "first", "", "counter lost 3"},
		{"1700000000.100000", "chassis", "Wheels", "held", "", "", "off", "", "counter out of range"},
		{"1700000000.110000", "chassis", "Wheels", "slope", "", "%", "", "missing", "frame short"},
		{"1700000000.121000", "chassis", "Pages", "page", "9", "", "", "", "unknown selection"},
		{"1700000000.123000", "powertrain", "Pages", "low", "5", "bar", "", "", ""},
		{"1700000000.130000", "chassis", "Numbers", "big", "18446744073709551.615", "m", "", "", ""},
		{"1700000000.130000", "chassis", "Numbers", "name", "", "", "a,\"\n", "", ""},
		{"1700000000.130000", "chassis", "Numbers", "blob", "", "", "01AB00", "", ""},
		{"1700000000.131000", "chassis", "Numbers", "real", "", "V", "", "not finite", ""},
		{"1700000000.131000", "chassis", "Numbers", "probe", "", "degC", "", "beyond the curve", ""},
		{"1700000000.190000", "chassis", "Alive", "id.source", "34", "", "", "", ""},
	} {
		require.Contains(t, rows, want)
	}
}

// TestQuoting reads any text back with the standard library. encoding/csv
// makes LF of CR LF in a quoted field.
func TestQuoting(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		text := rapid.OneOf(rapid.String(), rapid.StringMatching(`[a,"\r\n ]{0,12}`)).Draw(t, "text")
		quoted := csvField(text)
		require.Equal(t, quoted, string(quoteTail([]byte("x,"+text), 2)[2:]))
		row, err := csv.NewReader(strings.NewReader("first," + quoted + ",last\r\n")).Read()
		require.NoError(t, err)
		require.Equal(t, []string{"first", strings.ReplaceAll(text, "\r\n", "\n"), "last"}, row)

		var back string
		require.NoError(t, json.Unmarshal(appendJSONText(nil, text), &back))
		require.Equal(t, text, back)

		shown := string(printable([]byte(text)))
		require.Equal(t, utf8.RuneCountInString(text), utf8.RuneCountInString(shown))
		for _, r := range shown {
			require.True(t, strconv.IsPrint(r), "%q", r)
		}
	})
}

// TestSteps holds the greatest step, range and counts of the summary against a
// search through the CSV in rational arithmetic.
func TestSteps(t *testing.T) {
	plan, records := heronRecords(t, 1<<30, "WheelSpeeds.wheel*.speed")
	rows, err := csv.NewReader(strings.NewReader(write(t, "csv", plan, Options{}, records))).ReadAll()
	require.NoError(t, err)
	var summary struct {
		Messages []struct {
			Signals []struct {
				Name                          string
				Numbers                       int64
				Least, Greatest, GreatestStep json.Number
				LeastAt, GreatestAt           json.Number
				GreatestStepAt                json.Number
				Codes                         map[string]int64
			}
		}
	}
	require.NoError(t, json.Unmarshal([]byte(write(t, "summary", plan, Options{JSON: true}, records)), &summary))
	require.Len(t, summary.Messages[0].Signals, 4)
	steps := map[string]*big.Rat{}
	for _, s := range summary.Messages[0].Signals {
		var least, greatest, step, last *big.Rat
		var leastAt, greatestAt, stepAt string
		numbers, codes := int64(0), map[string]int64{}
		for _, row := range rows[1:] {
			if row[3] != s.Name {
				continue
			}
			if row[7] != "" {
				codes[row[7]]++
			}
			x, ok := new(big.Rat).SetString(row[4])
			if !ok {
				last = nil
				continue
			}
			numbers++
			if least == nil || x.Cmp(least) < 0 {
				least, leastAt = x, row[0]
			}
			if greatest == nil || x.Cmp(greatest) > 0 {
				greatest, greatestAt = x, row[0]
			}
			if last != nil {
				d := new(big.Rat).Sub(x, last)
				if d.Abs(d).Sign() > 0 && (step == nil || d.Cmp(step) > 0) {
					step, stepAt = d, row[0]
				}
			}
			last = x
		}
		same := func(want *big.Rat, got json.Number) {
			x, ok := new(big.Rat).SetString(got.String())
			require.True(t, ok)
			require.Zero(t, want.Cmp(x), "%s: %s", s.Name, got)
		}
		same(least, s.Least)
		same(greatest, s.Greatest)
		same(step, s.GreatestStep)
		require.Equal(t, []string{leastAt, greatestAt, stepAt}, []string{s.LeastAt.String(), s.GreatestAt.String(), s.GreatestStepAt.String()})
		require.Equal(t, numbers, s.Numbers)
		if len(codes) > 0 {
			require.Equal(t, codes, s.Codes)
		}
		steps[s.Name] = step
	}
	// The wheel whose ring lacks teeth stands out: its greatest step is twice
	// that of the others.
	damaged := steps["wheel[front_right].speed"]
	for name, step := range steps {
		if name != "wheel[front_right].speed" {
			require.Negative(t, new(big.Rat).Mul(step, big.NewRat(2, 1)).Cmp(damaged), name)
		}
	}
}

// TestStepNeighbours has a code between two numbers: they are no neighbours.
// And the numbers of two senders of a family aren't either.
func TestStepNeighbours(t *testing.T) {
	plan := smallPlan(t, "Wheels.wheel[left].speed", "Alive.state")
	wheel := func(raw string) shot { return shot{0, 0, 0x100, 0, raw + "\x00\x00\x00\x00\x00\x00"} }
	alive := func(id uint32, raw string) shot { return shot{0, 0, id, frame.Extended, raw} }
	text := write(t, "summary", plan, Options{JSON: true}, decodeShots(plan, []shot{
		wheel("\x00\x64"), wheel("\x00\xC8"), wheel("\xFF\xFF"), wheel("\x27\x10"), wheel("\x26\xDE"),
		alive(0x18FF1021, "\x01"), alive(0x18FF1022, "\xC8"), alive(0x18FF1022, "\xCB"), alive(0x18FF1021, "\x02"),
	}))
	// 1, 2, absent, 100, 99.5 km/h; 1 A, then 200 and 203 A of another sender.
	var summary struct {
		Messages []struct {
			Signals []struct{ GreatestStep json.Number }
		}
	}
	require.NoError(t, json.Unmarshal([]byte(text), &summary))
	require.Equal(t, "1", summary.Messages[0].Signals[0].GreatestStep.String())
	require.Equal(t, "3", summary.Messages[1].Signals[0].GreatestStep.String())
}
