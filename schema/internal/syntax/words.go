package syntax

// The words of the language by what they begin.

// declWords begin a declaration; network and use come before all others.
var declWords = wordSet("network", "use", "bus", "ecu", "unit", "const", "codes", "states", "curve", "idform", "crc", "shape", "message")

// factWords begin a line of a body that isn't a member.
var factWords = wordSet("from", "every", "on", "fill", "default", "unused", "holds", "relayed", "replaced", "note", "select")

// branchWords begin a branch of a selection.
var branchWords = wordSet("when", "otherwise")

// clauseWords begin a clause of a member.
var clauseWords = wordSet("signed", "sign", "float", "packed", "flag", "bytes", "text", "always", "counter", "checksum",
	"in", "within", "codes", "states", "initial", "tolerance", "replaced", "note")

// notUnits are the words that may follow a number on its line without being
// its unit. byte isn't one of them: 8 byte is a quantity, and a length.
var notUnits = wordSet(
	"allowed", "alternating", "always", "apart", "as", "bits", "both", "bus", "bytes", "check", "checksum", "codes", "const",
	"counter", "crc", "curve", "decimal", "default", "ecu", "end", "every", "fd", "fill", "final", "flag", "float", "from",
	"holds", "id", "idform", "in", "initial", "input", "lost", "low", "message", "network", "nibble", "note", "on",
	"or", "otherwise", "output", "outside", "over", "packed", "polynomial", "reflected", "relayed", "repeated", "replaced", "select",
	"shape", "sign", "signed", "states", "step", "text", "then", "to", "tolerance", "unit", "unused", "use", "when", "with", "within",
)

// NotUnit reports whether a word can't be the name of a unit, because it may
// follow a number as a word of the language.
func NotUnit(word string) bool { return notUnits[word] }

func wordSet(words ...string) map[string]bool {
	out := make(map[string]bool, len(words))
	for _, w := range words {
		out[w] = true
	}
	return out
}
