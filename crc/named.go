package crc

// named are the CRCs of message protection by their name in descriptions.
// Parameters: AUTOSAR "Specification of CRC Routines" (document 016).
var named = []Params{
	{Name: "crc8_j1850", Width: 8, Poly: 0x1D, Init: 0xFF, XorOut: 0xFF},
	{Name: "crc8_h2f", Width: 8, Poly: 0x2F, Init: 0xFF, XorOut: 0xFF},
	{Name: "crc16_ccitt_false", Width: 16, Poly: 0x1021, Init: 0xFFFF},
	{Name: "crc16_arc", Width: 16, Poly: 0x8005, ReflectIn: true, ReflectOut: true},
	{Name: "crc32", Width: 32, Poly: 0x04C11DB7, Init: 0xFFFFFFFF, ReflectIn: true, ReflectOut: true, XorOut: 0xFFFFFFFF},
	{Name: "crc32_p4", Width: 32, Poly: 0xF4ACFB13, Init: 0xFFFFFFFF, ReflectIn: true, ReflectOut: true, XorOut: 0xFFFFFFFF},
	{Name: "crc64", Width: 64, Poly: 0x42F0E1EBA9EA3693, Init: ^uint64(0), ReflectIn: true, ReflectOut: true, XorOut: ^uint64(0)},
}

// Named returns the parameters of a named CRC (see Names).
func Named(name string) (Params, bool) {
	for _, p := range named {
		if p.Name == name {
			return p, true
		}
	}
	return Params{}, false
}

// Names lists the named CRCs, narrowest first.
func Names() []string {
	out := make([]string, 0, len(named))
	for _, p := range named {
		out = append(out, p.Name)
	}
	return out
}

// XOR8 is all bytes combined by exclusive or, from reg on.
func XOR8(reg byte, data []byte) byte {
	for _, b := range data {
		reg ^= b
	}
	return reg
}

// SUM8 is the sum of all bytes modulo 256, from reg on.
func SUM8(reg byte, data []byte) byte {
	for _, b := range data {
		reg += b
	}
	return reg
}
