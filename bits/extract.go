package bits

import (
	"encoding/binary"
	"math/bits"
)

// Shape says how an Extractor takes a value out.
type Shape uint8

// The shapes, fastest first.
const (
	// WordLE: one run, light byte first (or within one byte), inside the 8
	// bytes from Offset: (little-endian word >> Shift) & Mask.
	WordLE Shape = iota + 1
	// WordBE: one run, heavy byte first, inside the 8 bytes from Offset:
	// (big-endian word >> Shift) & Mask.
	WordBE
	// Pieces: anything else, byte by byte.
	Pieces
)

// Extractor takes the raw value of one place of up to 64 bits out of payloads.
//
// Offset is 0 for every place within the first 8 bytes, so that one load
// serves all values of a classic frame. Behind them the word ends at the
// place's last byte, so that it never reaches beyond Need.
type Extractor struct {
	Shape  Shape
	Shift  uint8 // 0 to 63
	Offset int   // first byte of the 8-byte word; bytes that a short payload lacks count as 0
	Mask   uint64
	need   int
	pieces []piece
}

// piece is a stretch within one byte.
type piece struct {
	at, shift, width uint8
}

// Compile makes the extractor of a legal place of 1 to 64 bits.
func Compile(p Place) Extractor {
	e := Extractor{need: p.LastByte() + 1, Mask: ^uint64(0) >> (64 - p.Width())}
	if !e.asWord(p) {
		e.Shape = Pieces
		for _, r := range p.Runs {
			for b := r.Heavy.Byte; ; b += r.step() {
				light, width := r.part(b)
				e.pieces = append(e.pieces, piece{uint8(b), uint8(light), uint8(width)})
				if b == r.Light.Byte {
					break
				}
			}
		}
	}
	return e
}

// asWord fills in the word shape of a single run within 8 bytes.
func (e *Extractor) asWord(p Place) bool {
	if len(p.Runs) != 1 {
		return false
	}
	r := p.Runs[0]
	low, high := min(r.Heavy.Byte, r.Light.Byte), max(r.Heavy.Byte, r.Light.Byte)
	if high-low >= 8 {
		return false
	}
	e.Offset = max(0, high-7)
	light := r.Light.Byte - e.Offset
	if r.Heavy.Byte < r.Light.Byte {
		e.Shape = WordBE
		e.Shift = uint8(8*(7-light) + r.Light.Bit)
	} else {
		e.Shape = WordLE
		e.Shift = uint8(8*light + r.Light.Bit)
	}
	return true
}

// Need is the payload length in bytes that Raw reads.
func (e *Extractor) Need() int { return e.need }

// Raw takes the value out of a payload of at least Need bytes, right-aligned.
func (e *Extractor) Raw(payload []byte) uint64 {
	if e.Shape == Pieces {
		return e.gather(payload)
	}
	if len(payload) < e.Offset+8 {
		return e.short(payload)
	}
	word := binary.LittleEndian.Uint64(payload[e.Offset:])
	if e.Shape == WordBE {
		word = bits.ReverseBytes64(word)
	}
	return word >> (e.Shift & 63) & e.Mask
}

// short is Raw of a payload that has fewer than 8 bytes from Offset on.
func (e *Extractor) short(payload []byte) uint64 {
	var w [8]byte
	copy(w[:], payload[e.Offset:])
	word := binary.LittleEndian.Uint64(w[:])
	if e.Shape == WordBE {
		word = bits.ReverseBytes64(word)
	}
	return word >> (e.Shift & 63) & e.Mask
}

func (e *Extractor) gather(payload []byte) uint64 {
	var v uint64
	for _, p := range e.pieces {
		v = v<<p.width | uint64(payload[p.at])>>p.shift&(1<<p.width-1)
	}
	return v
}
