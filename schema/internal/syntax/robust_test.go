package syntax

import (
	"runtime"
	"strings"
	"testing"

	"busloom/diag"

	"github.com/stretchr/testify/require"
)

// Repeated input must cost no more than it is long. The texts have some
// ten thousand repeats: what costs the square of that would never end.
func TestRepeatedInput(t *testing.T) {
	const n = 60_000
	head := "busloom 1\n"
	body := head + "message A 0x100 on chassis, 8 bytes {\n"
	for name, text := range map[string]string{
		"open parentheses": head + "const a = " + strings.Repeat("(", n),
		"minus signs":      head + "const a = " + strings.Repeat("-", n) + "1",
		"operators":        head + "const a = 1" + strings.Repeat("+1", n),
		"open braces":      head + strings.Repeat("{", n),
		"closing braces":   head + strings.Repeat("}", n),
		"brace pairs":      body + "a at 0.7 " + strings.Repeat("{}", n) + "\n}",
		"brackets":         body + strings.Repeat("a[", n),
		"open selections":  body + strings.Repeat("select a { when 0 {\n", n/4),
		"open messages":    head + strings.Repeat("message A 0x100 on chassis, 8 bytes {\n", n/4),
		"declaration word": head + strings.Repeat("bus ", n),
		"broken constants": head + strings.Repeat("const a = 5 +\n", n/4),
		"words on lines":   head + "bus a\n" + strings.Repeat("x\n", n),
		"names, commas":    head + "ecu a on " + strings.Repeat("unit,\n", n),
		"words in a body":  body + strings.Repeat("x\n", n/2) + "}",
		"broken members":   body + strings.Repeat("a at 0.7 withn 0..3\n", n/8) + "}",
		"broken entries":   head + "codes A {\n" + strings.Repeat("1: 2\n", n/8) + "}",
		"colons":           head + "codes A {" + strings.Repeat(":", n) + "}",
		"dashes, dots":     head + "codes A {" + strings.Repeat("1..1-", n) + ": a}",
		"quotes":           head + strings.Repeat("\"", n),
		"bad bytes":        head + strings.Repeat("$ ", n),
		"texts":            head + "bus a 5 " + strings.Repeat(`"a"`, n),
		"one long number":  head + "const a = " + strings.Repeat("9", n),
		"one long word":    head + strings.Repeat("a", n),
		"one long unit":    head + "const a = 1 " + strings.Repeat("m/", n) + "m",
		"clauses":          body + "a at 0.7" + strings.Repeat(" signed", n/4) + "}",
		"strokes":          head + "const a = 1" + strings.Repeat("/1", n),
		"comments":         head + strings.Repeat("// a\n", n),
	} {
		t.Run(name, func(t *testing.T) {
			src := diag.NewFile("long.bus", []byte(text))
			list := &diag.List{}
			tree := Parse(src, list)
			require.NotNil(t, tree)
			require.LessOrEqual(t, list.Len(), maxProblems+1)
			if _, ok := Format(src, &diag.List{}); ok {
				require.Zero(t, list.Count(diag.Error))
			}
		})
	}
}

// The tree must not depend on how many goroutines parse it.
func TestParallelParsingIsDeterministic(t *testing.T) {
	text := manyMessages(300)
	for i := range 40 {
		text[len(text)/41*(i+1)] = '?'
	}
	run := func() (string, []string) {
		list := &diag.List{}
		tree := Parse(diag.NewFile("large.bus", text), list)
		var said []string
		for _, d := range list.Sorted() {
			said = append(said, d.Error())
		}
		return outline(tree), said
	}
	before := runtime.GOMAXPROCS(1)
	defer runtime.GOMAXPROCS(before)
	tree, said := run()
	require.NotEmpty(t, said)
	runtime.GOMAXPROCS(8)
	for range 3 {
		again, saidAgain := run()
		require.Equal(t, said, saidAgain)
		require.Equal(t, tree, again)
	}
}

// The library drives the lexer through these methods; the parser itself goes
// around them.
func TestLexerDefinition(t *testing.T) {
	const text = "\ufeffbusloom 1\r\nbus a 10ms/s^2 // why\r\nx$"
	kinds := map[int]string{}
	for name, kind := range (definition{}).Symbols() {
		kinds[int(kind)] = name
	}
	want := []string{"Word busloom 1", "Number 1 1", "Word bus 2", "Word a 2", "Number 10 2", "Unit ms/s^2 2", "Word x 3", "Invalid $ 3", "EOF  0"}
	fromReader, err := (definition{}).Lex("a", strings.NewReader(text))
	require.NoError(t, err)
	fromString, err := (definition{}).LexString("a", text)
	require.NoError(t, err)
	fromBytes, err := (definition{}).LexBytes("a", []byte(text))
	require.NoError(t, err)
	for _, lex := range []interface {
		Next() (token, error)
	}{fromReader, fromString, fromBytes} {
		var got []string
		for {
			tok, err := lex.Next()
			require.NoError(t, err)
			got = append(got, strings.Join([]string{kinds[int(tok.Type)], tok.Value, string(rune('0' + tok.Pos.Line))}, " "))
			if tok.EOF() {
				break
			}
		}
		require.Equal(t, want, got)
	}
}
