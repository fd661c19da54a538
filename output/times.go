package output

import "time"

// appendTime appends nanoseconds as seconds with 6 digits, or 9 where the last
// three aren't zero.
func appendTime(dst []byte, ns int64) []byte {
	if ns < 0 {
		dst = append(dst, '-')
		ns = -ns
	}
	seconds, rest := uint64(ns)/1e9, uint64(ns)%1e9
	var buf [32]byte
	i := len(buf)
	digits := 9
	if rest%1000 == 0 {
		rest /= 1000
		digits = 6
	}
	for range digits {
		i--
		buf[i] = byte('0' + rest%10)
		rest /= 10
	}
	i--
	buf[i] = '.'
	for {
		i--
		buf[i] = byte('0' + seconds%10)
		if seconds /= 10; seconds == 0 {
			break
		}
	}
	return append(dst, buf[i:]...)
}

// clock keeps the text of a time's whole seconds from one frame to the next.
type clock struct {
	second int64
	whole  []byte // the digits and the point
}

func (c *clock) append(dst []byte, ns int64) []byte {
	second := ns / 1e9
	rest := uint64(ns - second*1e9)
	micros := rest / 1000
	if ns < 0 || micros*1000 != rest {
		return appendTime(dst, ns)
	}
	if second != c.second || c.whole == nil {
		c.second = second
		text := appendTime(nil, second*1e9)
		c.whole = text[:len(text)-6]
	}
	dst = append(dst, c.whole...)
	a, b := micros/1000, micros%1000
	return append(dst,
		byte('0'+a/100), byte('0'+a/10%10), byte('0'+a%10),
		byte('0'+b/100), byte('0'+b/10%10), byte('0'+b%10))
}

func appendDate(dst []byte, ns int64) []byte {
	return time.Unix(0, ns).UTC().AppendFormat(dst, "2006-01-02 15:04:05.000000")
}
