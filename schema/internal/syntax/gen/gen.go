package gen

import (
	"fmt"
	"strings"

	"pgregory.net/rapid"
)

// Text makes descriptions without syntax errors. Words of the language occur
// as names, and comments and blank lines stand anywhere.
func Text() *rapid.Generator[string] {
	return rapid.Custom(func(t *rapid.T) string {
		w := &writer{t: t}
		w.file()
		return w.b.String()
	})
}

// writer writes words with random layout between them.
type writer struct {
	t    *rapid.T
	b    strings.Builder
	open bool // the next word needs layout before it
}

func (w *writer) pick(n int) int        { return rapid.IntRange(0, n-1).Draw(w.t, "pick") }
func (w *writer) oneIn(n int) bool      { return w.pick(n) == 0 }
func (w *writer) some(from, to int) int { return rapid.IntRange(from, to).Draw(w.t, "some") }

func (w *writer) of(words ...string) string { return words[w.pick(len(words))] }

// put writes words, each after some layout.
func (w *writer) put(words ...string) {
	for _, word := range words {
		if w.open {
			w.layout()
		}
		w.b.WriteString(word)
		w.open = true
	}
}

func (w *writer) layout() {
	switch w.pick(24) {
	case 0:
		w.b.WriteString("\n")
	case 1:
		w.b.WriteString("\n\n\n")
	case 2:
		w.b.WriteString(" // " + w.of("why", "\"so\"", "{ not }", "/// at 0.7") + "\n")
	case 3:
		w.b.WriteString("\r\n\t")
	case 4:
		w.b.WriteString("\n// above\n\n// and above\n  ")
	default:
		w.b.WriteString(" ")
	}
}

func (w *writer) line() {
	w.b.WriteString(w.of("\n", "\n", "\n\n", "  // behind\n", "\n// above\n"))
	w.open = false
}

var names = []string{"speed", "A", "wheel_2", "x", "Brake", "fill", "every", "select", "from", "to", "or", "signed", "unit", "within",
	"bus", "message", "codes", "states", "in", "on", "end", "note", "then", "step", "when", "otherwise", "counter", "text", "byte", "bytes",
	"curve", "use", "network", "by", "replaced", "e2e", "lost", "over", "nothing", "hold", "const"}

func (w *writer) name() string { return w.of(names...) }

func (w *writer) number() string {
	switch w.pick(8) {
	case 0:
		return fmt.Sprintf("0x%X", w.some(0, 70000))
	case 1:
		return "0b101"
	case 2:
		return fmt.Sprintf("%d/%d", w.some(1, 300), w.some(1, 300))
	case 3:
		return fmt.Sprintf("%d.%02d", w.some(0, 20), w.some(0, 99))
	case 4:
		return w.of("1e-3", "1_000", "2E6", "1.5e+2")
	}
	return fmt.Sprint(w.some(0, 300))
}

func (w *writer) unit() string {
	return w.of("km/h", "m/s^2", "%", "ms", "degC", "kbit/s", "°", "µm", "tooth", "kg*m^2", "x", "ohm")
}

// plainUnit is one that can stand where no number is before it.
func (w *writer) plainUnit() string {
	return w.of("km/h", "m/s^2", "%", "ms", "degC", "V/%", "°", "kg*m^2", "rpm")
}

func (w *writer) quantity() {
	text := w.number()
	if w.oneIn(4) {
		text = "-" + text
	}
	switch w.pick(3) {
	case 0:
		text += " " + w.unit()
	case 1:
		if !strings.ContainsAny(text, "x_") && w.oneIn(3) && !strings.Contains(text, "0b") {
			text += w.of("km/h", "V", "%")
		}
	}
	w.put(text)
}

func (w *writer) texts() {
	for w.oneIn(3) {
		w.put(w.of(`"At the wheels"`, `"with \"quotes\" and \\"`, `""`, `"ä µ {"`, `"// no comment"`))
	}
}

func (w *writer) path() {
	text := w.name()
	for w.oneIn(3) {
		text += "." + w.name()
		if w.oneIn(3) {
			text += "[" + w.of(w.name(), "2") + "]"
		}
	}
	w.put(text)
}

func (w *writer) list(item func()) {
	for i := range w.some(1, 3) {
		if i > 0 {
			w.put(",")
		}
		item()
	}
}

func (w *writer) file() {
	w.put("busloom", "1")
	w.line()
	if w.oneIn(2) {
		w.put("network", w.name())
		w.texts()
		w.line()
	}
	for range w.some(0, 2) {
		w.put("use", `"common/ranges.bus"`)
		if w.oneIn(2) {
			w.put("as", w.name())
		}
		w.line()
	}
	for range w.some(0, 5) {
		w.decl()
		w.line()
	}
}

func (w *writer) decl() {
	switch w.pick(11) {
	case 0:
		w.put("bus", w.name())
		w.quantity()
		if w.oneIn(2) {
			w.put("fd")
			w.quantity()
		}
		w.texts()
	case 1:
		w.put("ecu", w.name(), "on")
		w.list(func() { w.put(w.name()) })
		if w.oneIn(2) {
			w.put("with", "source", w.number())
		}
		w.texts()
	case 2:
		w.put("unit", w.of("tooth", "lap"))
		if w.oneIn(2) {
			w.put("=")
			w.quantity()
		}
		w.texts()
	case 3:
		w.put("const", w.name(), "=")
		w.expr(3)
		w.texts()
	case 4:
		w.put(w.of("codes", "states"), w.name())
		if w.oneIn(3) {
			w.put("by", "top", "byte")
		}
		w.texts()
		w.entries()
	case 5:
		w.put("curve", w.name(), "from", w.plainUnit(), "to", w.plainUnit(), "outside", w.of("hold", "extend", "none"))
		w.texts()
		w.put("{")
		for range w.some(0, 4) {
			w.put(w.of("", "-")+w.number(), ":", w.of("", "-")+w.number())
		}
		w.put("}")
	case 6:
		w.put("idform", w.name(), "29", "bits")
		w.texts()
		w.put("{")
		w.list(func() { w.put(w.name(), w.number()) })
		w.put("}")
	case 7:
		w.put("crc", w.name(), "8", "bits")
		w.texts()
		w.put("{")
		for _, k := range []string{"polynomial", "initial", "final", "check"} {
			if w.oneIn(2) {
				w.put(k, w.number())
			}
		}
		for _, k := range []string{"input", "output"} {
			if w.oneIn(2) {
				w.put("reflected", k)
			}
		}
		w.put("}")
	case 8:
		w.put("shape", w.name(), w.of("1", "3"), w.of("byte", "bytes"))
		w.texts()
		w.body(2, "+")
	default:
		w.put("message", w.name())
		w.id()
		w.put("on", w.name(), ",")
		if w.oneIn(3) {
			w.put("fd")
		}
		if w.oneIn(3) {
			w.put("at", "least")
		}
		w.put("8", "bytes")
		w.texts()
		w.body(2, "")
	}
}

func (w *writer) id() {
	if w.oneIn(2) {
		w.put(w.number())
		return
	}
	w.path()
	w.put("(")
	if w.oneIn(4) {
		w.put(")")
		return
	}
	w.list(func() {
		w.put(w.name())
		if w.oneIn(2) {
			w.put("usually")
		}
		w.put(w.number())
	})
	w.put(")")
}

func (w *writer) raw() {
	if w.oneIn(3) {
		w.put("ones")
		if w.oneIn(2) {
			w.put("-", w.number())
		}
		return
	}
	w.put(w.number())
}

func (w *writer) raws() {
	w.raw()
	if w.oneIn(3) {
		w.put("..")
		w.raw()
	}
}

func (w *writer) entries() {
	w.put("{")
	for range w.some(0, 4) {
		w.raws()
		w.put(":")
		switch w.pick(3) {
		case 0:
			w.put(w.of("absent", "fault", "reserved"))
		case 1:
			w.put(w.of("absent", "fault", "reserved"), w.name())
		default:
			w.put(w.name())
		}
		w.texts()
	}
	w.put("}")
}

// expr writes a formula at most so deep.
func (w *writer) expr(depth int) {
	w.term(depth)
	for w.oneIn(3) {
		w.put(w.of("+", "-"))
		w.term(depth)
	}
}

func (w *writer) term(depth int) {
	w.factor(depth)
	for w.oneIn(3) {
		w.put(w.of("*", "/"))
		// A stroke glued to a name is an error of its own.
		w.b.WriteString(" ")
		w.factor(depth)
	}
}

func (w *writer) factor(depth int) {
	if w.oneIn(6) {
		w.put("-")
	}
	kind := w.pick(5)
	if depth == 0 {
		kind = w.pick(3)
	}
	switch kind {
	case 0:
		w.put("raw")
	case 1:
		text := w.number()
		if w.oneIn(2) {
			text += " " + w.unit()
		}
		w.put(text)
	case 2:
		w.path()
	case 3:
		w.put("(")
		w.expr(depth - 1)
		w.put(")")
	default:
		w.path()
		w.put("(")
		w.expr(depth - 1)
		w.put(")")
	}
}

func (w *writer) run(plus string) {
	text := fmt.Sprintf("%s%d.%d", plus, w.some(0, 63), w.some(0, 7))
	switch w.pick(4) {
	case 0:
		text += "..end"
	case 1:
	default:
		text += fmt.Sprintf("..%d.%d", w.some(0, 63), w.some(0, 7))
	}
	w.put(text)
}

// after says what the last item may take to itself, so that a fact behind it
// would not be one.
type after struct{ note, fill bool }

func (w *writer) body(depth int, plus string) {
	w.put("{")
	var last after
	for range w.some(0, 5) {
		last = w.item(depth, plus, last)
		if w.oneIn(2) {
			w.line()
		}
	}
	w.put("}")
}

func (w *writer) item(depth int, plus string, last after) after {
	switch w.pick(16) {
	case 0:
		w.put("from")
		switch w.pick(3) {
		case 0:
			w.put("any")
		case 1:
			w.list(func() { w.put(w.name()) })
		default:
			w.put(w.name(), "or", w.name())
		}
		if w.oneIn(2) {
			w.put("to")
			w.list(func() { w.put(w.name()) })
		}
	case 1:
		if w.oneIn(3) {
			w.put("on", w.of("change", "request"))
		} else {
			w.put("every")
			w.quantity()
			if w.oneIn(3) {
				w.put("or", "on", w.of("change", "request"))
			}
		}
		if w.oneIn(2) {
			w.put(",", "lost", "after")
			w.quantity()
		}
		if w.oneIn(2) {
			w.put(",", "at", "least")
			w.quantity()
			w.put("apart")
		}
	case 2:
		if last.fill {
			return last
		}
		w.put("fill", w.number())
	case 3:
		w.put("default", "codes")
		w.path()
	case 4:
		w.put("unused")
		w.list(func() { w.run(plus) })
	case 5:
		w.put("holds")
		w.path()
		w.put("from", "byte", "2")
	case 6:
		w.put("relayed", "by", w.name(), "to", w.name())
		if w.oneIn(2) {
			w.put("as")
			w.id()
		}
	case 7:
		if last.note {
			return last
		}
		w.put("replaced", "by")
		w.path()
	case 8:
		if last.note {
			return last
		}
		w.put("note", w.name(), `"text"`)
	case 9:
		w.put(w.name())
		switch w.pick(3) {
		case 0:
			w.put("[")
			w.list(func() { w.put(w.name()) })
			w.put("]")
		case 1:
			w.put("[", "1", "..", "4", "]")
		}
		w.put("is")
		w.path()
		w.put("from", "byte", w.number())
		if w.oneIn(2) {
			w.put("step", w.number())
		}
		w.texts()
	case 10:
		if depth == 0 {
			return last
		}
		w.selection(depth, plus)
	default:
		return w.member(plus)
	}
	return after{}
}

func (w *writer) selection(depth int, plus string) {
	w.put("select")
	w.path()
	w.put("{")
	for range w.some(0, 3) {
		w.put("when")
		w.list(func() {
			if w.oneIn(2) {
				w.put(w.name())
			} else {
				w.raws()
			}
		})
		w.body(depth-1, plus)
	}
	if w.oneIn(2) {
		w.put("otherwise")
		if w.oneIn(2) {
			w.put(w.of("nothing", "unknown"))
		} else {
			w.body(depth-1, plus)
		}
	}
	w.put("}")
}

func (w *writer) member(plus string) after {
	w.put(w.name(), "at")
	w.run(plus)
	for w.oneIn(5) {
		w.put("then")
		w.run(plus)
	}
	// Clauses in any order, each at most once, and none that the kind forbids.
	number, last := true, after{note: true}
	clauses := []func(){}
	add := func(f func()) {
		if w.oneIn(3) {
			clauses = append(clauses, f)
		}
	}
	switch w.pick(12) {
	case 0:
		add(func() { w.put(w.of("signed", "float")) })
	case 1:
		add(func() { w.put("sign", "magnitude") })
	case 2:
		add(func() { w.put("packed", "decimal") })
	case 3:
		number = false
		add(func() { w.put(w.of("flag", "bytes")) })
	case 4:
		number = false
		clauses = append(clauses, func() {
			w.put("text", w.of("ascii", "utf8"))
			if w.oneIn(2) {
				w.put("fill", w.number())
			}
		})
	case 5:
		number = false
		add(func() { w.put("always", w.number()) })
	case 6:
		number = false
		add(func() {
			w.put("counter", w.number(), "..", w.number())
			if w.oneIn(2) {
				w.put("step", w.number())
			}
			if w.oneIn(2) {
				w.put("lost", w.number(), "allowed")
			}
			if w.oneIn(2) {
				w.put("repeated", w.number(), "allowed")
			}
		})
	case 7:
		number = false
		add(w.checksum)
	case 8:
		number = false
		add(func() {
			w.put("states")
			if w.oneIn(2) {
				w.path()
			} else {
				w.entries()
			}
		})
	}
	if number {
		add(func() { w.put("="); w.expr(2) })
		add(func() { w.put("within"); w.quantity(); w.put(".."); w.quantity() })
		add(func() {
			w.put("codes")
			if w.oneIn(2) {
				w.path()
			} else {
				w.entries()
			}
		})
		add(func() { w.put("tolerance"); w.quantity() })
		add(func() {
			w.put("initial")
			if w.oneIn(2) {
				w.put(w.name())
			} else {
				w.quantity()
			}
		})
	}
	add(func() { w.put("replaced", "by"); w.path() })
	add(func() { w.put("note", w.name(), `"BRK-014"`) })
	for _, f := range rapid.Permutation(clauses).Draw(w.t, "order") {
		f()
	}
	last.fill = true
	w.texts()
	return last
}

func (w *writer) checksum() {
	w.put("checksum")
	if w.oneIn(2) {
		w.put("e2e", "profile", w.number())
		if w.oneIn(2) {
			w.put(w.of("both", "alternating", "low", "nibble"))
		}
		w.put(",", "id")
		for range w.some(1, 3) {
			w.put(w.number())
		}
		w.put(",", "counter")
		w.path()
		return
	}
	w.put(w.of("crc8_j1850", "xor8", "my.Body"), "over")
	w.list(func() {
		switch w.pick(3) {
		case 0:
			w.put(w.number())
		case 1:
			w.put("byte", w.number())
		default:
			w.put("bytes", "0", "..", w.of("6", "end"))
		}
	})
}
