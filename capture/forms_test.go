package capture

import (
	"strings"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

// The forms are common practice of SocketCAN's text tools, from memory.
func TestForms(t *testing.T) {
	type want struct {
		time  int64
		iface string
		id    uint32
		flags frame.Flags
		dlc   uint8
		data  string
	}
	for _, c := range []struct {
		line string
		want want
	}{
		{"(1699999999.123456) can0 123#1122", want{1699999999123456000, "can0", 0x123, 0, 2, "\x11\x22"}},
		{"(1699999999.123456789) vcan10 7FF#", want{1699999999123456789, "vcan10", 0x7FF, 0, 0, ""}},
		{"(0.5) can0 18DAF110#01.02.ff", want{500000000, "can0", 0x18DAF110, frame.Extended, 3, "\x01\x02\xff"}},
		{"(1.0) can0 123#R", want{1e9, "can0", 0x123, frame.Remote, 0, ""}},
		{"(1.0) can0 123#R5", want{1e9, "can0", 0x123, frame.Remote, 5, ""}},
		{"(1.0) can0 123#R8_C", want{1e9, "can0", 0x123, frame.Remote, 12, ""}},
		{"(1.0) can0 123##0", want{1e9, "can0", 0x123, frame.FD, 0, ""}},
		{"(1.0) can0 123##3000102030405060708090A0B", want{1e9, "can0", 0x123, frame.FD | frame.BitRateSwitch | frame.ErrorPassive, 9, "\x00\x01\x02\x03\x04\x05\x06\x07\x08\x09\x0a\x0b"}},
		{"(1.0) can0 12345678##5" + strings.Repeat("AB", 64), want{1e9, "can0", 0x12345678, frame.Extended | frame.FD | frame.BitRateSwitch, 15, strings.Repeat("\xab", 64)}},
		{"(1.0) can0 123#1122334455667788_9", want{1e9, "can0", 0x123, 0, 9, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
		{"(1.0) can0 20000004#0008000000006000", want{1e9, "can0", 4, frame.Error, 8, "\x00\x08\x00\x00\x00\x00\x60\x00"}},
		{"(1.0) can0 123#11 R", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"(1.0) can0 123#11 T", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"can0 123#11", want{0, "can0", 0x123, 0, 1, "\x11"}},
		{"(1.0)   can0 123#11", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"(1.0) can0 123##1.11.22", want{1e9, "can0", 0x123, frame.FD | frame.BitRateSwitch, 2, "\x11\x22"}},
		{"\t(1.0)\tcan0\t123#11", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{byteOrderMark + "(1.0) can0 123#11", want{1e9, "can0", 0x123, 0, 1, "\x11"}},
		{"(9223372035.999999999) can0 123#11", want{9223372035999999999, "can0", 0x123, 0, 1, "\x11"}},

		{"  can0  123   [8]  11 22 33 44 55 66 77 88", want{0, "can0", 0x123, 0, 8, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
		{" (1699999999.123456)  can0  123   [2]  11 22   '.\"'", want{1699999999123456000, "can0", 0x123, 0, 2, "\x11\x22"}},
		{" (2023-11-14 22:13:19.123456)  can0  18DAF110   [1]  FF", want{1699999999123456000, "can0", 0x18DAF110, frame.Extended, 1, "\xff"}},
		{" (000.001234)  can0  123   [0] ", want{1234000, "can0", 0x123, 0, 0, ""}},
		{"  can0  123   [3]  remote request", want{0, "can0", 0x123, frame.Remote, 3, ""}},
		{"  can0  20000040   [8]  00 00 00 00 00 00 00 00   ERRORFRAME", want{0, "can0", 0x40, frame.Error, 8, "\x00\x00\x00\x00\x00\x00\x00\x00"}},
		{"  can0  123  [12]  00 01 02 03 04 05 06 07 08 09 0A 0B", want{0, "can0", 0x123, frame.FD, 9, "\x00\x01\x02\x03\x04\x05\x06\x07\x08\x09\x0a\x0b"}},
		{"  can0  TX B E  123  [08]  00 01 02 03 04 05 06 07", want{0, "can0", 0x123, frame.FD | frame.BitRateSwitch | frame.ErrorPassive, 8, "\x00\x01\x02\x03\x04\x05\x06\x07"}},
		{"  can0  RX - -  123   [1]  AA", want{0, "can0", 0x123, 0, 1, "\xaa"}},
		{"  can0  20000004   [8]  00 08 00 00 00 00 60 00   ERRORFRAME with words", want{0, "can0", 4, frame.Error, 8, "\x00\x08\x00\x00\x00\x00\x60\x00"}},
		{"  can0  123   {A}  remote request", want{0, "can0", 0x123, frame.Remote, 10, ""}},
		{"  can0  123   [2]  11 22                     '''  '", want{0, "can0", 0x123, 0, 2, "\x11\x22"}},
		{"  can0  123   [0]                          ''", want{0, "can0", 0x123, 0, 0, ""}},
		{"  can0  123   [3]  33`22`11                  `3\".`", want{0, "can0", 0x123, 0, 3, "\x11\x22\x33"}},
		{"  can0  123   [2]  00010001 10000000", want{0, "can0", 0x123, 0, 2, "\x11\x80"}},
		{"  can0  123   [2]  00010001`10000000", want{0, "can0", 0x123, 0, 2, "\x80\x11"}},
		{" (000.000000)  \x1b[31mcan0\x1b[0m       123   [2]  11 22\x1b[0m", want{0, "can0", 0x123, 0, 2, "\x11\x22"}},
		{"  can0  123  [64] " + strings.Repeat(" 5A", 64), want{0, "can0", 0x123, frame.FD, 15, strings.Repeat("Z", 64)}},
		{"  can0  123   {B}  11 22 33 44 55 66 77 88", want{0, "can0", 0x123, 0, 11, "\x11\x22\x33\x44\x55\x66\x77\x88"}},
	} {
		for _, end := range []string{"", "\n", "\r\n"} {
			frames, source, rejects, err := readAll(t, strings.NewReader(c.line+end), Options{})
			require.NoError(t, err)
			require.Empty(t, rejects, c.line)
			require.Len(t, frames, 1, c.line)
			f := frames[0]
			got := want{f.Time, source.Interfaces()[f.Bus], f.ID, f.Flags, f.DLC, string(f.Payload())}
			require.Equal(t, c.want, got, c.line)
			require.Equal(t, int64(1), f.Record)
		}
	}
}

func TestRejectsSayWhere(t *testing.T) {
	text := "# comment\n\n(1.0) can0 123#11\n" // after it, the fast path is ready
	for _, c := range []struct {
		line, message string
	}{
		{"(1.0 can0 123#11", "test.log:4:5: ' ' stands here: expected the closing parenthesis of the time"},
		{"(1.0) can0", "test.log:4:11: the line ends after the interface: expected an identifier"},
		{"(1.0) can0 12#11", "test.log:4:14: the identifier ends after 2 digits: '#' stands here: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 8FF#11", "test.log:4:12: the identifier 8FF needs more than 11 bits: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 123#1", "test.log:4:17: half a byte: the line ends here: expected a second hex digit"},
		{"(1.0) can0 123#112233445566778899", "test.log:4:32: the data has more than 8 bytes: expected the line's end"},
		{"(1.0) can0 123##8", "test.log:4:17: '8' stands here: expected the FD flags, a digit from 0 to 7"},
		{"(1.0) can0 123##0112233445566778899", "test.log:4:18: an FD frame can't have 9 bytes: expected 0 to 8, 12, 16, 20, 24, 32, 48 or 64 bytes"},
		{"(99999999999.0) can0 123#11", "test.log:4:2: the time is beyond what can be counted in nanoseconds: expected a time before the year 2262"},
		{"  can0  123   [3]  11 22", "test.log:4:25: the line ends here: expected byte 3 of 3 in two hex digits"},
		{"  can0  123   [9]  11 22", "test.log:4:16: no such frame has 9 bytes: expected a length that a frame can have"},
		{"(12345678901234567890.0) can0 123#11", "test.log:4:20: the number has more than 18 digits: expected a time such as 1699999999.123456"},
		{"(1.1234567890) can0 123#11", "test.log:4:13: the number has more than 9 digits: expected the fraction of the second"},
		{"(2023-11-14 22:13) can0 123#11", "test.log:4:18: ')' stands here: expected a date such as 2023-11-14 22:13:19.123456"},
		{"(2023-02-29 22:13:19) can0 123#11", "test.log:4:2: there is no such date: expected a date such as 2023-11-14 22:13:19.123456"},
		{"(1969-12-31 23:59:59.9) can0 123#11", "test.log:4:2: the date is before 1970: expected a date such as 2023-11-14 22:13:19.123456"},
		{"(1.0) ca[n0 123#11", "test.log:4:9: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{"(1.0) can0 123456789#11", "test.log:4:20: the identifier has more than 8 digits: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 40000000#11", "test.log:4:12: the identifier 40000000 needs more than 29 bits: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)"},
		{"(1.0) can0 123:11", "test.log:4:15: ':' stands here: expected # and the data, or blanks and the length"},
		{"(1.0) can0 123#1G", "test.log:4:17: half a byte: 'G' stands here: expected a second hex digit"},
		{"(1.0) can0 123#11.", "test.log:4:19: the line ends here: expected a hex digit after the dot"},
		{"(1.0) can0 123#R9", "test.log:4:17: '9' stands here: expected a length from 0 to 8 or the line's end"},
		{"(1.0) can0 123#1122_9", "test.log:4:20: only classic frames of 8 bytes have a length code of their own: expected the line's end"},
		{"(1.0) can0 123#1122334455667788_8", "test.log:4:33: '8' stands here: expected a length code from 9 to F"},
		{"(1.0) can0 123#11 X", "test.log:4:19: 'X' stands here: expected R, T or the line's end"},
		{"(1.0) can0 20000004##0", "test.log:4:21: an error frame can't be FD: expected one #"},
		{"(1.0) can0 20000004#R", "test.log:4:21: an error frame can't be a remote request: expected its data"},
		{"  can0  RX B -  123   [1]  11", "test.log:4:12: a flag of CAN FD stands before a classic frame: expected - in both columns, or a length of two digits"},
		{"  can0  RX B -  123#11", "test.log:4:12: a flag column stands before a frame in log form: expected the identifier"},
		{"  can0  123   [3]  11 22 3", "test.log:4:27: half a byte: the line ends here: expected a second hex digit"},
		{"  can0  123   [3]  11`22 33", "test.log:4:25: ' ' stands here: expected a backtick and byte 3 of 3 in two hex digits"},
		{"  can0  123   [2]  00010001 0001000", "test.log:4:36: the line ends here: expected byte 2 of 2 in eight binary digits"},
		{"  can0  123   [1]  11 22", "test.log:4:23: '2' stands here: expected the line's end, after as many bytes as the length says"},
		{"  can0  123   [1]  11 'x", "test.log:4:25: the text in quotes has no end: expected a closing quote"},
		{"  can0  123   [1]  11   ERRORFRAME", "test.log:4:25: this frame's identifier is not an error frame's: expected an identifier with the bit 20000000, or no such word"},
		{"  can0  123  [12]  remote request", "test.log:4:20: neither FD nor error frames can be remote requests: expected its data"},
		{"  can0  123  [0012]  11", "test.log:4:17: '1' stands here: expected the closing bracket of the length"},
		{"\t(1.0) can0 123", "test.log:4:16: the line ends here: expected # and the data, or blanks and the length"},
		{"\r(1.0) can0 123#11", "test.log:4:1: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{"(1.000000) \x00 123#11", "test.log:4:12: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{"(1.000000) \x00\x00\x00\x00\x00\x00\x00\x00 123#11", "test.log:4:12: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{"\x00\xff\xfe", "test.log:4:1: this is no name of an interface: expected a name such as can0 between the time and the identifier"},
		{strings.Repeat("x", 5000), "test.log:4:4097: the line is longer than 4096 bytes: expected a record of a capture"},
	} {
		frames, _, rejects, err := readAll(t, strings.NewReader(text+c.line+"\n(2.0) can0 123#22\n"), Options{})
		require.NoError(t, err)
		require.Len(t, frames, 2)
		require.Len(t, rejects, 1)
		require.Equal(t, c.message, rejects[0].Error())
		require.Equal(t, int64(2), rejects[0].Record)
		require.Equal(t, int64(len(text)), rejects[0].Offset)
		require.Equal(t, int64(3), frames[1].Record)
		require.Equal(t, int64(len(text)+len(c.line)+1), frames[1].Offset)
	}
}

// A distance counts though the rest of its line is broken: the lines to come
// are counted from it.
func TestTimesSincePrevious(t *testing.T) {
	text := " (000.000000)  a  100   [0]\n(1.0) a 1##\n(0.5) a 100#\na 100#\n(0.25) a 100#\n(9000000000.0) a 100#\n(9000000000.0) a 100#\n"
	frames, _, rejects, err := readAll(t, strings.NewReader(text), Options{Times: SincePrevious})
	require.NoError(t, err)
	var times []int64
	for _, f := range frames {
		times = append(times, f.Time)
	}
	require.Equal(t, []int64{0, 1500e6, 1500e6, 1750e6, 9000000001750e6}, times)
	require.Len(t, rejects, 2)
	require.Equal(t, "test.log:2:10: the identifier ends after 1 digits: '#' stands here: expected an identifier of 3 hex digits (11 bits) or 8 (29 bits)", rejects[0].Error())
	require.Equal(t, "test.log:7:2: the times add up to more than can be counted in nanoseconds: expected fewer or shorter distances", rejects[1].Error())
}

// Lines that aren't records are counted apart, and so are the lines of detail
// below an error frame.
func TestOtherLines(t *testing.T) {
	text := "# a comment\n\n  \t\r\n\r\r\n  # another\n" +
		"  can0  20000004   [8]  00 08 00 00 00 00 60 00   ERRORFRAME\n\tcontroller-problem{tx-error-warning}\n\terror-counter-tx-rx{{96}{0}}\x1b[0m\n" +
		"\tcan0  123   [1]  11\n\tcan0 123#11\n\tcan0  123   {B}  11 22 33 44 55 66 77 88\n" +
		"# " + strings.Repeat("long ", 2000) + "\n# the last"
	for _, size := range []int{1, 7, 4096, 1 << 20} {
		frames, source, rejects, err := readAll(t, &dribble{strings.NewReader(text), size}, Options{})
		require.NoError(t, err)
		require.Empty(t, rejects)
		require.Len(t, frames, 4)
		require.Equal(t, int64(9), source.OtherLines())
		require.Equal(t, int64(len(text)), source.Counts().Bytes)
	}
}

func TestWideText(t *testing.T) {
	var text strings.Builder
	text.WriteString("\xFF\xFE")
	for _, c := range "(1.0) can0 123#11\r\n(1.0) can0 123#11\r\n" {
		text.WriteString(string(c) + "\x00")
	}
	frames, _, rejects, err := readAll(t, strings.NewReader(text.String()), Options{})
	require.NoError(t, err)
	require.Empty(t, frames)
	require.Equal(t, "test.log:1:1: the text is UTF-16: expected ASCII or UTF-8: write the capture anew", rejects[0].Error())
}
