package bits_test

import (
	"math/big"

	"pgregory.net/rapid"

	"busloom/bits"
)

// walk lists the bits of a run from the definition alone: it numbers all bits
// of the payload in one row, in which the run is unbroken, and goes along it.
// Heavy byte first, the row is 0.7 0.6 .. 0.0 1.7 ..; light byte first, it is
// 0.0 0.1 .. 0.7 1.0 .., walked backwards.
func walk(r bits.Run) []bits.Bit {
	var out []bits.Bit
	if r.Heavy.Byte < r.Light.Byte {
		for n := 8*r.Heavy.Byte + 7 - r.Heavy.Bit; n <= 8*r.Light.Byte+7-r.Light.Bit; n++ {
			out = append(out, bits.Bit{Byte: n / 8, Bit: 7 - n%8})
		}
		return out
	}
	for n := 8*r.Heavy.Byte + r.Heavy.Bit; n >= 8*r.Light.Byte+r.Light.Bit; n-- {
		out = append(out, bits.Bit{Byte: n / 8, Bit: n % 8})
	}
	return out
}

// read is the value of a place, bit by bit.
func read(payload []byte, p bits.Place) *big.Int {
	v := new(big.Int)
	for _, r := range p.Runs {
		for _, b := range walk(r) {
			v.Lsh(v, 1)
			one := new(big.Int).SetBytes(payload[b.Byte : b.Byte+1]).Bit(b.Bit)
			v.Or(v, big.NewInt(int64(one)))
		}
	}
	return v
}

// write is the payload with a value put in, bit by bit.
func write(payload []byte, p bits.Place, v *big.Int) []byte {
	var at []bits.Bit
	for _, r := range p.Runs {
		at = append(at, walk(r)...)
	}
	out := append([]byte(nil), payload...)
	for i, b := range at {
		byteValue := big.NewInt(int64(out[b.Byte]))
		byteValue.SetBit(byteValue, b.Bit, v.Bit(len(at)-1-i))
		out[b.Byte] = byte(byteValue.Uint64())
	}
	return out
}

// drawPlace draws a legal place of 1 to most bits in a payload of size bytes.
func drawPlace(t *rapid.T, size, most int) bits.Place {
	var p bits.Place
	taken := map[bits.Bit]bool{}
	left := most
	for range rapid.IntRange(1, 4).Draw(t, "runs") {
		if left == 0 {
			break
		}
		heavyFirst := rapid.Bool().Draw(t, "heavy byte first")
		width := rapid.IntRange(1, min(left, 8*size)).Draw(t, "width")
		start := rapid.IntRange(0, 8*size-width).Draw(t, "start")
		end := start + width - 1
		r := bits.Run{
			Heavy: bits.Bit{Byte: end / 8, Bit: end % 8},
			Light: bits.Bit{Byte: start / 8, Bit: start % 8},
		}
		if heavyFirst {
			r.Heavy = bits.Bit{Byte: start / 8, Bit: 7 - start%8}
			r.Light = bits.Bit{Byte: end / 8, Bit: 7 - end%8}
		}
		var own []bits.Bit
		for _, b := range walk(r) {
			if !taken[b] {
				own = append(own, b)
			}
		}
		if len(own) < width {
			continue // meets an earlier run
		}
		for _, b := range own {
			taken[b] = true
		}
		p.Runs = append(p.Runs, r)
		left -= width
	}
	return p
}

func drawPayload(t *rapid.T, size int) []byte {
	return rapid.SliceOfN(rapid.Byte(), size, size).Draw(t, "payload")
}
