package frame

// fdLengths are the payload lengths of length codes 9 to 15 in CAN FD
// (ISO 11898-1).
var fdLengths = [...]uint8{12, 16, 20, 24, 32, 48, 64}

// LenOfDLC returns the payload length in bytes of a length code 0..15.
// Classic frames carry 8 bytes for every code above 8.
func LenOfDLC(dlc uint8, fd bool) (length uint8, ok bool) {
	switch {
	case dlc <= 8:
		return dlc, true
	case dlc > 15:
		return 0, false
	case fd:
		return fdLengths[dlc-9], true
	}
	return 8, true
}

// DLCOfLen returns the length code of a payload length that a frame can have.
func DLCOfLen(length int, fd bool) (dlc uint8, ok bool) {
	if length >= 0 && length <= 8 {
		return uint8(length), true
	}
	if fd {
		for i, l := range fdLengths {
			if int(l) == length {
				return uint8(9 + i), true
			}
		}
	}
	return 0, false
}

// ValidLen reports whether a frame can carry exactly length bytes.
func ValidLen(length int, fd bool) bool {
	_, ok := DLCOfLen(length, fd)
	return ok
}
