package output

import "time"

// appendTime appends nanoseconds as seconds with 6 digits, or 9 where the last
// three aren't zero.
func appendTime(dst []byte, ns int64) []byte {
	magnitude := uint64(ns)
	if ns < 0 {
		dst = append(dst, '-')
		magnitude = -magnitude
	}
	seconds, rest := magnitude/1e9, magnitude%1e9
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
	if second != c.second || len(c.whole) == 0 {
		c.second = second
		text := appendTime(c.whole[:0], second*1e9)
		c.whole = text[:len(text)-6]
	}
	dst = append(dst, c.whole...)
	a, b := micros/1000, micros%1000
	return append(dst,
		byte('0'+a/100), byte('0'+a/10%10), byte('0'+a%10),
		byte('0'+b/100), byte('0'+b/10%10), byte('0'+b%10))
}

// appendDate appends a date and time of day in UTC (RFC 3339 without its T and
// Z), with 6 digits of the second or 9 where the last three aren't zero.
func appendDate(dst []byte, ns int64) []byte {
	layout := "2006-01-02 15:04:05.000000"
	if ns%1000 != 0 {
		layout = "2006-01-02 15:04:05.000000000"
	}
	return time.Unix(0, ns).UTC().AppendFormat(dst, layout)
}

// appendStamp appends a time as seconds or as a date, in a column of
// stampWidth.
func appendStamp(dst []byte, ns int64, dates bool) []byte {
	start := len(dst)
	if dates {
		dst = appendDate(dst, ns)
	} else {
		dst = appendTime(dst, ns)
	}
	return appendBlanks(dst, stampWidth(dates)-(len(dst)-start))
}

func stampWidth(dates bool) int {
	if dates {
		return len("2006-01-02 15:04:05.000000")
	}
	return len("1700000000.000000")
}
