package crc

import (
	"fmt"
	"math/bits"
)

// Engine computes one CRC, a table look-up per byte. It is safe for use from
// several goroutines: the register is the caller's.
type Engine struct {
	p     Params
	mask  uint64
	table [256]uint64
}

// Validate reports parameters that no CRC has, for the user and without
// position.
func (p Params) Validate() error {
	if p.Width < 1 || p.Width > 64 {
		return fmt.Errorf("a CRC has 1 to 64 bits, not %d", p.Width)
	}
	m := widthMask(p.Width)
	switch {
	case p.Poly&^m != 0:
		return fmt.Errorf("the polynomial 0x%X needs more than %d bits (its top bit isn't written)", p.Poly, p.Width)
	case p.Poly&1 == 0:
		if turned := reflect(p.Poly, p.Width); turned&1 != 0 {
			return fmt.Errorf("the polynomial 0x%X has no constant term: written heaviest bit first its lightest bit is 1, as in 0x%X", p.Poly, turned)
		}
		return fmt.Errorf("the polynomial 0x%X has no constant term: its lightest bit must be 1", p.Poly)
	case p.Init&^m != 0:
		return fmt.Errorf("the initial value 0x%X needs more than %d bits", p.Init, p.Width)
	case p.XorOut&^m != 0:
		return fmt.Errorf("the final value 0x%X needs more than %d bits", p.XorOut, p.Width)
	}
	return nil
}

func widthMask(width int) uint64 { return ^uint64(0) >> (64 - width) }

func reflect(v uint64, width int) uint64 { return bits.Reverse64(v) >> (64 - width) }

// New makes an engine of valid parameters.
//
// The register of a CRC whose bytes enter lightest bit first is kept
// reflected, right-aligned; any other is kept at the top of the 64 bits, so
// that widths below 8 need no case of their own.
func New(p Params) *Engine {
	e := &Engine{p: p, mask: widthMask(p.Width)}
	for i := range e.table {
		var r uint64
		if p.ReflectIn {
			r = uint64(i)
			poly := reflect(p.Poly, p.Width)
			for range 8 {
				if r&1 != 0 {
					r = r>>1 ^ poly
				} else {
					r >>= 1
				}
			}
		} else {
			r = uint64(i) << 56
			poly := p.Poly << (64 - p.Width)
			for range 8 {
				if r>>63 != 0 {
					r = r<<1 ^ poly
				} else {
					r <<= 1
				}
			}
		}
		e.table[i] = r
	}
	return e
}

// Params are what the engine was made of.
func (e *Engine) Params() Params { return e.p }

// Start is the register before the first byte.
func (e *Engine) Start() uint64 {
	if e.p.ReflectIn {
		return reflect(e.p.Init, e.p.Width)
	}
	return e.p.Init << (64 - e.p.Width)
}

// UpdateByte runs one byte through the register.
func (e *Engine) UpdateByte(reg uint64, b byte) uint64 {
	if e.p.ReflectIn {
		return reg>>8 ^ e.table[byte(reg)^b]
	}
	return reg<<8 ^ e.table[byte(reg>>56)^b]
}

// Update runs bytes through the register.
func (e *Engine) Update(reg uint64, data []byte) uint64 {
	if e.p.ReflectIn {
		for _, b := range data {
			reg = reg>>8 ^ e.table[byte(reg)^b]
		}
		return reg
	}
	for _, b := range data {
		reg = reg<<8 ^ e.table[byte(reg>>56)^b]
	}
	return reg
}

// Finish gives the checksum, right-aligned.
func (e *Engine) Finish(reg uint64) uint64 {
	if !e.p.ReflectIn {
		reg >>= 64 - e.p.Width
	}
	if e.p.ReflectIn != e.p.ReflectOut {
		reg = reflect(reg, e.p.Width)
	}
	return (reg ^ e.p.XorOut) & e.mask
}

// Checksum is the checksum of data alone.
func (e *Engine) Checksum(data []byte) uint64 { return e.Finish(e.Update(e.Start(), data)) }

// Check is the CRC of the nine ASCII bytes 123456789, by which the trade
// compares parameters.
func (e *Engine) Check() uint64 { return e.Checksum([]byte("123456789")) }
