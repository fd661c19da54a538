package heron

// Checksums bit by bit, straight from their definitions.

// crc8 runs the bytes through a register that shifts towards the heavy end.
func crc8(register, polynomial byte, data ...byte) byte {
	for _, b := range data {
		register ^= b
		for range 8 {
			top := register & 0x80
			register <<= 1
			if top != 0 {
				register ^= polynomial
			}
		}
	}
	return register
}

// SAE J1850 polynomial, start and end as in AUTOSAR's CRC library.
func crcJ1850(start []byte, data []byte) byte {
	return crc8(crc8(0xFF, 0x1D, start...), 0x1D, data...) ^ 0xFF
}

func crcH2F(data []byte) byte { return crc8(0xFF, 0x2F, data...) ^ 0xFF }

// crcBody is the body bus's own: polynomial 0x31, lightest bit first.
func crcBody(start byte, data []byte) byte {
	step := func(register byte) byte {
		for range 8 {
			light := register & 1
			register >>= 1
			if light != 0 {
				register ^= 0x8C // 0x31 mirrored
			}
		}
		return register
	}
	register := step(start)
	for _, b := range data {
		register = step(register ^ b)
	}
	return register
}

// crcCCITT is the 16-bit CRC with polynomial 0x1021 and start 0xFFFF.
func crcCCITT(register uint16, data ...byte) uint16 {
	for _, b := range data {
		register ^= uint16(b) << 8
		for range 8 {
			top := register & 0x8000
			register <<= 1
			if top != 0 {
				register ^= 0x1021
			}
		}
	}
	return register
}

func xor8(start byte, data []byte) byte {
	for _, b := range data {
		start ^= b
	}
	return start
}

func sum8(data []byte) (sum byte) {
	for _, b := range data {
		sum += b
	}
	return sum
}

// idMode is how a profile 1 checksum takes in its data id.
type idMode uint8

const (
	idBoth idMode = iota
	idAlternating
	idLow
	idNibble
)

// profile1 protects a payload with AUTOSAR E2E profile 1: checksum in byte 0,
// counter in the light half of byte 1, in idNibble mode four bits of the data
// id in its heavy half.
func profile1(d []byte, mode idMode, id uint16, counter uint64) {
	count := byte(counter % 15)
	d[1] = d[1]&0xF0 | count
	low, high := byte(id), byte(id>>8)
	var register byte
	switch mode {
	case idBoth:
		register = crc8(0, 0x1D, low, high)
	case idAlternating:
		if count%2 == 0 {
			register = crc8(0, 0x1D, low)
		} else {
			register = crc8(0, 0x1D, high)
		}
	case idLow:
		register = crc8(0, 0x1D, low)
	case idNibble:
		d[1] = high<<4 | count
		register = crc8(0, 0x1D, low, 0)
	}
	d[0] = crc8(register, 0x1D, d[1:]...)
}

// profile2 protects a payload with AUTOSAR E2E profile 2: checksum in byte 0,
// counter in the light half of byte 1.
func profile2(d []byte, ids *[16]byte, counter uint64) {
	d[1] = d[1]&0xF0 | byte(counter%16)
	d[0] = crc8(crc8(0xFF, 0x2F, d[1:]...), 0x2F, ids[counter%16]) ^ 0xFF
}

// profile5 protects a payload with AUTOSAR E2E profile 5: checksum in bytes 0
// and 1, light byte first, counter in byte 2.
func profile5(d []byte, id uint16, counter uint64) {
	d[2] = byte(counter)
	register := crcCCITT(0xFFFF, d[2:]...)
	register = crcCCITT(register, byte(id), byte(id>>8))
	d[0], d[1] = byte(register), byte(register>>8)
}
