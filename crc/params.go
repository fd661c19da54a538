package crc

// Params describe a CRC in the terms of the trade (width, poly, init, refin,
// refout, xorout).
type Params struct {
	Name       string
	Width      int    // 1 to 64 bits
	Poly       uint64 // without the top bit, heaviest bit first
	Init       uint64 // register before the first byte, not reflected
	ReflectIn  bool   // bytes enter lightest bit first
	ReflectOut bool   // the register is reflected before XorOut
	XorOut     uint64
}
