package output

import (
	"fmt"
	"math/big"
	"strings"

	"busloom/decode"
	"busloom/unit"
)

// millis writes nanoseconds as milliseconds, exact to the microsecond.
func millis(ns int64) string { return fraction(ns, 1, 1_000_000, 3) }

// fraction is num / (count*per) with digits digits, rounded half to even.
func fraction(num, count, per int64, digits int) string {
	den := new(big.Int).Mul(big.NewInt(count), big.NewInt(per))
	return unit.FormatRat(new(big.Rat).SetFrac(big.NewInt(num), den), digits)
}

func (s *summary) appendText(dst []byte) []byte {
	var b strings.Builder
	seen, never := s.shown()
	if s.any {
		fmt.Fprintf(&b, "from %s to %s s: %s s\n", appendTime(nil, s.first), appendTime(nil, s.last), appendTime(nil, s.last-s.first))
	}
	for _, m := range seen {
		n := &s.messages[m.Index]
		fmt.Fprintf(&b, "\n%s on %s, %s: %d frames%s\n", m.Model.Name, m.Bus, idText(m), n.count, s.periodText(m, n))
		if notes := n.notes(); notes != "" {
			fmt.Fprintf(&b, "  ! %s\n", notes)
		}
		s.signalRows(&b, m)
	}
	if len(never) > 0 {
		fmt.Fprint(&b, "\nnever seen:\n")
		for _, m := range never {
			fmt.Fprintf(&b, "  %s on %s, %s\n", m.Model.Name, m.Bus, idText(m))
		}
	}
	return append(dst, b.String()...)
}

func idText(m *decode.Message) string {
	id := m.Model.ID
	text := fmt.Sprintf("%03X", id.Send)
	if id.Extended {
		text = fmt.Sprintf("%08X", id.Send)
	}
	for _, f := range id.Fields {
		if f.Open {
			return text + " (family)"
		}
	}
	return text
}

// periodText is the least, mean and greatest time between frames, beside the
// period that the description states.
func (s *summary) periodText(m *decode.Message, n *messageSummary) string {
	if n.periods == 0 {
		return ""
	}
	text := fmt.Sprintf(", every %s / %s / %s ms (least, mean, greatest)", millis(n.shortest), fraction(n.last-n.first, n.periods, 1_000_000, 3), millis(n.longest))
	if p := m.Model.Timing.Period; p > 0 {
		text += fmt.Sprintf(", described %s ms", millis(int64(p)))
	}
	return text
}

func (n *messageSummary) notes() string {
	var parts []string
	say := func(count int64, what string) {
		if count > 0 {
			parts = append(parts, fmt.Sprintf("%d %s", count, what))
		}
	}
	say(n.checksum, "wrong checksums")
	say(n.counter, "counters repeated or out of range")
	say(n.lost, "counter steps lost")
	say(n.short, "frames short")
	say(n.long, "frames long")
	say(n.unknownSelection, "unknown selections")
	return strings.Join(parts, ", ")
}

// signalRows writes a signal a line: numbers with their range and greatest
// step in columns, then words and codes with their counts.
func (s *summary) signalRows(b *strings.Builder, m *decode.Message) {
	rows := [][]string{{"", "numbers", "least", "greatest", "unit", "greatest step", "at [s]"}}
	rest := []string{""}
	for _, sig := range m.Signals {
		x := &s.signals[sig.Index]
		row := make([]string, 7)
		row[0] = sig.Path
		if x.numbers > 0 {
			row[1] = fmt.Sprint(x.numbers)
			row[2] = string(sig.AppendNumber(nil, &x.min))
			row[3] = string(sig.AppendNumber(nil, &x.max))
			row[4] = sig.Unit.Symbol
			if x.steps {
				row[5] = sig.Difference(&x.to, &x.from)
				row[6] = string(appendTime(nil, x.stepAt))
			}
		}
		rows = append(rows, row)
		rest = append(rest, x.others(sig))
	}
	width := make([]int, 7)
	for _, row := range rows {
		for i, cell := range row {
			width[i] = max(width[i], len(cell))
		}
	}
	for i, row := range rows {
		var line strings.Builder
		fmt.Fprintf(&line, "  %-*s", width[0], row[0])
		for c := 1; c < len(row); c++ {
			if c == 4 {
				fmt.Fprintf(&line, "  %-*s", width[c], row[c])
			} else {
				fmt.Fprintf(&line, "  %*s", width[c], row[c])
			}
		}
		text := line.String()
		if rest[i] != "" {
			if strings.TrimSpace(text[2+width[0]:]) == "" {
				text = text[:2+width[0]]
			}
			text += "  " + rest[i]
		}
		fmt.Fprintln(b, strings.TrimRight(text, " "))
	}
}

// others lists words, codes and whatever else was no number, with counts.
func (x *signalSummary) others(s *decode.Signal) string {
	var parts []string
	say := func(word string, count int64) {
		if count > 0 {
			parts = append(parts, fmt.Sprintf("%s %d", word, count))
		}
	}
	for i, n := range x.words {
		say(s.Words[i], n)
	}
	for i, n := range x.codes {
		say(decode.CodeWord(s.Model.Codes[i]), n)
	}
	say("unknown", x.unknown)
	say("missing", x.missing)
	say("without a value", x.nothing)
	say("texts", x.texts)
	return strings.Join(parts, ", ")
}
