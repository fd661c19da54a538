package capture

import (
	"encoding/binary"
	"math/bits"

	"busloom/frame"
)

// The fast path reads the commonest line, "(seconds.micros) iface id#data",
// eight bytes at a time. It gives up on anything else, and then the general
// parser reads the line: it must never accept what that one rejects, nor read
// it otherwise (FuzzLogForm holds both together).

// slack is how many bytes behind a block may be looked at.
const slack = 32

const (
	ones64  = 0x0101010101010101
	highs64 = 0x8080808080808080
)

// clock is the part of a time up to its point, as the last line had it.
type clock struct {
	word0, word1 uint64 // the bytes "(1699999999."
	mask0, mask1 uint64
	length       int
	ns           int64 // of the whole seconds
}

// remember keeps the text of a time's whole part for the lines to come.
func (c *clock) remember(text []byte, seconds int64) {
	if c.length == len(text) && c.ns == seconds*1e9 {
		return // as many digits of the same value are the same text
	}
	if len(text) > 16 {
		c.length = 0
		return
	}
	var w, m [16]byte
	for i, b := range text {
		w[i], m[i] = b, 0xFF
	}
	le := binary.LittleEndian
	*c = clock{le.Uint64(w[:]), le.Uint64(w[8:]), le.Uint64(m[:]), le.Uint64(m[8:]), len(text), seconds * 1e9}
}

// fastReach is how far fastLine looks beyond a line's first byte: time 16+11,
// name 16, identifier 9, data 16, end 4, and a word more; fastFD looks by itself.
const fastReach = 96

// fastLine reads the line that begins at b[at]; b reaches slack bytes beyond
// the block. It returns the place after the line's end, which may be beyond the
// block, or 0 if the line is for the general parser.
func (p *parser) fastLine(b []byte, at int, f *frame.Frame) int {
	le := binary.LittleEndian
	c := &p.clock
	// Time: the same second as the line before, then 6 digits, ") ".
	if c.length == 0 || at+fastReach > len(b) {
		return 0
	}
	if le.Uint64(b[at:])&c.mask0 != c.word0 || le.Uint64(b[at+8:])&c.mask1 != c.word1 {
		return 0
	}
	at += c.length
	w := le.Uint64(b[at:])
	if w>>48 == ')'|' '<<8 {
		micros, ok := eightDigits(w<<16 | 0x3030)
		if !ok {
			return 0
		}
		f.Time = c.ns + int64(micros)*1000
		at += 8
	} else {
		// Or 9 digits.
		most, ok := eightDigits(w)
		last := b[at+8] - '0'
		if !ok || last > 9 || b[at+9] != ')' || b[at+10] != ' ' {
			return 0
		}
		f.Time = c.ns + int64(most)*10 + int64(last)
		at += 11
	}

	// Interface: names of one length are padded to that of the longest.
	for b[at] == ' ' {
		if at++; at+fastReach > len(b) {
			return 0
		}
	}
	w = le.Uint64(b[at:])
	end := firstBlank(w)
	if end != 0 {
		length := bits.TrailingZeros64(end) &^ 7
		name := w & (1<<length - 1)
		s := &p.ifaces.short[slot(name)]
		if s.word0 != name || s.word1 != 0 || name == 0 { // an empty slot has no name
			return 0
		}
		f.Bus = s.bus
		at += length>>3 + 1
	} else {
		more := le.Uint64(b[at+8:])
		if end = firstBlank(more); end == 0 {
			return 0
		}
		length := bits.TrailingZeros64(end) &^ 7
		more &= 1<<length - 1
		s := &p.ifaces.short[slot(w^more)]
		if s.word0 != w || s.word1 != more || w == 0 {
			return 0
		}
		f.Bus = s.bus
		at += 8 + length>>3 + 1
	}

	// Identifier: 3 or 8 hex digits and #.
	w = le.Uint64(b[at:])
	if byte(w>>24) == '#' {
		x, y, z := hexValue[byte(w)], hexValue[byte(w>>8)], hexValue[byte(w>>16)]
		if x > 7 || y|z > 15 {
			return 0
		}
		f.ID = uint32(x)<<8 | uint32(y)<<4 | uint32(z)
		f.Flags = 0
		at += 4
	} else {
		v, n := hexWord(w)
		id := bits.ReverseBytes32(v)
		if n < 8 || b[at+8] != '#' || id > 0x1FFFFFFF {
			return 0
		}
		f.ID = id
		f.Flags = frame.Extended
		at += 9
	}
	if b[at] == '#' {
		return p.fastFD(b, at+1, f)
	}

	// Data: up to 16 hex digits and the line's end.
	lo, n := hexWord(le.Uint64(b[at:]))
	if n == 8 {
		hi, m := hexWord(le.Uint64(b[at+8:]))
		le.PutUint64(f.Data[:8], uint64(lo)|uint64(hi)<<32)
		n += m
	} else {
		le.PutUint32(f.Data[:4], lo)
	}
	at += n
	if n&1 != 0 {
		return 0
	}
	f.Len, f.DLC = uint8(n/2), uint8(n/2)
	if b[at] == '\n' {
		return at + 1
	}
	return fastEnd(b, at)
}

// eightDigits is the value of eight decimal digits, first one lightest in w.
func eightDigits(w uint64) (v uint64, ok bool) {
	ok = (w&0xF0F0F0F0F0F0F0F0)|((w+0x0606060606060606)&0xF0F0F0F0F0F0F0F0)>>4 == 0x3333333333333333
	w = (w & 0x0F0F0F0F0F0F0F0F) * 2561 >> 8
	w = (w & 0x00FF00FF00FF00FF) * 6553601 >> 16
	return (w & 0x0000FFFF0000FFFF) * 42949672960001 >> 32, ok
}

// firstBlank has its lowest bit at the top of the first blank of w; 0 if there
// is none.
func firstBlank(w uint64) uint64 {
	blank := w ^ ones64*' '
	return (blank - ones64) &^ blank & highs64
}

// fastEnd takes what may stand before the line's end: a direction, a CR.
func fastEnd(b []byte, at int) int {
	if b[at] == ' ' && (b[at+1] == 'R' || b[at+1] == 'T') {
		at += 2
	}
	if b[at] == '\r' {
		at++
	}
	if b[at] != '\n' {
		return 0
	}
	return at + 1
}

// fastFD reads the flags and the data of an FD frame.
func (p *parser) fastFD(b []byte, at int, f *frame.Frame) int {
	le := binary.LittleEndian
	flags := hexValue[b[at]]
	if flags > 7 {
		return 0
	}
	f.Flags |= frame.FD
	if flags&1 != 0 {
		f.Flags |= frame.BitRateSwitch
	}
	if flags&2 != 0 {
		f.Flags |= frame.ErrorPassive
	}
	at++
	length := 0
	for at+16 <= len(b) {
		v, n := hexWord(le.Uint64(b[at:]))
		if length+4 > frame.MaxLen {
			if n != 0 {
				return 0
			}
		} else {
			le.PutUint32(f.Data[length:length+4], v)
		}
		at += n
		if n&1 != 0 {
			return 0
		}
		length += n / 2
		if n < 8 {
			break
		}
	}
	dlc, ok := frame.DLCOfLen(length, true)
	if !ok || at+4 > len(b) {
		return 0
	}
	f.Len, f.DLC = uint8(length), dlc
	return fastEnd(b, at)
}

// hexWord reads the hex digits at the start of 8 bytes (first byte lightest):
// n is how many there are, v their value, first pair lightest. Nibbles behind
// the nth digit are undefined.
func hexWord(w uint64) (v uint32, n int) {
	digit := w ^ 0x3030303030303030
	letter := (w | 0x2020202020202020) ^ 0x6060606060606060
	// A byte's high bit is set where it is no digit (digit > 9) and no letter
	// (letter is 0 or > 6), or not ASCII at all.
	bad := ((digit+0x7676767676767676)&(letter+0x7979797979797979|^(letter+0x7F7F7F7F7F7F7F7F)) | w) & highs64
	n = bits.TrailingZeros64(bad) >> 3
	x := w&0x0F0F0F0F0F0F0F0F + w>>6&ones64*9
	x = (x<<4 | x>>8) & 0x00FF00FF00FF00FF
	x = (x | x>>8) & 0x0000FFFF0000FFFF
	return uint32(x | x>>16), n
}

// hexValue has the value of each hex digit and 255 for any other byte.
var hexValue = func() (t [256]uint8) {
	for i := range t {
		switch c := byte(i); {
		case c >= '0' && c <= '9':
			t[i] = c - '0'
		case c >= 'a' && c <= 'f':
			t[i] = c - 'a' + 10
		case c >= 'A' && c <= 'F':
			t[i] = c - 'A' + 10
		default:
			t[i] = 255
		}
	}
	return t
}()
