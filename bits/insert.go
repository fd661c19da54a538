package bits

// Insert puts raw's lowest bits into a legal place of up to 64 bits. The
// payload must reach it (Place.LastByte); its other bits stay.
func Insert(payload []byte, p Place, raw uint64) {
	left := p.Width()
	for _, r := range p.Runs {
		for b := r.Heavy.Byte; ; b += r.step() {
			light, width := r.part(b)
			left -= width
			mask := byte(1<<width-1) << light
			payload[b] = payload[b]&^mask | byte(raw>>left<<light)&mask
			if b == r.Light.Byte {
				break
			}
		}
	}
}

// AppendBytes appends the bytes of a legal place made of whole bytes
// (Place.WholeBytes; text and byte values), heaviest byte first.
func AppendBytes(dst, payload []byte, p Place) []byte {
	for _, r := range p.Runs {
		for b := r.Heavy.Byte; ; b += r.step() {
			dst = append(dst, payload[b])
			if b == r.Light.Byte {
				break
			}
		}
	}
	return dst
}

// InsertBytes is the inverse of AppendBytes: value's first byte goes into the
// heaviest byte of the place. It stops at the end of the shorter of the two
// and returns how many bytes it wrote.
func InsertBytes(payload []byte, p Place, value []byte) int {
	n := 0
	for _, r := range p.Runs {
		for b := r.Heavy.Byte; n < len(value); b += r.step() {
			payload[b] = value[n]
			n++
			if b == r.Light.Byte {
				break
			}
		}
	}
	return n
}
