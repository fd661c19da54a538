package output

import (
	"fmt"
	"math/big"
	"strings"
	"unicode/utf8"

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
		fmt.Fprintf(&b, "from %s to %s s: %s s; + is seconds after the first\n", appendTime(nil, s.first), appendTime(nil, s.last), appendTime(nil, s.last-s.first))
	}
	total := int64(0)
	for _, n := range s.classes {
		total += n
	}
	fmt.Fprintf(&b, "%d frames = %d decoded", total, s.classes[decode.Decoded])
	for c := decode.Undescribed; c < decode.NumClasses; c++ {
		if n := s.classes[c]; n > 0 {
			fmt.Fprintf(&b, " + %d %s", n, plural(n, className(c)))
		}
	}
	b.WriteByte('\n')
	for _, m := range seen {
		n := &s.messages[m.Index]
		fmt.Fprintf(&b, "\n%s on %s, %s: %s%s\n", m.Model.Name, m.Bus, idText(m), frames(n.count), s.periodText(m, n))
		if notes := n.notes(m); notes != "" {
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
	if len(s.undescribed) > 0 {
		fmt.Fprint(&b, "\nundescribed:\n")
		for _, x := range s.foreign() {
			fmt.Fprintf(&b, "  %s %s: %s\n", s.plan.Interface(x.bus), idDigits(x.id, x.extended), frames(s.undescribed[x]))
		}
	}
	if len(s.errors) > 0 {
		fmt.Fprint(&b, "\nerror frames:\n")
		for _, x := range s.reports() {
			fmt.Fprintf(&b, "  %s %s: %s\n", s.plan.Interface(x.bus), x.text, frames(s.errors[x]))
		}
	}
	return append(dst, b.String()...)
}

func frames(n int64) string { return counted(n, "frame", "frames") }

// after is a time as seconds after the first frame.
func (s *summary) after(ns int64) string { return "+" + string(appendTime(nil, ns-s.first)) }

func idText(m *decode.Message) string {
	text := idDigits(m.Model.ID.Send, m.Model.ID.Extended)
	if isFamily(m) {
		text += " (family)"
	}
	return text
}

// periodText is the least, mean and greatest time between frames, beside the
// period that the description states.
func (s *summary) periodText(m *decode.Message, n *messageSummary) string {
	if n.periods == 0 {
		return ""
	}
	text := fmt.Sprintf(", every %s / %s / %s ms (least, mean, greatest)", millis(n.shortest), fraction(n.total, n.periods, 1_000_000, 3), millis(n.longest))
	if p := m.Model.Timing.Period; p > 0 {
		text += fmt.Sprintf(", described %s ms", millis(int64(p)))
	}
	return text
}

func (n *messageSummary) notes(m *decode.Message) string {
	var parts []string
	say := func(n int64, one, more string) {
		if n > 0 {
			parts = append(parts, counted(n, one, more))
		}
	}
	say(n.checksum, "wrong checksum", "wrong checksums")
	say(n.counter, "counter repeated or out of range", "counters repeated or out of range")
	say(n.lost, "counter step lost", "counter steps lost")
	say(n.short, "short frame", "short frames")
	say(n.long, "long frame", "long frames")
	say(n.unknownSelection, "unknown selection", "unknown selections")
	if late := n.lateness(m.Model.Timing); late != "" {
		parts = append(parts, late)
	}
	return strings.Join(parts, ", ")
}

// signalRows writes a signal a line: numbers with their range and greatest
// step in columns, then words and codes with their counts. Protection is left
// out: its failures are counted above.
func (s *summary) signalRows(b *strings.Builder, m *decode.Message) {
	rows := [][]string{{"", "numbers", "least", "at", "greatest", "at", "unit", "greatest step", "at"}}
	rest := []string{""}
	for _, sig := range shown(m) {
		x := &s.signals[sig.Index]
		row := make([]string, len(rows[0]))
		row[0] = sig.Path
		if x.numbers > 0 {
			row[1] = fmt.Sprint(x.numbers)
			row[2], row[3] = string(sig.AppendNumber(nil, &x.min)), s.after(x.minAt)
			row[4], row[5] = string(sig.AppendNumber(nil, &x.max)), s.after(x.maxAt)
			row[6] = sig.Unit.Symbol
			if x.steps {
				row[7], row[8] = sig.Difference(&x.to, &x.from), s.after(x.stepAt)
			}
		}
		rows = append(rows, row)
		rest = append(rest, x.others(sig))
	}
	const unitColumn = 6
	width := make([]int, len(rows[0]))
	numbers := false
	for _, row := range rows[1:] {
		numbers = numbers || row[1] != ""
	}
	for i, row := range rows {
		if i == 0 && !numbers {
			continue
		}
		for c, cell := range row {
			width[c] = max(width[c], utf8.RuneCountInString(cell))
		}
	}
	for i, row := range rows {
		if i == 0 && !numbers {
			continue
		}
		line := "  " + padText(row[0], width[0], true)
		if i == 0 || row[1] != "" {
			for c := 1; c < len(row); c++ {
				line += "  " + padText(row[c], width[c], c == unitColumn)
			}
		}
		if rest[i] != "" {
			line += "  " + rest[i]
		}
		fmt.Fprintln(b, strings.TrimRight(line, " "))
	}
}

func padText(text string, width int, left bool) string {
	blanks := strings.Repeat(" ", max(0, width-utf8.RuneCountInString(text)))
	if left {
		return text + blanks
	}
	return blanks + text
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
	if len(parts) == 0 && x.numbers == 0 {
		return "never there"
	}
	return strings.Join(parts, ", ")
}
