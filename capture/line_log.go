package capture

import (
	"fmt"

	"busloom/frame"
)

// logData reads what stands behind id#.
func (l *lineReader) logData(f *frame.Frame) *lineError {
	if l.peek() == 'R' {
		return l.remote(f)
	}
	most := 8
	if l.peek() == '#' {
		if f.Has(frame.Error) {
			return l.fail(l.at, "an error frame can't be FD", "one #")
		}
		l.at++
		flags := l.hex()
		if flags > 7 {
			return l.unexpected("the FD flags, a digit from 0 to 7")
		}
		setFD(f, flags)
		l.at++
		most = frame.MaxLen
	}
	start := l.at
	n := 0
	for {
		// A dot may part the bytes, and the FD flags from the first byte.
		if l.peek() == '.' {
			l.at++
			if l.hex() > 15 {
				return l.unexpected("a hex digit after the dot")
			}
		}
		if l.hex() > 15 {
			break
		}
		if n == most {
			return l.fail(l.at, fmt.Sprintf("the data has more than %d bytes", most), "the line's end")
		}
		var err *lineError
		if f.Data[n], err = l.hexByte(nil); err != nil { // its first digit is known
			return err
		}
		n++
	}
	if !setLen(f, n) {
		return l.fail(start, fmt.Sprintf("an FD frame can't have %d bytes", n), "0 to 8, 12, 16, 20, 24, 32, 48 or 64 bytes")
	}
	if l.peek() == '_' {
		if err := l.rawDLC(f); err != nil {
			return err
		}
		return l.logEnd("the line's end")
	}
	return l.logEnd("a hex digit or the line's end")
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

// rawDLC reads the length code of a classic frame of 8 bytes behind _, a hex
// digit from 9 to F.
func (l *lineReader) rawDLC(f *frame.Frame) *lineError {
	if f.Has(frame.FD) || f.DLC != 8 {
		return l.fail(l.at, "only classic frames of 8 bytes have a length code of their own", "the line's end")
	}
	l.at++
	dlc := l.hex()
	if dlc < 9 || dlc > 15 {
		return l.unexpected("a length code from 9 to F")
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
	c := l.peek()
	if c < '0' || c > '8' {
		return l.logEnd("a length from 0 to 8 or the line's end")
	}
	f.DLC = c - '0'
	l.at++
	if l.peek() == '_' {
		if err := l.rawDLC(f); err != nil {
			return err
		}
	}
	return l.logEnd("the line's end")
}

// logEnd takes an optional direction (R or T) and the line's end.
func (l *lineReader) logEnd(expected string) *lineError {
	if l.blanks() {
		expected = "R, T or the line's end"
		if c := l.peek(); c == 'R' || c == 'T' {
			l.at++
			l.blanks()
			expected = "the line's end"
		}
	}
	if l.at < len(l.text) {
		return l.unexpected(expected)
	}
	return nil
}
