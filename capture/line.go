package capture

import (
	"bytes"
	"fmt"
	"math"
	"time"

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

// peek is the byte at the reader's place, 0 at the end.
func (l *lineReader) peek() byte {
	if l.at < len(l.text) {
		return l.text[l.at]
	}
	return 0
}

func (l *lineReader) blanks() {
	for l.peek() == ' ' {
		l.at++
	}
}

// word takes everything up to a blank.
func (l *lineReader) word() []byte {
	start := l.at
	for l.at < len(l.text) && l.text[l.at] != ' ' {
		l.at++
	}
	return l.text[start:l.at]
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

// record reads "(time) iface id#data" or "(time) iface id [len] data".
func (l *lineReader) record(p *parser, f *frame.Frame) *lineError {
	l.blanks()
	f.Time = 0
	if l.peek() == '(' {
		if err := l.time(p, f); err != nil {
			return err
		}
		l.blanks()
	}
	start := l.at
	name := l.word()
	if len(name) == 0 {
		return l.fail(l.at, l.found(l.at), "the name of an interface, such as can0")
	}
	if len(name) > 32 || bytes.ContainsAny(name, "#()[]") || !printable(name) {
		return l.fail(start, "this is no name of an interface", "a name such as can0 between the time and the identifier")
	}
	l.blanks()
	if l.at >= len(l.text) {
		return l.fail(l.at, "the line ends after the interface", "an identifier")
	}
	err := l.frame(f)
	if err != nil {
		return err
	}
	bus, ok := p.ifaces.number(name)
	if !ok {
		return l.fail(start, fmt.Sprintf("this is the interface number %d", maxInterfaces+1), "an honest capture")
	}
	f.Bus = bus
	if p.opts.Times == SincePrevious {
		if f.Time > 0 && p.lastTime > math.MaxInt64-f.Time {
			return l.fail(0, "the times add up to more than can be counted", "fewer or shorter distances")
		}
		f.Time += p.lastTime
		p.lastTime = f.Time
	}
	return nil
}

func printable(name []byte) bool {
	for _, c := range name {
		if c <= ' ' || c > '~' {
			return false
		}
	}
	return true
}

// time reads (seconds.fraction) or (date time.fraction).
func (l *lineReader) time(p *parser, f *frame.Frame) *lineError {
	open := l.at
	l.at++
	start := l.at
	seconds, digits, err := l.digits(18, "a time such as 1699999999.123456")
	if err != nil {
		return err
	}
	if digits == 4 && l.peek() == '-' {
		l.at = start
		if seconds, err = l.date(); err != nil {
			return err
		}
		start = -1
	}
	if seconds >= math.MaxInt64/1_000_000_000 {
		return l.fail(open+1, "the time is beyond what can be counted in nanoseconds", "a time before the year 2262")
	}
	whole := l.at
	fraction := int64(0)
	if l.peek() == '.' {
		l.at++
		var n int
		if fraction, n, err = l.digits(9, "the fraction of the second"); err != nil {
			return err
		}
		for ; n < 9; n++ {
			fraction *= 10
		}
		if start >= 0 && p.opts.Times == AsWritten {
			p.clock.remember(l.text[open:whole+1], seconds)
		}
	}
	if l.peek() != ')' {
		return l.fail(l.at, l.found(l.at), "the closing parenthesis of the time")
	}
	l.at++
	if l.at < len(l.text) && l.text[l.at] != ' ' {
		return l.fail(l.at, l.found(l.at), "a blank after the time")
	}
	f.Time = seconds*1e9 + fraction
	return nil
}

// digits reads one to most decimal digits.
func (l *lineReader) digits(most int, expected string) (v int64, n int, err *lineError) {
	start := l.at
	for c := l.peek(); c >= '0' && c <= '9'; c = l.peek() {
		if n++; n > most {
			return 0, 0, l.fail(start, fmt.Sprintf("the number has more than %d digits", most), expected)
		}
		v = v*10 + int64(c-'0')
		l.at++
	}
	if n == 0 {
		return 0, 0, l.fail(l.at, l.found(l.at), expected)
	}
	return v, n, nil
}

// date reads 2023-11-14 22:13:19 as seconds since 1970, in UTC.
func (l *lineReader) date() (int64, *lineError) {
	const layout = "2006-01-02 15:04:05"
	if len(l.text) < l.at+len(layout) {
		return 0, l.fail(l.at, "the date is cut short", "a date such as 2023-11-14 22:13:19.123456")
	}
	t, err := time.Parse(layout, string(l.text[l.at:l.at+len(layout)]))
	if err != nil || t.Year() < 1970 {
		return 0, l.fail(l.at, "this is no date from 1970 on", "a date such as 2023-11-14 22:13:19.123456")
	}
	l.at += len(layout)
	return t.Unix(), nil
}

// id reads 3 hex digits (11 bits) or 8 (29 bits, or an error frame's class).
func (l *lineReader) id(f *frame.Frame) *lineError {
	start, v, n := l.at, uint32(0), 0
	for x := hexValue[l.peek()]; x < 16 && l.at < len(l.text) && n < 9; x = hexValue[l.peek()] {
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
	case n < 3:
		return l.fail(l.at, "the identifier is cut short: "+l.found(l.at), expected)
	default:
		return l.fail(start, fmt.Sprintf("the identifier has %d digits", n), expected)
	}
	f.ID = v
	return nil
}

// frame reads what stands behind the interface, in either form.
func (l *lineReader) frame(f *frame.Frame) *lineError {
	// The screen form may have columns for the direction and FD flags.
	extra := frame.Flags(0)
	for {
		start := l.at
		w := l.word()
		switch string(w) {
		case "RX", "TX", "-":
		case "B":
			extra |= frame.BitRateSwitch
		case "E":
			extra |= frame.ErrorPassive
		default:
			l.at = start
			w = nil
		}
		if w == nil {
			break
		}
		l.blanks()
	}
	if err := l.id(f); err != nil {
		return err
	}
	switch l.peek() {
	case '#':
		if extra != 0 {
			return l.fail(0, "flag columns stand before a frame in log form", "one form only")
		}
		l.at++
		return l.logData(f)
	case ' ':
		l.blanks()
		if err := l.screenData(f); err != nil {
			return err
		}
		if extra != 0 {
			if !f.Has(frame.FD) {
				return l.fail(0, "flag columns B and E stand before a classic frame", "an FD frame, with a length of two digits")
			}
			f.Flags |= extra
		}
		return nil
	}
	return l.fail(l.at, l.found(l.at), "# and the data, or blanks and the length")
}

// logData reads what stands behind id#.
func (l *lineReader) logData(f *frame.Frame) *lineError {
	if l.peek() == 'R' {
		return l.remote(f)
	}
	most := 8
	if l.peek() == '#' {
		l.at++
		if f.Has(frame.Error) {
			return l.fail(l.at-1, "an error frame can't be FD", "one #")
		}
		flags := hexValue[l.peek()]
		if flags > 7 || l.at >= len(l.text) {
			return l.fail(l.at, l.found(l.at), "the FD flags, a digit from 0 to 7")
		}
		setFD(f, flags)
		l.at++
		most = frame.MaxLen
	}
	start := l.at
	n := 0
	for {
		hi := hexValue[l.peek()]
		if l.at >= len(l.text) || hi > 15 {
			break
		}
		if n == most {
			return l.fail(l.at, fmt.Sprintf("the data has more than %d bytes", most), "the line's end")
		}
		l.at++
		lo := hexValue[l.peek()]
		if l.at >= len(l.text) || lo > 15 {
			return l.fail(l.at, "half a byte: "+l.found(l.at), "a second hex digit")
		}
		f.Data[n] = hi<<4 | lo
		n++
		l.at++
		if l.peek() == '.' {
			l.at++
			if l.at >= len(l.text) || hexValue[l.peek()] > 15 {
				return l.fail(l.at, l.found(l.at), "a hex digit after the dot")
			}
		}
	}
	if !setLen(f, n) {
		return l.fail(start, fmt.Sprintf("an FD frame can't have %d bytes", n), "0 to 8, 12, 16, 20, 24, 32, 48 or 64 bytes")
	}
	if l.peek() == '_' {
		if err := l.rawDLC(f); err != nil {
			return err
		}
	}
	return l.logEnd()
}

func setFD(f *frame.Frame, flags uint8) {
	f.Flags |= frame.FD
	if flags&1 != 0 {
		f.Flags |= frame.BitRateSwitch
	}
	if flags&2 != 0 {
		f.Flags |= frame.ErrorPassive
	}
}

// setLen sets the length and its code; it reports whether a frame can have it.
func setLen(f *frame.Frame, n int) bool {
	dlc, ok := frame.DLCOfLen(n, f.Has(frame.FD))
	f.Len, f.DLC = uint8(n), dlc
	return ok
}

// rawDLC reads the length code of a classic frame of 8 bytes behind _, a hex
// digit from 9 to F.
func (l *lineReader) rawDLC(f *frame.Frame) *lineError {
	l.at++
	dlc := hexValue[l.peek()]
	if l.at >= len(l.text) || dlc < 9 || dlc > 15 || f.Has(frame.FD) || f.DLC != 8 {
		return l.fail(l.at, l.found(l.at), "a length code from 9 to F, behind 8 bytes of a classic frame")
	}
	f.DLC = dlc
	l.at++
	return nil
}

// remote reads R with an optional length code.
func (l *lineReader) remote(f *frame.Frame) *lineError {
	if f.Has(frame.Error) {
		return l.fail(l.at, "an error frame can't be a remote request", "its data")
	}
	l.at++
	f.Flags |= frame.Remote
	f.Len, f.DLC = 0, 0
	if c := l.peek(); c >= '0' && c <= '8' {
		f.DLC = c - '0'
		l.at++
		if l.peek() == '_' {
			if err := l.rawDLC(f); err != nil {
				return err
			}
		}
	}
	return l.logEnd()
}

// logEnd takes an optional direction (R or T) and the line's end.
func (l *lineReader) logEnd() *lineError {
	if l.peek() == ' ' {
		l.blanks()
		if c := l.peek(); c == 'R' || c == 'T' {
			l.at++
			l.blanks()
		}
	}
	if l.at < len(l.text) {
		return l.fail(l.at, l.found(l.at), "a hex digit or the line's end")
	}
	return nil
}

// screenData reads [length] and the data in columns.
func (l *lineReader) screenData(f *frame.Frame) *lineError {
	open := l.at
	closing := byte(']')
	switch l.peek() {
	case '[':
	case '{':
		closing = '}'
	default:
		return l.fail(l.at, l.found(l.at), "the length in brackets, such as [8]")
	}
	l.at++
	start := l.at
	length := 0
	for hexValue[l.peek()] < 16 && l.at < len(l.text) && l.at-start < 3 {
		if closing == '}' {
			length = length*16 + int(hexValue[l.peek()])
		} else if c := l.peek(); c <= '9' {
			length = length*10 + int(c-'0')
		} else {
			return l.fail(l.at, l.found(l.at), "a length in decimal digits")
		}
		l.at++
	}
	digits := l.at - start
	if digits == 0 || digits > 2 || l.peek() != closing {
		return l.fail(open, "this is no length", "a length in brackets, such as [8], or [16] of an FD frame")
	}
	l.at++
	var dlc uint8
	switch {
	case closing == '}': // the raw length code of a classic frame
		if digits != 1 || length > 15 {
			return l.fail(start, "this is no length code", "a hex digit")
		}
		dlc, length = uint8(length), min(length, 8)
	case digits == 2: // classic lengths have one digit
		if f.Has(frame.Error) {
			return l.fail(start, "an error frame can't be FD", "a length of one digit")
		}
		f.Flags |= frame.FD
	}
	if length > 8 && !f.Has(frame.FD) || !setLen(f, length) {
		return l.fail(start, fmt.Sprintf("no such frame has %d bytes", length), "a length that a frame can have")
	}
	if dlc > 8 {
		f.DLC = dlc
	}
	l.blanks()
	if rest := l.text[l.at:]; bytes.HasPrefix(rest, []byte("remote request")) {
		if f.Flags&(frame.FD|frame.Error) != 0 {
			return l.fail(l.at, "neither FD nor error frames can be remote requests", "its data")
		}
		f.Flags |= frame.Remote
		f.Len = 0
		l.at += len("remote request")
		return l.screenEnd()
	}
	for i := range length {
		if i > 0 {
			if c := l.peek(); c != ' ' && c != '.' {
				return l.fail(l.at, l.found(l.at), fmt.Sprintf("byte %d of %d", i+1, length))
			}
			l.at++
			l.blanks()
		}
		hi := hexValue[l.peek()]
		if l.at >= len(l.text) || hi > 15 {
			return l.fail(l.at, l.found(l.at), fmt.Sprintf("byte %d of %d in two hex digits", i+1, length))
		}
		l.at++
		lo := hexValue[l.peek()]
		if l.at >= len(l.text) || lo > 15 {
			return l.fail(l.at, l.found(l.at), fmt.Sprintf("the second hex digit of byte %d", i+1))
		}
		l.at++
		f.Data[i] = hi<<4 | lo
	}
	return l.screenEnd()
}

// screenEnd takes what may stand behind the data: the bytes as characters in
// quotes, or the word ERRORFRAME.
func (l *lineReader) screenEnd() *lineError {
	l.blanks()
	rest := l.text[l.at:]
	switch {
	case len(rest) == 0, bytes.Equal(bytes.TrimRight(rest, " "), []byte("ERRORFRAME")):
		return nil
	case len(rest) >= 2 && rest[0] == '\'' && rest[len(rest)-1] == '\'', len(rest) >= 2 && rest[0] == '`' && rest[len(rest)-1] == '`':
		return nil
	}
	return l.fail(l.at, l.found(l.at), "the line's end, after as many bytes as the length says")
}
