package capture

import (
	"bytes"
	"fmt"

	"busloom/frame"
)

// lineError is what is wrong with a line; the column counts from 0.
type lineError struct {
	column   int
	problem  string
	expected string
}

// lineReader reads one line of either form with plain code.
type lineReader struct {
	text []byte
	at   int
}

func (l *lineReader) fail(at int, problem, expected string) *lineError {
	return &lineError{at, problem, expected}
}

// unexpected complains of the byte at the reader's place.
func (l *lineReader) unexpected(expected string) *lineError {
	return l.fail(l.at, l.found(l.at), expected)
}

// peek is the byte at the reader's place, 0 at the end.
func (l *lineReader) peek() byte {
	if l.at < len(l.text) {
		return l.text[l.at]
	}
	return 0
}

// atBlank reports whether something stands here that parts words: a blank, a
// tab, or a colour that was meant for a terminal.
func (l *lineReader) atBlank() bool {
	switch l.peek() {
	case ' ', '\t':
		return true
	case escape:
		return colourLen(l.text[l.at:]) > 0
	}
	return false
}

// blanks skips what parts words and reports whether there was anything.
func (l *lineReader) blanks() bool {
	start := l.at
	for l.at < len(l.text) {
		switch c := l.text[l.at]; {
		case c == ' ' || c == '\t':
			l.at++
			continue
		case c == escape:
			if n := colourLen(l.text[l.at:]); n > 0 {
				l.at += n
				continue
			}
		}
		break
	}
	return l.at > start
}

const escape = 0x1B

// colourLen is the length of the terminal's colour command that text starts
// with: ESC [ numbers m (ECMA-48, select graphic rendition); 0 if there is none.
func colourLen(text []byte) int {
	if len(text) < 3 || text[0] != escape || text[1] != '[' {
		return 0
	}
	for i, c := range text[2:] {
		switch {
		case c == 'm':
			return i + 3
		case c != ';' && (c < '0' || c > '9'):
			return 0
		}
	}
	return 0
}

// word takes everything up to a blank.
func (l *lineReader) word() []byte {
	start := l.at
	for l.at < len(l.text) && !l.atBlank() {
		l.at++
	}
	return l.text[start:l.at]
}

// hex is the value of the hex digit at the reader's place, above 15 if none
// stands there.
func (l *lineReader) hex() uint8 {
	if l.at < len(l.text) {
		return hexValue[l.text[l.at]]
	}
	return 255
}

// found describes the byte at a place for a message.
func (l *lineReader) found(at int) string {
	if at >= len(l.text) {
		return "the line ends here"
	}
	c := l.text[at]
	if c < ' ' || c > '~' {
		return fmt.Sprintf("the byte 0x%02X stands here", c)
	}
	return fmt.Sprintf("%q stands here", c)
}

// longestName is the longest name of an interface; Linux has 15 bytes at most
// (IFNAMSIZ), other writers may have longer ones.
const longestName = 32

// record reads "(time) iface id#data" or "(time) iface id [len] data".
func (l *lineReader) record(p *parser, f *frame.Frame) *lineError {
	l.blanks()
	f.Time = 0
	if l.peek() == '(' {
		if err := l.time(p, f); err != nil {
			return err
		}
		l.blanks()
	} else if p.opts.Times == SincePrevious {
		f.Time = p.lastTime
	}
	start := l.at
	name := l.word()
	if len(name) == 0 {
		return l.fail(l.at, l.found(l.at), "the name of an interface, such as can0")
	}
	if bad := badInName(name); bad >= 0 {
		return l.fail(start+bad, "this is no name of an interface", "a name such as can0 between the time and the identifier")
	}
	l.blanks()
	if l.at >= len(l.text) {
		return l.fail(l.at, "the line ends after the interface", "an identifier")
	}
	if err := l.frame(f); err != nil {
		return err
	}
	bus, ok := p.ifaces.number(name)
	if !ok {
		return l.fail(start, fmt.Sprintf("this is the interface number %d", maxInterfaces+1), fmt.Sprintf("one of the %d interfaces seen so far", maxInterfaces))
	}
	f.Bus = bus
	return nil
}

// badInName is the place of the first byte that can't be in the name of an
// interface, or -1.
func badInName(name []byte) int {
	for i, c := range name {
		if i == longestName || c <= ' ' || c > '~' || bytes.IndexByte([]byte("#()[]"), c) >= 0 {
			return i
		}
	}
	return -1
}

// frame reads what stands behind the interface, in either form.
func (l *lineReader) frame(f *frame.Frame) *lineError {
	// The screen form may have columns for the direction and FD flags.
	extra, extraAt := frame.Flags(0), 0
	for {
		start := l.at
		flag := frame.Flags(0)
		switch string(l.word()) {
		case "RX", "TX", "-":
		case "B":
			flag = frame.BitRateSwitch
		case "E":
			flag = frame.ErrorPassive
		default:
			l.at = start
			return l.identified(f, extra, extraAt)
		}
		if flag != 0 && extra == 0 {
			extraAt = start
		}
		extra |= flag
		l.blanks()
	}
}

// identified reads the identifier and what follows; extra are the flags that
// stood in columns before it.
func (l *lineReader) identified(f *frame.Frame, extra frame.Flags, extraAt int) *lineError {
	if err := l.id(f); err != nil {
		return err
	}
	switch {
	case l.peek() == '#':
		if extra != 0 {
			return l.fail(extraAt, "a flag column stands before a frame in log form", "the identifier")
		}
		l.at++
		return l.logData(f)
	case l.blanks():
		if err := l.screenData(f); err != nil {
			return err
		}
		if extra != 0 && !f.Has(frame.FD) {
			return l.fail(extraAt, "a flag of CAN FD stands before a classic frame", "- in both columns, or a length of two digits")
		}
		f.Flags |= extra
		return nil
	}
	return l.unexpected("# and the data, or blanks and the length")
}

// id reads 3 hex digits (11 bits) or 8 (29 bits, or an error frame's class).
func (l *lineReader) id(f *frame.Frame) *lineError {
	start, v, n := l.at, uint32(0), 0
	for x := l.hex(); x < 16 && n < 9; x = l.hex() {
		v = v<<4 | uint32(x)
		n++
		l.at++
	}
	const expected = "an identifier of 3 hex digits (11 bits) or 8 (29 bits)"
	f.Flags = 0
	switch {
	case n == 3 && v <= 0x7FF:
	case n == 8 && v <= 0x1FFFFFFF:
		f.Flags = frame.Extended
	case n == 8 && v>>29 == 1:
		f.Flags = frame.Error
		v &= 0x1FFFFFFF
	case n == 0:
		return l.fail(start, l.found(start), expected)
	case n == 3:
		return l.fail(start, fmt.Sprintf("the identifier %03X needs more than 11 bits", v), expected)
	case n == 8:
		return l.fail(start, fmt.Sprintf("the identifier %08X needs more than 29 bits", v), expected)
	case n < 8:
		return l.fail(l.at, fmt.Sprintf("the identifier ends after %d digits: %s", n, l.found(l.at)), expected)
	default:
		return l.fail(start+8, "the identifier has more than 8 digits", expected)
	}
	f.ID = v
	return nil
}

// hexByte reads two hex digits; expected says what is missing if there are none.
func (l *lineReader) hexByte(expected func() string) (byte, *lineError) {
	hi := l.hex()
	if hi > 15 {
		return 0, l.unexpected(expected())
	}
	l.at++
	lo := l.hex()
	if lo > 15 {
		return 0, l.fail(l.at, "half a byte: "+l.found(l.at), "a second hex digit")
	}
	l.at++
	return hi<<4 | lo, nil
}

// setLen sets the length and its code; it reports whether a frame can have it.
func setLen(f *frame.Frame, n int) bool {
	dlc, ok := frame.DLCOfLen(n, f.Has(frame.FD))
	f.Len, f.DLC = uint8(n), dlc
	return ok
}
