package bits

import "encoding/binary"

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
type Extractor struct {
	Shape  Shape
	Offset int // first byte of the 8-byte word
	Shift  uint8
	Mask   uint64
	need   int
	pieces []piece
}

// piece is a stretch within one byte, heaviest piece first.
type piece struct {
	at, shift, width uint8
}

// Compile makes the extractor of a legal place of 1 to 64 bits.
func Compile(p Place) Extractor {
	e := Extractor{Shape: Pieces, need: p.LastByte() + 1, Mask: ^uint64(0) >> (64 - p.Width())}
	for _, r := range p.Runs {
		e.pieces = append(e.pieces, r.pieces()...)
	}
	if len(p.Runs) != 1 {
		return e
	}
	r := p.Runs[0]
	low, high := min(r.Heavy.Byte, r.Light.Byte), max(r.Heavy.Byte, r.Light.Byte)
	if high-low >= 8 {
		return e
	}
	// Words of classic frames all start at byte 0, so one load serves all.
	if high >= 8 {
		e.Offset = low
	}
	if r.Heavy.Byte < r.Light.Byte {
		e.Shape = WordBE
		e.Shift = uint8(8*(7-(r.Light.Byte-e.Offset)) + r.Light.Bit)
	} else {
		e.Shape = WordLE
		e.Shift = uint8(8*(r.Light.Byte-e.Offset) + r.Light.Bit)
	}
	return e
}

func (r Run) pieces() []piece {
	if r.Heavy.Byte == r.Light.Byte {
		return []piece{{uint8(r.Heavy.Byte), uint8(r.Light.Bit), uint8(r.Heavy.Bit - r.Light.Bit + 1)}}
	}
	step := 1
	if r.Light.Byte < r.Heavy.Byte {
		step = -1
	}
	out := []piece{{uint8(r.Heavy.Byte), 0, uint8(r.Heavy.Bit + 1)}}
	for b := r.Heavy.Byte + step; b != r.Light.Byte; b += step {
		out = append(out, piece{uint8(b), 0, 8})
	}
	return append(out, piece{uint8(r.Light.Byte), uint8(r.Light.Bit), uint8(8 - r.Light.Bit)})
}

// Need is the payload length in bytes that Raw reads.
func (e *Extractor) Need() int { return e.need }

// Raw takes the value out of a payload of at least Need bytes, right-aligned.
func (e *Extractor) Raw(payload []byte) uint64 {
	if e.Shape == Pieces {
		return e.gather(payload)
	}
	var word uint64
	if len(payload) >= e.Offset+8 {
		w := payload[e.Offset : e.Offset+8]
		if e.Shape == WordLE {
			word = binary.LittleEndian.Uint64(w)
		} else {
			word = binary.BigEndian.Uint64(w)
		}
	} else {
		var w [8]byte
		copy(w[:], payload[e.Offset:])
		if e.Shape == WordLE {
			word = binary.LittleEndian.Uint64(w[:])
		} else {
			word = binary.BigEndian.Uint64(w[:])
		}
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

// Insert puts raw's lowest bits into the place of a payload that reaches it;
// the payload's other bits stay.
func Insert(payload []byte, p Place, raw uint64) {
	left := p.Width()
	for _, r := range p.Runs {
		for _, q := range r.pieces() {
			left -= int(q.width)
			mask := byte(1<<q.width-1) << q.shift
			payload[q.at] = payload[q.at]&^mask | byte(raw>>left<<q.shift)&mask
		}
	}
}

// AppendBytes appends the bytes of a place made of whole bytes (text, raw
// bytes), heaviest byte first.
func AppendBytes(dst, payload []byte, p Place) []byte {
	for _, r := range p.Runs {
		step := 1
		if r.Light.Byte < r.Heavy.Byte {
			step = -1
		}
		for b := r.Heavy.Byte; ; b += step {
			dst = append(dst, payload[b])
			if b == r.Light.Byte {
				break
			}
		}
	}
	return dst
}

// WholeBytes reports whether every run starts at a bit 7 and ends at a bit 0.
func (p Place) WholeBytes() bool {
	for _, r := range p.Runs {
		if r.Heavy.Bit != 7 || r.Light.Bit != 0 {
			return false
		}
	}
	return true
}
