package capture

import (
	"fmt"
	"slices"
	"strings"
	"testing"
	"time"

	"busloom/frame"

	"github.com/stretchr/testify/require"
	"go.einride.tech/can"
	"pgregory.net/rapid"
)

func idText(f *frame.Frame) string {
	switch {
	case f.Flags&frame.Error != 0:
		return fmt.Sprintf("%08X", 0x20000000|f.ID)
	case f.Flags&frame.Extended != 0:
		return fmt.Sprintf("%08X", f.ID)
	}
	return fmt.Sprintf("%03X", f.ID)
}

// logText writes a frame in log form; dotted parts the bytes.
func logText(f *frame.Frame, iface, stamp string, dotted bool) string {
	body := fmt.Sprintf("%X", f.Payload())
	if dotted {
		body = strings.ReplaceAll(fmt.Sprintf("% X", f.Payload()), " ", ".")
	}
	switch {
	case f.Flags&frame.Remote != 0 && f.DLC > 8:
		body = fmt.Sprintf("R8_%X", f.DLC)
	case f.Flags&frame.Remote != 0 && f.DLC == 0:
		body = "R"
	case f.Flags&frame.Remote != 0:
		body = fmt.Sprintf("R%d", f.DLC)
	case f.Flags&frame.FD != 0:
		flags := 4
		if f.Flags&frame.BitRateSwitch != 0 {
			flags |= 1
		}
		if f.Flags&frame.ErrorPassive != 0 {
			flags |= 2
		}
		body = fmt.Sprintf("#%d%s", flags, body)
	case f.DLC > 8:
		body += fmt.Sprintf("_%X", f.DLC)
	}
	return stamp + " " + iface + " " + idText(f) + "#" + body
}

// screenStyle is how the screen form may be written.
type screenStyle struct {
	columns, binary, reversed, ascii bool
}

// screenText writes a frame in screen form.
func screenText(f *frame.Frame, iface, stamp string, style screenStyle) string {
	var b strings.Builder
	fmt.Fprintf(&b, " %s  %s", stamp, iface)
	letter := func(flag frame.Flags, letter string) string {
		if f.Flags&flag != 0 {
			return letter
		}
		return "-"
	}
	if style.columns || f.Flags&(frame.BitRateSwitch|frame.ErrorPassive) != 0 {
		fmt.Fprintf(&b, "  RX %s %s", letter(frame.BitRateSwitch, "B"), letter(frame.ErrorPassive, "E"))
	}
	fmt.Fprintf(&b, "  %s ", idText(f))
	switch {
	case f.Flags&frame.FD != 0:
		fmt.Fprintf(&b, "[%02d] ", f.Len)
	case f.DLC > 8:
		fmt.Fprintf(&b, " {%X} ", f.DLC)
	default:
		fmt.Fprintf(&b, " [%d] ", f.DLC)
	}
	if f.Flags&frame.Remote != 0 {
		return b.String() + " remote request"
	}
	data, separator, quote := slices.Clone(f.Payload()), " ", "'"
	if style.reversed {
		slices.Reverse(data)
		separator, quote = "`", "`"
	}
	var columns []string
	characters := ""
	for _, v := range data {
		if style.binary {
			columns = append(columns, fmt.Sprintf("%08b", v))
		} else {
			columns = append(columns, fmt.Sprintf("%02X", v))
		}
		if v < ' ' || v > '~' {
			v = '.'
		}
		characters += string(rune(v))
	}
	b.WriteString(" " + strings.Join(columns, separator))
	switch {
	case f.Flags&frame.Error != 0:
		b.WriteString("   ERRORFRAME")
	case style.ascii && f.Len <= 8:
		b.WriteString("   " + quote + characters + quote)
	}
	return b.String()
}

// anyFrame draws a frame of any kind without its place.
func anyFrame(t *rapid.T) frame.Frame {
	f := frame.Frame{Time: rapid.Int64Range(0, 4e18).Draw(t, "time")}
	if rapid.Bool().Draw(t, "micros") {
		f.Time -= f.Time % 1000
	}
	kind := rapid.SampledFrom([]string{"data", "remote", "FD", "error"}).Draw(t, "kind")
	largest, longest := uint32(1<<11-1), 15
	switch kind {
	case "remote":
		f.Flags = frame.Remote
	case "FD":
		f.Flags = frame.FD | rapid.SampledFrom([]frame.Flags{0, frame.BitRateSwitch, frame.ErrorPassive, frame.BitRateSwitch | frame.ErrorPassive}).Draw(t, "FD flags")
	case "error":
		f.Flags, largest, longest = frame.Error, 1<<29-1, 8
	}
	if kind != "error" && rapid.Bool().Draw(t, "extended") {
		f.Flags |= frame.Extended
		largest = 1<<29 - 1
	}
	f.ID = rapid.Uint32Range(0, largest).Draw(t, "id")
	f.DLC = uint8(rapid.IntRange(0, longest).Draw(t, "dlc"))
	if kind != "remote" {
		f.Len, _ = frame.LenOfDLC(f.DLC, kind == "FD")
		copy(f.Data[:], rapid.SliceOfN(rapid.Byte(), int(f.Len), int(f.Len)).Draw(t, "data"))
	}
	return f
}

// stampText writes a time in a form that keeps all of it.
func stampText(t *rapid.T, ns int64) string {
	if rapid.IntRange(0, 3).Draw(t, "stamp") == 0 {
		return time.Unix(0, ns).UTC().Format("(2006-01-02 15:04:05.000000000)")
	}
	if ns%1000 == 0 {
		return fmt.Sprintf("(%010d.%06d)", ns/1e9, ns%1e9/1000)
	}
	return fmt.Sprintf("(%d.%09d)", ns/1e9, ns%1e9)
}

// Frames of every kind come back from every form, mixed in one text.
func TestWrittenFramesComeBack(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		var text strings.Builder
		var want []frame.Frame
		var names []string
		for i := range rapid.IntRange(1, 30).Draw(t, "frames") {
			f := anyFrame(t)
			f.Record, f.Offset = int64(i+1), int64(text.Len())
			name := rapid.SampledFrom([]string{"can0", "vcan0", "can_chassis", "a_name_of_16_byt"}).Draw(t, "name")
			if !slices.Contains(names, name) {
				names = append(names, name)
			}
			f.Bus = uint16(slices.Index(names, name))
			want = append(want, f)
			stamp := stampText(t, f.Time)
			if rapid.Bool().Draw(t, "log form") {
				text.WriteString(logText(&f, name, stamp, rapid.Bool().Draw(t, "dotted")))
				text.WriteString(rapid.SampledFrom([]string{"", "", " R", " T"}).Draw(t, "direction"))
			} else {
				text.WriteString(screenText(&f, name, stamp, screenStyle{
					columns: rapid.Bool().Draw(t, "columns"), binary: rapid.Bool().Draw(t, "binary"),
					reversed: rapid.Bool().Draw(t, "reversed"), ascii: rapid.Bool().Draw(t, "ascii"),
				}))
			}
			text.WriteString(rapid.SampledFrom([]string{"\n", "\r\n"}).Draw(t, "end"))
		}
		got, source, rejects, err := readAll(t, strings.NewReader(text.String()), Options{})
		require.NoError(t, err)
		require.Empty(t, rejects)
		require.Equal(t, want, got)
		require.Equal(t, names, source.Interfaces())
	})
}

// Classic frames also come back from the text that the CAN library writes.
func TestLibraryText(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		in := can.Frame{IsExtended: rapid.Bool().Draw(t, "extended"), Length: uint8(rapid.IntRange(0, 8).Draw(t, "length"))}
		in.ID = rapid.Uint32Range(0, map[bool]uint32{false: 1<<11 - 1, true: 1<<29 - 1}[in.IsExtended]).Draw(t, "id")
		copy(in.Data[:], rapid.SliceOfN(rapid.Byte(), int(in.Length), int(in.Length)).Draw(t, "data"))
		frames, _, rejects, err := readAll(t, strings.NewReader("(1.0) can0 "+in.String()+"\n"), Options{})
		require.NoError(t, err)
		require.Empty(t, rejects, in.String())
		got, err := frames[0].ToLibrary()
		require.NoError(t, err)
		require.Equal(t, in, got)
	})
}
