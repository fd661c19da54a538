package capture

import (
	"fmt"
	"math"
	"time"

	"busloom/frame"
)

// secondsLimit is the first second that can't be counted in nanoseconds.
const secondsLimit = math.MaxInt64 / 1_000_000_000

// time reads (seconds.fraction) or (date time.fraction).
func (l *lineReader) time(p *parser, f *frame.Frame) *lineError {
	open := l.at
	l.at++
	start := l.at
	seconds, digits, err := l.digits(18, "a time such as 1699999999.123456")
	if err != nil {
		return err
	}
	isDate := digits == 4 && l.peek() == '-'
	if isDate {
		l.at = start
		if seconds, err = l.date(); err != nil {
			return err
		}
	}
	if seconds >= secondsLimit {
		return l.fail(start, "the time is beyond what can be counted in nanoseconds", "a time before the year 2262")
	}
	whole := l.at
	fraction := int64(0)
	if l.peek() == '.' {
		l.at++
		var n int
		if fraction, n, err = l.digits(9, "the fraction of the second"); err != nil {
			return err
		}
		for ; n < 9; n++ {
			fraction *= 10
		}
	}
	if l.peek() != ')' {
		return l.unexpected("the closing parenthesis of the time")
	}
	l.at++
	if l.at < len(l.text) && !l.atBlank() {
		return l.unexpected("a blank after the time")
	}
	f.Time = seconds*1e9 + fraction
	if p.opts.Times == SincePrevious {
		// The distance counts even if the rest of the line turns out to be
		// broken: the lines to come are counted from it.
		if p.lastTime > math.MaxInt64-f.Time {
			return l.fail(start, "the times add up to more than can be counted in nanoseconds", "fewer or shorter distances")
		}
		p.lastTime += f.Time
		f.Time = p.lastTime
	} else if !isDate && whole < l.at && l.text[whole] == '.' {
		p.clock.remember(l.text[open:whole+1], seconds)
	}
	return nil
}

// digits reads one to most decimal digits.
func (l *lineReader) digits(most int, expected string) (v int64, n int, err *lineError) {
	for c := l.peek(); c >= '0' && c <= '9'; c = l.peek() {
		if n == most {
			return 0, 0, l.fail(l.at, fmt.Sprintf("the number has more than %d digits", most), expected)
		}
		n++
		v = v*10 + int64(c-'0')
		l.at++
	}
	if n == 0 {
		return 0, 0, l.unexpected(expected)
	}
	return v, n, nil
}

// date reads 2023-11-14 22:13:19 as seconds since 1970. The text doesn't say
// its zone, so it is taken as UTC.
func (l *lineReader) date() (int64, *lineError) {
	const layout = "2006-01-02 15:04:05"
	const expected = "a date such as 2023-11-14 22:13:19.123456"
	start := l.at
	for _, pattern := range []byte(layout) {
		c := l.peek()
		if isDigit := c >= '0' && c <= '9'; pattern >= '0' && pattern <= '9' && !isDigit || (pattern < '0' || pattern > '9') && c != pattern {
			return 0, l.unexpected(expected)
		}
		l.at++
	}
	t, err := time.Parse(layout, string(l.text[start:l.at]))
	if err != nil {
		return 0, l.fail(start, "there is no such date", expected)
	}
	if t.Year() < 1970 {
		return 0, l.fail(start, "the date is before 1970", expected)
	}
	return t.Unix(), nil
}
