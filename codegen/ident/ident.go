package ident

import (
	"strings"
	"unicode"
	"unicode/utf8"
)

// Go returns the exported Go identifier of a name or path: each part begins
// with a capital, nothing stands between the parts. wheel[front_left].speed is
// WheelFrontLeftSpeed. Exported identifiers can't be words of Go.
func Go(path string) string {
	var b strings.Builder
	b.Grow(len(path))
	start := true
	for _, r := range path {
		if !isWord(r) {
			start = true
			continue
		}
		// Digits on both sides of a separator would run together and make
		// one number of two: cell[1].2 keeps its distance.
		if start && unicode.IsDigit(r) && endsInDigit(b.String()) {
			b.WriteByte('_')
		}
		if start {
			r = unicode.ToUpper(r)
		}
		b.WriteRune(r)
		start = false
	}
	return leading(b.String(), 'X')
}

// C returns the C and C++ identifier of a name or path: words in lower case,
// joined by underscores. wheel[front_left].speed is wheel_front_left_speed,
// WheelSpeeds is wheel_speeds. A word that C or C++ reserves gets an underscore
// at its end.
func C(path string) string {
	runes := []rune(path)
	out := make([]rune, 0, len(runes)+8)
	gap := false
	for i, r := range runes {
		if !isWord(r) {
			gap = true
			continue
		}
		if i > 0 && unicode.IsUpper(r) && isWord(runes[i-1]) {
			// A capital begins a word after a small letter or digit, and as
			// the last capital of several: HTTPPort is http_port.
			next := i+1 < len(runes) && unicode.IsLower(runes[i+1])
			if !unicode.IsUpper(runes[i-1]) || next {
				gap = true
			}
		}
		if gap && len(out) > 0 {
			out = append(out, '_')
		}
		gap = false
		out = append(out, unicode.ToLower(r))
	}
	name := leading(string(out), 'x')
	if reserved[name] {
		name += "_"
	}
	return name
}

// isWord reports whether r stays in an identifier; everything else (dots,
// brackets, underscores) separates its parts.
func isWord(r rune) bool { return unicode.IsLetter(r) || unicode.IsDigit(r) }

func endsInDigit(s string) bool {
	r, _ := utf8.DecodeLastRuneInString(s)
	return unicode.IsDigit(r)
}

// leading gives a name that is empty or begins with a digit a letter to begin
// with.
func leading(name string, letter rune) string {
	if r, _ := utf8.DecodeRuneInString(name); name == "" || !unicode.IsLetter(r) {
		return string(letter) + name
	}
	return name
}
