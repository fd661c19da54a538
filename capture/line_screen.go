package capture

import (
	"bytes"
	"fmt"
	"slices"

	"busloom/frame"
)

// screenData reads [length] and the data in columns.
func (l *lineReader) screenData(f *frame.Frame) *lineError {
	length, err := l.screenLength(f)
	if err != nil {
		return err
	}
	parted := l.blanks()
	if request := []byte("remote request"); bytes.HasPrefix(l.text[l.at:], request) {
		if f.Flags&(frame.FD|frame.Error) != 0 {
			return l.fail(l.at, "neither FD nor error frames can be remote requests", "its data")
		}
		f.Flags |= frame.Remote
		f.Len = 0
		l.at += len(request)
		return l.screenEnd(f, false)
	}
	if err := l.screenBytes(f, length); err != nil {
		return err
	}
	return l.screenEnd(f, parted && length == 0)
}

// screenLength reads [length], of two digits for FD frames, or {length code} of
// a classic frame.
func (l *lineReader) screenLength(f *frame.Frame) (int, *lineError) {
	const expected = "the length in brackets, such as [8], or [16] of an FD frame"
	open := l.peek()
	if open != '[' && open != '{' {
		return 0, l.unexpected(expected)
	}
	l.at++
	start := l.at
	if open == '{' {
		dlc := l.hex()
		if dlc > 15 {
			return 0, l.unexpected("a length code in one hex digit")
		}
		l.at++
		if l.peek() != '}' {
			return 0, l.unexpected("the closing brace of the length code")
		}
		l.at++
		f.Len, f.DLC = min(dlc, 8), dlc
		return int(f.Len), nil
	}
	length := 0
	for c := l.peek(); c >= '0' && c <= '9' && l.at < start+2; c = l.peek() {
		length = length*10 + int(c-'0')
		l.at++
	}
	digits := l.at - start
	if digits == 0 {
		return 0, l.unexpected("the length in decimal digits")
	}
	if l.peek() != ']' {
		return 0, l.unexpected("the closing bracket of the length")
	}
	l.at++
	if digits == 2 { // classic lengths have one digit
		if f.Has(frame.Error) {
			return 0, l.fail(start, "an error frame can't be FD", "a length of one digit")
		}
		f.Flags |= frame.FD
	}
	if !setLen(f, length) {
		return 0, l.fail(start, fmt.Sprintf("no such frame has %d bytes", length), "a length that a frame can have")
	}
	return length, nil
}

// screenBytes reads the data: bytes of two hex digits or eight binary ones,
// parted by blanks or dots, or in reverse order and parted by backticks.
func (l *lineReader) screenBytes(f *frame.Frame, length int) *lineError {
	i := l.commonBytes(f, length)
	binary := i == 0 && length > 0 && l.atBinary()
	reversed := false
	for ; i < length; i++ {
		missing := func() string { return fmt.Sprintf("byte %d of %d in %s", i+1, length, digitsOf(binary)) }
		if i > 0 {
			reversed = reversed || i == 1 && l.peek() == '`'
			switch {
			case reversed && l.peek() == '`', !reversed && l.peek() == '.':
				l.at++
			case reversed:
				return l.unexpected("a backtick and " + missing())
			case !l.blanks():
				return l.unexpected(missing())
			}
		}
		var err *lineError
		if binary {
			f.Data[i], err = l.binaryByte(missing)
		} else {
			f.Data[i], err = l.hexByte(missing)
		}
		if err != nil {
			return err
		}
	}
	if reversed {
		slices.Reverse(f.Data[:length])
	}
	return nil
}

// commonBytes reads bytes of two hex digits with one blank between them, as far
// as they go, and returns their number.
func (l *lineReader) commonBytes(f *frame.Frame, length int) int {
	text, at := l.text, l.at
	for i := range length {
		if i > 0 {
			if at >= len(text) || text[at] != ' ' {
				return i
			}
			at++
		}
		if at+2 > len(text) || at+2 < len(text) && hexValue[text[at+2]] < 16 {
			return i
		}
		hi, lo := hexValue[text[at]], hexValue[text[at+1]]
		if hi|lo > 15 {
			return i
		}
		f.Data[i] = hi<<4 | lo
		at += 2
		l.at = at
	}
	return length
}

func digitsOf(binary bool) string {
	if binary {
		return "eight binary digits"
	}
	return "two hex digits"
}

// binaryLen is the length of a byte in binary digits.
const binaryLen = 8

// atBinary reports whether a byte in binary digits stands here. Two hex digits
// can't be taken for it: something parts them from the next two.
func (l *lineReader) atBinary() bool {
	rest := l.text[l.at:]
	return len(rest) >= binaryLen && len(bytes.Trim(rest[:binaryLen], "01")) == 0
}

func (l *lineReader) binaryByte(expected func() string) (byte, *lineError) {
	v := byte(0)
	for range binaryLen {
		c := l.peek()
		if c != '0' && c != '1' {
			return 0, l.unexpected(expected())
		}
		v = v<<1 | (c - '0')
		l.at++
	}
	return v, nil
}

// screenEnd takes what may stand behind the data: the bytes as characters in
// quotes, or, behind error frames, the word ERRORFRAME and any text. parted
// tells that blanks were before.
func (l *lineReader) screenEnd(f *frame.Frame, parted bool) *lineError {
	parted = l.blanks() || parted
	if l.at == len(l.text) {
		return nil
	}
	const expected = "the line's end, after as many bytes as the length says"
	if !parted {
		return l.unexpected(expected)
	}
	end := lineReader{text: l.text, at: l.at}
	if string(end.word()) == "ERRORFRAME" {
		if !f.Has(frame.Error) {
			return l.fail(l.at, "this frame's identifier is not an error frame's", "an identifier with the bit 20000000, or no such word")
		}
		return nil
	}
	if quote := l.peek(); quote == '\'' || quote == '`' {
		end.at = bytes.LastIndexByte(l.text, quote) + 1
		if end.blanks(); end.at == len(l.text) && bytes.LastIndexByte(l.text, quote) > l.at {
			return nil
		}
		return l.fail(len(l.text), "the text in quotes has no end", "a closing quote")
	}
	return l.unexpected(expected)
}
