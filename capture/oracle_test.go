package capture

import (
	"math/big"
	"regexp"
	"strconv"
	"strings"

	"busloom/frame"
)

// oracle reads one line the slow way: regular expressions and strings, nothing
// of the reader's code. ok is false for a line that is no record; then
// malformed tells whether it is a broken one.
func oracle(line string) (f frame.Frame, iface string, ok, malformed bool) {
	if len(line) > 4096 {
		return f, "", false, !comment.MatchString(line)
	}
	line = strings.TrimRight(line, "\r")
	plain := colours.ReplaceAllString(line, "\t") // a tab parts words, too
	if blankLine.MatchString(plain) || comment.MatchString(plain) || (detail.MatchString(line) && !recordSign.MatchString(line)) {
		return f, "", false, false
	}
	if m := logLine.FindStringSubmatch(plain); m != nil {
		f, ok = oracleLog(m)
		return f, m[2], ok, !ok
	}
	if m := screenLine.FindStringSubmatch(plain); m != nil {
		f, ok = oracleScreen(m)
		return f, m[2], ok, !ok
	}
	return f, "", false, true
}

const (
	timePart  = `(?:\((\d{1,18}(?:\.\d{1,9})?|\d{4}-\d\d-\d\d \d\d:\d\d:\d\d(?:\.\d{1,9})?)\)(?:[ \t]+|$))?`
	namePart  = `([!-"$-'*-Z\\^-~]{1,32})[ \t]+`
	idPart    = `([0-9A-Fa-f]{3}|[0-9A-Fa-f]{8})`
	flagsPart = `((?:(?:RX|TX|-|B|E)[ \t]+)*)`
)

var (
	colours    = regexp.MustCompile(`\x1b\[[0-9;]*m`)
	blankLine  = regexp.MustCompile(`^[ \t]*$`)
	comment    = regexp.MustCompile(`^[ \t]*#`)
	detail     = regexp.MustCompile(`^\t(?:[ \t]|\x1b\[[0-9;]*m)*[^( \t]`)
	recordSign = regexp.MustCompile(`#|(?:^|[^\x1b])\[| \{`)
	logLine    = regexp.MustCompile(`^[ \t]*` + timePart + namePart + `((?:(?:RX|TX|-)[ \t]+)*)` + idPart + `#(#[0-7])?(.*)$`)
	logTail    = regexp.MustCompile(`^((?:\.?[0-9A-Fa-f]{2})*)(?:_([9A-Fa-f]))?([ \t]+(?:[RT][ \t]*)?)?$`)
	remoteTail = regexp.MustCompile(`^R(?:([0-8])(?:_([9A-Fa-f]))?)?([ \t]+(?:[RT][ \t]*)?)?$`)
	screenLine = regexp.MustCompile(`^[ \t]*` + timePart + namePart + flagsPart + idPart + `[ \t]+(?:\[(\d{1,2})\]|\{([0-9A-Fa-f])\})(.*)$`)
	hexDigits  = regexp.MustCompile(`^[0-9A-Fa-f]{2}`)
	binDigits  = regexp.MustCompile(`^[01]{8}`)
	errorEnd   = regexp.MustCompile(`^[ \t]+ERRORFRAME(?:[ \t]|$)`)
	screenEnd  = regexp.MustCompile(`^[ \t]*$|^[ \t]+(?:'.*'|` + "`.*`" + `)[ \t]*$`)
)

func oracleTime(text string) (int64, bool) {
	if text == "" {
		return 0, true
	}
	whole, fraction, _ := strings.Cut(text, ".")
	var seconds *big.Int
	if strings.Contains(whole, "-") {
		s, ok := oracleDate(whole)
		if !ok {
			return 0, false
		}
		seconds = big.NewInt(s)
	} else {
		seconds, _ = new(big.Int).SetString(whole, 10)
	}
	ns, _ := new(big.Int).SetString((fraction + "000000000")[:9], 10)
	total := seconds.Mul(seconds, big.NewInt(1_000_000_000))
	// The reader refuses the last second that might not fit.
	if new(big.Int).Div(total, big.NewInt(1_000_000_000)).Cmp(big.NewInt(9223372036)) >= 0 {
		return 0, false
	}
	total.Add(total, ns)
	return total.Int64(), true
}

// oracleDate counts the days by hand (proleptic Gregorian calendar).
func oracleDate(text string) (int64, bool) {
	var n [6]int64
	for i, part := range strings.FieldsFunc(text, func(r rune) bool { return r == '-' || r == ' ' || r == ':' }) {
		n[i], _ = strconv.ParseInt(part, 10, 64)
	}
	leap := func(y int64) bool { return y%4 == 0 && (y%100 != 0 || y%400 == 0) }
	months := []int64{31, 28, 31, 30, 31, 30, 31, 31, 30, 31, 30, 31}
	if leap(n[0]) {
		months[1] = 29
	}
	if n[0] < 1970 || n[1] < 1 || n[1] > 12 || n[2] < 1 || n[2] > months[n[1]-1] || n[3] > 23 || n[4] > 59 || n[5] > 59 {
		return 0, false
	}
	days := n[2] - 1
	for y := int64(1970); y < n[0]; y++ {
		days += 365
		if leap(y) {
			days++
		}
	}
	for m := range n[1] - 1 {
		days += months[m]
	}
	return days*86400 + n[3]*3600 + n[4]*60 + n[5], true
}

func oracleID(text string, f *frame.Frame) bool {
	v, _ := strconv.ParseUint(text, 16, 32)
	switch {
	case len(text) == 3 && v < 1<<11:
		f.ID = uint32(v)
	case len(text) == 8 && v < 1<<29:
		f.ID, f.Flags = uint32(v), frame.Extended
	case len(text) == 8 && v>>29 == 1:
		f.ID, f.Flags = uint32(v&(1<<29-1)), frame.Error
	default:
		return false
	}
	return true
}

func oracleData(hex string, f *frame.Frame) bool {
	fd := f.Flags&frame.FD != 0
	n := len(hex) / 2
	for i := range n {
		b, _ := strconv.ParseUint(hex[2*i:2*i+2], 16, 8)
		if i < len(f.Data) {
			f.Data[i] = byte(b)
		}
	}
	lengths := map[int]uint8{12: 9, 16: 10, 20: 11, 24: 12, 32: 13, 48: 14, 64: 15}
	f.Len, f.DLC = uint8(n), uint8(n)
	if n > 8 {
		dlc, ok := lengths[n]
		f.DLC = dlc
		return fd && ok
	}
	return true
}

func oracleLog(m []string) (f frame.Frame, ok bool) {
	if f.Time, ok = oracleTime(m[1]); !ok || !oracleID(m[4], &f) {
		return f, false
	}
	if m[5] != "" {
		if f.Flags&frame.Error != 0 {
			return f, false
		}
		f.Flags |= frame.FD
		if flags := m[5][1] - '0'; flags&1 != 0 {
			f.Flags |= frame.BitRateSwitch
		}
		if flags := m[5][1] - '0'; flags&2 != 0 {
			f.Flags |= frame.ErrorPassive
		}
	} else if r := remoteTail.FindStringSubmatch(m[6]); r != nil {
		if f.Flags&frame.Error != 0 {
			return f, false
		}
		f.Flags |= frame.Remote
		if r[1] != "" {
			f.DLC = r[1][0] - '0'
		}
		if r[2] != "" {
			v, _ := strconv.ParseUint(r[2], 16, 8)
			if f.DLC != 8 {
				return f, false
			}
			f.DLC = uint8(v)
		}
		return f, true
	}
	t := logTail.FindStringSubmatch(m[6])
	if t == nil || !oracleData(strings.ReplaceAll(t[1], ".", ""), &f) {
		return f, false
	}
	if t[2] != "" {
		if f.Flags&frame.FD != 0 || f.Len != 8 {
			return f, false
		}
		v, _ := strconv.ParseUint(t[2], 16, 8)
		f.DLC = uint8(v)
	}
	return f, true
}

func oracleScreen(m []string) (f frame.Frame, ok bool) {
	if f.Time, ok = oracleTime(m[1]); !ok || !oracleID(m[4], &f) {
		return f, false
	}
	var length int
	dlc := -1
	if m[6] != "" {
		v, _ := strconv.ParseInt(m[6], 16, 16)
		dlc, length = int(v), min(int(v), 8)
	} else {
		length, _ = strconv.Atoi(m[5])
		if len(m[5]) == 2 {
			if f.Flags&frame.Error != 0 {
				return f, false
			}
			f.Flags |= frame.FD
		}
	}
	if !oracleData(strings.Repeat("00", length), &f) {
		return f, false
	}
	if dlc > 8 {
		f.DLC = uint8(dlc)
	}
	for _, word := range strings.Fields(m[3]) {
		if word == "B" || word == "E" {
			if f.Flags&frame.FD == 0 {
				return f, false
			}
			f.Flags |= map[string]frame.Flags{"B": frame.BitRateSwitch, "E": frame.ErrorPassive}[word]
		}
	}
	rest := m[7]
	if after, isRemote := strings.CutPrefix(strings.TrimLeft(rest, " \t"), "remote request"); isRemote {
		if f.Flags&(frame.FD|frame.Error) != 0 {
			return f, false
		}
		f.Flags |= frame.Remote
		f.Len = 0
		return f, screenEnd.MatchString(after)
	}
	data, rest, ok := oracleColumns(rest, length)
	copy(f.Data[:], data)
	if ok && f.Flags&frame.Error != 0 && errorEnd.MatchString(rest) {
		return f, true
	}
	return f, ok && screenEnd.MatchString(rest)
}

// oracleColumns cuts length bytes off the front of text.
func oracleColumns(text string, length int) (data []byte, rest string, ok bool) {
	if length == 0 {
		return nil, text, true
	}
	text = strings.TrimLeft(text, " \t")
	digits, base := hexDigits, 16
	if binDigits.MatchString(text) {
		digits, base = binDigits, 2
	}
	backwards := false
	for i := range length {
		if i == 1 {
			backwards = strings.HasPrefix(text, "`")
		}
		if i > 0 {
			trimmed := strings.TrimLeft(text, " \t")
			switch {
			case backwards && text != "" && text[0] == '`', !backwards && text != "" && text[0] == '.':
				text = text[1:]
			case !backwards && len(trimmed) < len(text):
				text = trimmed
			default:
				return nil, "", false
			}
		}
		word := digits.FindString(text)
		v, err := strconv.ParseUint(word, base, 8)
		if err != nil {
			return nil, "", false
		}
		data = append(data, byte(v))
		text = text[len(word):]
	}
	if backwards {
		for i := range length / 2 {
			data[i], data[length-1-i] = data[length-1-i], data[i]
		}
	}
	return data, text, true
}
