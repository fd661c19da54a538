package decode

import (
	"fmt"
	"strings"

	"busloom/schema"
)

// A pattern chooses messages and signals: "Wheel*" is every signal of the
// messages that match; "Wheel*.*speed" are the signals whose path in the
// message matches. * stands for any characters, ? for one; a pattern without
// a dot is about messages.
type pattern struct {
	text            string
	message, signal string
	used            bool
}

type patterns []*pattern

func parsePatterns(texts []string) (patterns, error) {
	var out patterns
	for _, text := range texts {
		message, signal, dotted := strings.Cut(text, ".")
		if message == "" || (dotted && signal == "") {
			return nil, fmt.Errorf("the pattern %q is empty: write Message, Message.signal or *.signal", text)
		}
		if !dotted {
			signal = "*"
		}
		out = append(out, &pattern{text: text, message: message, signal: signal})
	}
	return out, nil
}

// wants reports whether a signal is wanted; without patterns all are.
func (ps patterns) wants(message, signal string) bool {
	wanted := len(ps) == 0
	for _, p := range ps {
		if glob(p.message, message) && glob(p.signal, signal) {
			p.used = true
			wanted = true
		}
	}
	return wanted
}

// unused is the error for a pattern that matched nothing.
func (ps patterns) unused(network *schema.Network) error {
	for _, p := range ps {
		if p.used {
			continue
		}
		var messages, signals []string
		for _, m := range network.Messages {
			messages = append(messages, m.Name)
			if glob(p.message, m.Name) {
				for _, s := range m.Signals {
					signals = append(signals, s.Name)
				}
			}
		}
		if len(signals) == 0 {
			return fmt.Errorf("nothing matches %s%s", p.text, didYouMean(p.message, messages))
		}
		return fmt.Errorf("nothing matches %s%s", p.text, didYouMean(p.signal, signals))
	}
	return nil
}

// glob matches * and ?, in time linear in the text for each star.
func glob(pattern, text string) bool {
	star, mark := -1, 0
	p, t := 0, 0
	for t < len(text) {
		switch {
		case p < len(pattern) && pattern[p] == '*':
			star, mark = p, t
			p++
		case p < len(pattern) && (pattern[p] == '?' || pattern[p] == text[t]):
			p++
			t++
		case star >= 0:
			mark++
			p, t = star+1, mark
		default:
			return false
		}
	}
	for p < len(pattern) && pattern[p] == '*' {
		p++
	}
	return p == len(pattern)
}
