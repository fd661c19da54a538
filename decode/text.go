package decode

import (
	"math"
	"strconv"
	"unicode/utf8"

	"busloom/bits"
	"busloom/frame"
	"busloom/schema"
)

// AppendText appends what a value is, for people: a number, a word, text, or
// bytes in hex. f is the value's frame.
func (s *Signal) AppendText(dst []byte, v *Value, f *frame.Frame) []byte {
	switch v.State {
	case Number:
		return s.AppendNumber(dst, v)
	case Word, Coded:
		return append(dst, s.Text(v)...)
	case Text:
		return s.AppendString(dst, f)
	case Octets:
		return s.appendHex(dst, f)
	case Unknown:
		return appendRaw(append(dst, "unknown "...), v.Raw)
	case NotFinite:
		return append(dst, "not finite"...)
	case NoValue:
		return append(dst, "beyond the curve"...)
	case Missing:
		return append(dst, "missing"...)
	}
	return dst
}

func appendRaw(dst []byte, raw uint64) []byte {
	return strconv.AppendUint(append(dst, "0x"...), raw, 16)
}

// AppendString appends a text signal's characters: without its fill bytes at
// the end, and with anything that isn't a character of its encoding replaced
// by U+FFFD.
func (s *Signal) AppendString(dst []byte, f *frame.Frame) []byte {
	var buf [frame.MaxLen]byte
	text := s.octets(buf[:0], f)
	for len(text) > 0 && len(s.fill) > 0 && text[len(text)-1] == s.fill[0] {
		text = text[:len(text)-1]
	}
	if s.kind == schema.TextASCII {
		for _, c := range text {
			if c >= utf8.RuneSelf {
				dst = utf8.AppendRune(dst, utf8.RuneError)
			} else {
				dst = append(dst, c)
			}
		}
		return dst
	}
	for len(text) > 0 {
		r, n := utf8.DecodeRune(text)
		dst = utf8.AppendRune(dst, r)
		text = text[n:]
	}
	return dst
}

// octets appends the bytes of a text or bytes signal, heaviest first.
func (s *Signal) octets(dst []byte, f *frame.Frame) []byte {
	dst = bits.AppendBytes(dst, f.Data[:], s.place)
	if s.toEnd {
		dst = append(dst, f.Data[min(s.rest, int(f.Len)):f.Len]...)
	}
	return dst
}

const hexDigits = "0123456789ABCDEF"

func (s *Signal) appendHex(dst []byte, f *frame.Frame) []byte {
	var buf [frame.MaxLen]byte
	for _, b := range s.octets(buf[:0], f) {
		dst = append(dst, hexDigits[b>>4], hexDigits[b&15])
	}
	return dst
}

// appendFloat appends the shortest decimal that reads back as the same float,
// without an exponent.
func appendFloat(dst []byte, raw uint64, width int) []byte {
	x := bits.Float(raw, width)
	if x == 0 {
		return append(dst, '0')
	}
	switch width {
	case 16:
		// The fewest digits that read back to the same half.
		var buf [32]byte
		for n := range 5 {
			if y := readBack(strconv.AppendFloat(buf[:0], x, 'e', n, 64)); bits.PutFloat(y, 16) == raw {
				return strconv.AppendFloat(dst, y, 'f', -1, 64)
			}
		}
		return strconv.AppendFloat(dst, x, 'f', -1, 64)
	case 32:
		return strconv.AppendFloat(dst, x, 'f', -1, 32)
	}
	return strconv.AppendFloat(dst, x, 'f', -1, 64)
}

// readBack reads d.ddde±xx of at most five digits, as halves have them; digits
// and power are exact in floating point, so the result is the nearest.
func readBack(text []byte) float64 {
	digits, power, sign := 0.0, 0, 1.0
	point := false
	for i, c := range text {
		switch {
		case c == '-':
			sign = -1
		case c == '.':
			point = true
		case c == 'e':
			exponent := int(text[i+2]-'0')*10 + int(text[i+3]-'0')
			if text[i+1] == '-' {
				exponent = -exponent
			}
			power += exponent
			if power < 0 {
				return sign * digits / math.Pow10(-power)
			}
			return sign * digits * math.Pow10(power)
		default:
			digits = digits*10 + float64(c-'0')
			if point {
				power--
			}
		}
	}
	return sign * digits
}
