package schema

// The words of a database for the model's small enumerations, one table each
// way.

var kindWords = map[Kind]string{
	Unsigned: "unsigned", Signed: "signed", SignMagnitude: "signMagnitude",
	Float: "float", PackedDecimal: "packedDecimal", Flag: "flag", States: "states",
	TextASCII: "textASCII", TextUTF8: "textUTF8", Bytes: "bytes",
	Counter: "counter", Checksum: "checksum",
}

var classWords = map[CodeClass]string{Absent: "absent", Fault: "fault", Reserved: "reserved"}

var outsideWords = map[Outside]string{Hold: "hold", Extend: "extend", None: "none"}

var otherwiseWords = map[OtherwiseRule]string{
	Exhausted: "exhausted", OtherwiseNothing: "nothing",
	OtherwiseUnknown: "unknown", OtherwiseBody: "branch",
}

// String is the word people see.
func (k Kind) String() string { return kindWords[k] }

// String is the word of the language.
func (c CodeClass) String() string { return classWords[c] }

// String is the word of the language.
func (o Outside) String() string { return outsideWords[o] }

// word finds the value of a word, the other way round.
func word[V comparable](words map[V]string, text string) (v V, ok bool) {
	for v, w := range words {
		if w == text {
			return v, true
		}
	}
	return v, false
}
