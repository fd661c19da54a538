package crc

// A CRC is linear: what each byte adds to the checksum depends only on its
// value and on how many bytes follow it. Where the length is known beforehand
// the bytes can be looked up apart from each other, without waiting for a
// register.

// MaxApart is the widest CRC that Apart has tables for.
const MaxApart = 16

// Apart has what a byte adds to the checksum by exclusive or, for each of its
// values, when after further bytes follow. The engine's width is at most
// MaxApart.
func (e *Engine) Apart(after int) *[256]uint16 {
	var out [256]uint16
	for b := range out {
		reg := e.UpdateByte(0, byte(b))
		for range after {
			reg = e.UpdateByte(reg, 0)
		}
		out[b] = uint16(e.Finish(reg) ^ e.p.XorOut)
	}
	return &out
}

// Zeros is the checksum of a number of zero bytes, which the parts of Apart
// are added to.
func (e *Engine) Zeros(length int) uint64 {
	reg := e.Start()
	for range length {
		reg = e.UpdateByte(reg, 0)
	}
	return e.Finish(reg)
}
