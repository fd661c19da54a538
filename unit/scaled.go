package unit

import (
	"bytes"
	"encoding/binary"
	"math/big"
	"math/bits"
	"slices"
)

// MaxDecimals is the largest number of decimals that AppendScaled takes.
const MaxDecimals = 18

// The longest text, -9.223372036854775808, has 21 bytes. A place masked by
// scaledMask needs no bounds check, nor does the one behind it.
const (
	scaledMask = 31
	scaledRoom = scaledMask + 2
)

// powers of ten, as far as 64 bits go.
var powers = [...]uint64{1, 10, 100, 1e3, 1e4, 1e5, 1e6, 1e7, 1e8, 1e9, 1e10, 1e11, 1e12, 1e13, 1e14, 1e15, 1e16, 1e17, 1e18, 1e19}

// inverses are 2^64 / 10^n, rounded up. Dividing by multiplication is exact as
// long as u * (inverse * 10^n - 2^64) stays below 2^64: here u is below 2^32 and
// the factor below 10^9.
var inverses = [...]uint64{
	0, ones64/10 + 1, ones64/100 + 1, ones64/1_000 + 1, ones64/10_000 + 1, ones64/100_000 + 1,
	ones64/1_000_000 + 1, ones64/10_000_000 + 1, ones64/100_000_000 + 1, ones64/1_000_000_000 + 1,
}

const ones64 = 1<<64 - 1

const digitPairs = "00010203040506070809" +
	"10111213141516171819" +
	"20212223242526272829" +
	"30313233343536373839" +
	"40414243444546474849" +
	"50515253545556575859" +
	"60616263646566676869" +
	"70717273747576777879" +
	"80818283848586878889" +
	"90919293949596979899"

// AppendScaled appends coef / 10^decimals (decimals 0 to MaxDecimals): the
// shortest exact decimal, without exponent, trailing zeros or minus zero. Bytes
// of dst behind its length may be overwritten beyond the text.
func AppendScaled(dst []byte, coef int64, decimals int) []byte {
	n := len(dst)
	if cap(dst)-n < scaledRoom {
		dst = slices.Grow(dst, scaledRoom)
	}
	b := (*[scaledRoom]byte)(dst[n : n+scaledRoom])
	at := 0
	u := uint64(coef)
	if coef < 0 {
		b[0] = '-'
		at = 1
		u = -u
	}
	if decimals == 0 {
		if u < 1e8 {
			return dst[:n+put8(b, at, u)]
		}
		return dst[:n+putUint(b, at, u)]
	}
	p := powers[decimals]
	var whole uint64
	if u>>32 == 0 && decimals < len(inverses) {
		whole, _ = bits.Mul64(u, inverses[decimals])
	} else {
		whole = u / p
	}
	at = putUint(b, at, whole)
	fraction := u - whole*p
	if fraction == 0 {
		return dst[:n+at]
	}
	b[at&scaledMask] = '.'
	at += decimals + 1
	putDigits(b, at, decimals, fraction)
	for b[(at-1)&scaledMask] == '0' { // ends: the fraction isn't zero
		at--
	}
	return dst[:n+at]
}

// digits8 is the eight decimal digits of u (below 1e8), one in each byte, the
// first in the lightest. It halves all parts at once: eight digits into two
// times four, four times two, eight times one. The factors are 1/100 and 1/10
// in fixed point, exact for parts of four and two digits.
func digits8(u uint64) uint64 {
	high := u / 10000
	fours := high | (u-high*10000)<<32
	hundreds := fours * 10486 >> 20 & 0x0000007f_0000007f
	twos := hundreds | (fours-hundreds*100)<<16
	tens := twos * 103 >> 10 & 0x000f_000f_000f_000f
	return tens | (twos-tens*10)<<8
}

// ascii8 makes digits of digits8 letters.
const ascii8 = 0x30303030_30303030

// put8 writes u (below 1e8) from at on, without a branch on its length, and
// returns where it ends.
func put8(b *[scaledRoom]byte, at int, u uint64) int {
	d := digits8(u)
	zeros := bits.TrailingZeros64(d|1<<56) &^ 7 // of the front; the last digit stays
	store8(b, at, (d|ascii8)>>zeros)
	return at + 8 - zeros/8
}

// store8 writes eight bytes from at (below 16) on.
func store8(b *[scaledRoom]byte, at int, d uint64) {
	binary.LittleEndian.PutUint64(b[at&15:at&15+8], d)
}

// putUint writes u from at on and returns where it ends.
func putUint(b *[scaledRoom]byte, at int, u uint64) int {
	var n int
	switch {
	case u < 10:
		b[at&scaledMask] = byte('0' + u)
		return at + 1
	case u < 100:
		n = 2
	case u < 1000:
		n = 3
	case u < 10000:
		n = 4
	default:
		n = bits.Len64(u) * 1233 >> 12 // log10(2): right, or a digit short
		if u >= powers[n] {
			n++
		}
	}
	putDigits(b, at+n, n, u)
	return at + n
}

// putDigits writes the last n digits of u so that they end before end.
func putDigits(b *[scaledRoom]byte, end, n int, u uint64) {
	for ; n >= 2; n -= 2 {
		q := u / 100
		pair := (u - q*100) * 2
		u = q
		end -= 2
		at := end & scaledMask
		b[at], b[at+1] = digitPairs[pair], digitPairs[pair+1]
	}
	if n == 1 {
		b[(end-1)&scaledMask] = byte('0' + u)
	}
}

// AppendScaledBig is AppendScaled for numbers of any size and any number of
// decimals from 0 up.
func AppendScaledBig(dst []byte, coef *big.Int, decimals int) []byte {
	if coef.IsInt64() && decimals <= MaxDecimals {
		return AppendScaled(dst, coef.Int64(), decimals)
	}
	if coef.Sign() < 0 {
		dst = append(dst, '-')
	}
	text := new(big.Int).Abs(coef).Append(nil, 10)
	if missing := decimals + 1 - len(text); missing > 0 {
		text = append(bytes.Repeat([]byte{'0'}, missing), text...)
	}
	whole, fraction := text[:len(text)-decimals], bytes.TrimRight(text[len(text)-decimals:], "0")
	dst = append(dst, whole...)
	if len(fraction) > 0 {
		dst = append(append(dst, '.'), fraction...)
	}
	return dst
}
