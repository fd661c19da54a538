package decode

import (
	"fmt"
	"strings"

	"busloom/schema"
)

// A pattern chooses messages and signals: "Wheel*" is every signal of the
// messages that match; "Wheel*.*speed" are the signals whose path in the
// message matches. * stands for any characters, ? for one; a pattern without
// a dot is about messages. " on bus" behind it keeps to one bus, as in
// "RoadSpeed.speed on chassis".
type pattern struct {
	text                 string
	message, signal, bus string
	used                 bool
}

type patterns []*pattern

func parsePatterns(texts []string) (patterns, error) {
	var out patterns
	for _, text := range texts {
		path, bus, onBus := strings.Cut(text, " on ")
		if !onBus {
			bus = "*"
		}
		message, signal, dotted := strings.Cut(path, ".")
		if message == "" || (dotted && signal == "") {
			return nil, fmt.Errorf("the pattern %q is empty: write Message, Message.signal or *.signal", text)
		}
		if !dotted {
			signal = "*"
		}
		out = append(out, &pattern{text: text, message: message, signal: signal, bus: bus})
	}
	return out, nil
}

// wants reports whether a signal is wanted; without patterns all are.
func (ps patterns) wants(m *schema.Message, signal string) bool {
	wanted := len(ps) == 0
	for _, p := range ps {
		if glob(p.message, m.Name) && glob(p.signal, signal) && glob(p.bus, m.Bus.Name) {
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
		if !hasBus(network, p.bus) {
			return fmt.Errorf("nothing matches %s: there is no bus %s", p.text, p.bus)
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

func hasBus(network *schema.Network, pattern string) bool {
	for _, b := range network.Buses {
		if glob(pattern, b.Name) {
			return true
		}
	}
	return false
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
