package decode

import (
	"fmt"
	"testing"

	"github.com/stretchr/testify/require"
)

// Everything in this file is held against sources outside of the project; each
// check names its own.

const j1939 = `busloom 1
network Truck
bus main 250 kbit/s
ecu Engine on main with source 0x00
ecu Brakes on main with source 0x0B
ecu Listener on main

idform Broadcast 29 bits { priority 3, page 2, format 8, group 8, source 8 }

codes Top by top byte {
  0xFB: reserved indicator
  0xFC..0xFD: reserved
  0xFE: fault
  0xFF: absent
}

message EEC1 Broadcast(priority usually 3, page 0, format 0xF0, group 0x04) on main, 8 bytes {
  from any to Listener
  default codes Top
  unused 0.7..0.0, 5.7..7.0
  demand at 1.7..1.0 = -125 % + raw * 1 %
  actual at 2.7..2.0 = -125 % + raw * 1 %
  speed  at 4.7..3.0 = raw * 0.125 rpm
}

message CCVS Broadcast(priority usually 6, page 0, format 0xFE, group 0xF1) on main, 8 bytes {
  from any to Listener
  default codes Top
  unused 0.7..0.0, 3.7..7.0
  speed at 2.7..1.0 = raw * 1/256 km/h
}

message ET1 Broadcast(priority usually 6, page 0, format 0xFE, group 0xEE) on main, at least 4 bytes {
  from any to Listener
  default codes Top
  unused 1.7..1.0
  coolant at 0.7..0.0 = -40 degC + raw * 1 K
  oil     at 3.7..2.0 = -273 degC + raw * 0.03125 K
}

shape Relative 1 byte {
  speed at +0.7..0.0 = -7.8125 km/h + raw * 1/16 km/h
}

message EBC2 Broadcast(priority usually 6, page 0, format 0xFE, group 0xBF) on main, 8 bytes {
  from any to Listener
  default codes Top
  front at 1.7..0.0 = raw * 1/256 km/h
  wheel[front_left, front_right, rear_left, rear_right, rear2_left, rear2_right] is Relative from byte 2 step 1
}

message Ranges Broadcast(priority usually 6, page 0, format 0xFF, group 0x00) on main, 8 bytes {
  from any to Listener
  default codes Top
  one  at 0.7..0.0
  two  at 2.7..1.0
  four at 6.7..3.0
  unused 7.7..7.0
}
`

// Worked examples of SAE J1939-71: engine speed 700 rpm is printed in the
// Thomson MEC 310 Option J manual (PM077 R1, page 9); the others follow from
// the scales and offsets of the standard (SPN 84, 110, 190, 904 to 910).
func TestJ1939Examples(t *testing.T) {
	p := planOf(t, j1939, Options{})
	for _, c := range []struct {
		id, data string
		want     map[string]string
	}{
		{"0CF00400", "FF 7D 7D E0 15 FF F0 FF", map[string]string{"speed": "700 rpm", "demand": "0 %", "actual": "0 %", "id.priority": "3", "id.source": "0"}},
		{"18FEF100", "FF 00 50 FF FF FF FF FF", map[string]string{"speed": "80 km/h"}},
		{"18FEF100", "FF 94 36 FC FF 68 00 CF", map[string]string{"speed": "54.578125 km/h"}}, // 0x3694 / 256, real truck data (open capture)
		{"18FEF100", "FF 00 FE FF FF FF FF FF", map[string]string{"speed": "fault"}},
		{"18FEEE00", "7B FF 00 2A", map[string]string{"coolant": "83 degC", "oil": "63 degC"}},
		{"18FEBF0B", "00 50 7D 8D 6D 7D FF FF", map[string]string{
			"front": "80 km/h", "wheel[front_left].speed": "0 km/h", "wheel[front_right].speed": "1 km/h",
			"wheel[rear_left].speed": "-1 km/h", "wheel[rear_right].speed": "0 km/h",
			"wheel[rear2_left].speed": "absent", "wheel[rear2_right].speed": "absent", "id.source": "11"}},
		{"18FEBF0B", "00 00 7D 7D 7D 7D FF FF", map[string]string{"front": "0 km/h", "wheel[front_left].speed": "0 km/h"}}, // standing truck, open capture
	} {
		got, r := values(t, p, received(t, c.id, c.data))
		require.NotEqual(t, FitShort, r.Fit)
		for path, want := range c.want {
			require.Equal(t, want, got[path], "%s %s %s", c.id, c.data, path)
		}
	}
}

// The special raw ranges of SAE J1939-71, table "Transmitted signal ranges":
// only the top byte decides, for 1, 2 and 4 bytes.
func TestJ1939SpecialRanges(t *testing.T) {
	p := planOf(t, j1939, Options{})
	for _, c := range []struct {
		one, two, four uint64
		want           string // "" for a number
	}{
		{0x00, 0x0000, 0x00000000, ""},
		{0xFA, 0xFAFF, 0xFAFFFFFF, ""},
		{0xFB, 0xFB00, 0xFB000000, "reserved indicator"},
		{0xFB, 0xFBFF, 0xFBFFFFFF, "reserved indicator"},
		{0xFC, 0xFC00, 0xFC000000, "reserved"},
		{0xFD, 0xFDFF, 0xFDFFFFFF, "reserved"},
		{0xFE, 0xFE00, 0xFE000000, "fault"},
		{0xFE, 0xFEFF, 0xFEFFFFFF, "fault"},
		{0xFF, 0xFF00, 0xFF000000, "absent"},
		{0xFF, 0xFFFF, 0xFFFFFFFF, "absent"},
	} {
		data := fmt.Sprintf("%02X%02X%02X%02X%02X%02X%02X00", c.one, c.two&255, c.two>>8, c.four&255, c.four>>8&255, c.four>>16&255, c.four>>24)
		got, _ := values(t, p, received(t, "18FF0000", data))
		for path, raw := range map[string]uint64{"one": c.one, "two": c.two, "four": c.four} {
			want := c.want
			if want == "" {
				want = fmt.Sprint(raw)
			}
			require.Equal(t, want, got[path], "%s %X", path, raw)
		}
	}
}

const obd = `busloom 1
network Diagnosis
bus main 500 kbit/s
ecu Engine on main
ecu Tester on main

message Answer 0x7E8 on main, 8 bytes {
  from Engine to Tester
  on request
  kind   at 0.7..0.4
  length at 0.3..0.0
  service at 1.7..1.0
  select service {
    when 0x41 {
      parameter at 2.7..2.0
      select parameter {
        when 0x00 { supported at 3.7..6.0 bytes }
        when 0x04, 0x11, 0x2F { share at 3.7..3.0 = raw * 100/255 % }
        when 0x05 { coolant at 3.7..3.0 = -40 degC + raw * 1 K }
        when 0x06..0x09 { trim at 3.7..3.0 = -100 % + raw * 100/128 % }
        when 0x0A { fuel_pressure at 3.7..3.0 = raw * 3 kPa }
        when 0x0C { engine_speed at 3.7..4.0 = raw * 0.25 rpm }
        when 0x0D { speed at 3.7..3.0 = raw * 1 km/h }
        when 0x0E { advance at 3.7..3.0 = -64 deg + raw * 0.5 deg }
        when 0x10 { air at 3.7..4.0 = raw * 0.01 g/s }
        when 0x14..0x1B {
          probe at 3.7..3.0 = raw * 0.005 V
          probe_trim at 4.7..4.0 = -100 % + raw * 100/128 %  codes { 0xFF: absent }
        }
        when 0x5E { fuel_rate at 3.7..4.0 = raw * 0.05 L/h }
        otherwise unknown
      }
    }
    when 0x43 {
      count at 2.7..2.0
      letter at 3.7..3.6 states { 0: P  1: C  2: B  3: U }
      first at 3.5..3.4
      rest at 3.3..4.0 packed decimal
    }
    otherwise nothing
  }
}
`

// OBD vectors. Formulas: SAE J1979 as reproduced in public PID tables; 1726 rpm
// and 2580.80 L/h stand in public unit tests, the supported-PID bytes in the
// Wikipedia article "OBD-II PIDs"; fault codes: SAE J2012, P0135 and P0420 from
// public worked examples.
func TestOBDExamples(t *testing.T) {
	p := planOf(t, obd, Options{})
	for _, c := range []struct {
		data, path, want string
	}{
		{"06 41 00 BE 1F A8 13 00", "supported", "BE1FA813"},
		{"04 41 0C 1A F8 00 00 00", "engine_speed", "1726 rpm"},
		{"03 41 0D 3C 00 00 00 00", "speed", "60 km/h"},
		{"04 41 10 0B B8 00 00 00", "air", "30 g/s"},
		{"03 41 05 7B 00 00 00 00", "coolant", "83 degC"},
		{"04 41 5E C9 A0 00 00 00", "fuel_rate", "2580.8 L/h"},
		{"03 41 0E 80 00 00 00 00", "advance", "0 deg"},
		{"03 41 0A FF 00 00 00 00", "fuel_pressure", "765 kPa"},
		{"03 41 06 80 00 00 00 00", "trim", "0 %"},
		{"03 41 06 FF 00 00 00 00", "trim", "99.21875 %"}, // the tables print 99.22
		{"03 41 11 FF 00 00 00 00", "share", "100 %"},
		{"04 41 14 5A FF 00 00 00", "probe", "0.45 V"},
		{"04 41 14 5A FF 00 00 00", "probe_trim", "absent"},
		{"04 43 01 01 35 00 00 00", "letter", "P"},
		{"04 43 01 01 35 00 00 00", "rest", "135"},
		{"04 43 01 04 20 00 00 00", "rest", "420"},
		{"04 43 01 43 21 00 00 00", "letter", "C"},
		{"04 43 01 81 35 00 00 00", "letter", "B"},
		{"04 43 01 C1 00 00 00 00", "letter", "U"},
	} {
		got, r := values(t, p, received(t, "7E8", c.data))
		require.Equal(t, c.want, got[c.path], c.data)
		require.False(t, r.UnknownSelection, c.data)
	}
	_, r := values(t, p, received(t, "7E8", "03 41 7F 00 00 00 00 00"))
	require.True(t, r.UnknownSelection)
}

// AUTOSAR E2E protocol specification (document 849, release R20-11), the
// "Protocol Examples" of profile 1 and the example table of profile 2, and
// profile 5 (clause 6.6.5), quoted in the tests of two public libraries; the
// rows marked false are negative examples.
func TestE2EExamples(t *testing.T) {
	profile1 := func(mode string) string {
		nibble := "unused 1.7..1.4"
		if mode == "nibble" {
			nibble = "nibble at 1.7..1.4 always 1"
		}
		return e2eMessage("crc at 0.7..0.0 checksum e2e profile 1 "+mode+", id 0x123, counter alive", "alive at 1.3..1.0 counter 0..14", nibble, "unused 2.7..7.0", 8)
	}
	profile2 := func(ids string) string {
		return e2eMessage("crc at 0.7..0.0 checksum e2e profile 2, id "+ids+", counter alive", "alive at 1.3..1.0 counter 0..15", "unused 1.7..1.4", "unused 2.7..7.0", 8)
	}
	one := "1 2 3 4 5 6 7 8 9 10 11 12 13 14 15 16"
	zero := "0 1 2 3 4 5 6 7 8 9 10 11 12 13 14 15"
	zeros := "0 0 0 0 0 0 0 0 0 0 0 0 0 0 0 0"
	type row struct {
		data string
		good bool
	}
	for _, c := range []struct {
		name, text string
		rows       []row
	}{
		{"profile 1 both", profile1("both"), []row{
			{"CC 00 00 00 00 00 00 00", true}, {"91 01 00 00 00 00 00 00", true}, {"CC 10 00 00 00 00 00 00", false}}},
		{"profile 1 alternating", profile1("alternating"), []row{
			{"CE 00 00 00 00 00 00 00", true}, {"02 01 00 00 00 00 00 00", true}, {"93 01 00 00 00 00 00 00", false}}},
		{"profile 1 low", profile1("low"), []row{
			{"CE 00 00 00 00 00 00 00", true}, {"93 01 00 00 00 00 00 00", true}, {"93 11 00 00 00 00 00 00", false}}},
		{"profile 1 nibble", profile1("nibble"), []row{
			{"2A 10 00 00 00 00 00 00", true}, {"77 11 00 00 00 00 00 00", true}, {"77 21 00 00 00 00 00 00", false}}},
		{"profile 2", profile2(one), []row{
			{"1B 01 00 00 00 00 00 00", true}, {"98 02 00 00 00 00 00 00", true}, {"31 03 00 00 00 00 00 00", true}, {"0D 04 00 00 00 00 00 00", true},
			{"18 05 00 00 00 00 00 00", true}, {"9B 06 00 00 00 00 00 00", true}, {"65 07 00 00 00 00 00 00", true}, {"08 08 00 00 00 00 00 00", true},
			{"1D 09 00 00 00 00 00 00", true}, {"9E 0A 00 00 00 00 00 00", true}, {"37 0B 00 00 00 00 00 00", true}, {"0B 0C 00 00 00 00 00 00", true},
			{"1E 0D 00 00 00 00 00 00", true}, {"9D 0E 00 00 00 00 00 00", true}, {"CD 0F 00 00 00 00 00 00", true}, {"0E 00 00 00 00 00 00 00", true},
			{"1B 02 00 00 00 00 00 00", false}}},
		{"profile 2 list from 0", profile2(zero), []row{
			{"61 01 02 03 04 05 06 07", true}, {"BC 02 02 03 04 05 06 07", true}}},
		{"profile 2 list of zeros", profile2(zeros), []row{{"45 01 00 00 00 00 00 00", true}}},
		{"profile 5, 8 bytes, offset 0", e2eMessage("crc at 1.7..0.0 checksum e2e profile 5, id 0x1234, counter alive", "alive at 2.7..2.0 counter 0..255", "", "unused 3.7..7.0", 8), []row{
			{"1C CA 00 00 00 00 00 00", true}, {"CF 8D 01 00 00 00 00 00", true}, {"CF 8D 00 00 00 00 00 00", false}}},
		{"profile 5, 8 bytes, offset 3", e2eMessage("crc at 4.7..3.0 checksum e2e profile 5, id 0x1234, counter alive", "alive at 5.7..5.0 counter 0..255", "", "unused 0.7..2.0, 6.7..7.0", 8), []row{
			{"00 00 00 1C CA 00 00 00", true}}},
		{"profile 5, 16 bytes, offset 8", e2eMessage("crc at 9.7..8.0 checksum e2e profile 5, id 0x1234, counter alive", "alive at 10.7..10.0 counter 0..255", "", "unused 0.7..7.0, 11.7..15.0", 16), []row{
			{"00 00 00 00 00 00 00 00 28 91 00 00 00 00 00 00", true}, {"00 00 00 00 00 00 00 00 FB D6 01 00 00 00 00 00", true}}},
	} {
		t.Run(c.name, func(t *testing.T) {
			p := planOf(t, c.text, Options{})
			for _, row := range c.rows {
				_, r := values(t, p, received(t, "123", row.data))
				want := Bad
				if row.good {
					want = Good
				}
				require.Equal(t, want, r.Checksum, row.data)
			}
		})
	}
}

func e2eMessage(crc, alive, more, unused string, size int) string {
	return fmt.Sprintf(`busloom 1
network Protected
bus main 500 kbit/s fd 2 Mbit/s
ecu A on main
ecu B on main
message M 0x123 on main, fd %d bytes {
  from A to B
  %s
  %s
  %s
  %s
}
`, size, crc, alive, more, unused)
}

// A real car's payload: its last byte is the CRC-8 SAE J1850 of the seven
// before it (public note of elektronik-keller.de).
func TestRealCarChecksum(t *testing.T) {
	p := planOf(t, e2eMessage("crc at 7.7..7.0 checksum crc8_j1850 over bytes 0..6", "", "", "unused 0.7..6.0", 8), Options{})
	_, r := values(t, p, received(t, "123", "00 C0 DF AC AA 07 40 6C"))
	require.Equal(t, Good, r.Checksum)
	_, r = values(t, p, received(t, "123", "00 C0 DF AC AA 07 41 6C"))
	require.Equal(t, Bad, r.Checksum)
}

// The NTC of 2.5 kohm at 20 degC: every printed pair of the table (temperature
// sensor calibration of an engine management's help file) comes out of a curve
// through its points, and a value between two points lies on the line.
func TestNTCTable(t *testing.T) {
	table := []struct{ degC, ohm int }{
		{-40, 45313}, {-30, 26114}, {-20, 15462}, {-10, 9397}, {0, 5896}, {10, 3792}, {20, 2500}, {30, 1707}, {40, 1175},
		{50, 834}, {60, 596}, {70, 436}, {80, 323}, {90, 243}, {100, 187}, {110, 144}, {120, 113}, {130, 89}, {140, 72}, {150, 55},
	}
	text := "busloom 1\nnetwork Thermo\nbus main 500 kbit/s\necu A on main\necu B on main\ncurve Ntc from ohm to degC outside hold {\n"
	for _, row := range table {
		text += fmt.Sprintf("  %d: %d\n", row.ohm, row.degC)
	}
	text += "}\nmessage M 0x100 on main, 2 bytes {\n  from A to B\n  coolant at 0.7..1.0 = Ntc(raw * 1 ohm)\n}\n"
	p := planOf(t, text, Options{})
	at := func(ohm int) string {
		got, _ := values(t, p, received(t, "100", fmt.Sprintf("%04X", ohm)))
		return got["coolant"]
	}
	for _, row := range table {
		require.Equal(t, fmt.Sprintf("%d degC", row.degC), at(row.ohm))
	}
	// By hand: 2500 -> 3792 ohm is 20 -> 10 degC; the middle 3146 is 15 degC.
	require.Equal(t, "15 degC", at(3146))
	require.Equal(t, "-40 degC", at(65535))
	require.Equal(t, "150 degC", at(0))
	// By hand: 40 + 10*(1175-1000)/(1175-834) = 45.1319648...
	require.Equal(t, "45.13196 degC", at(1000))
}
