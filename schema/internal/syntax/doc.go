// Package syntax reads descriptions: a lexer, a tree with the span of every
// word, a parser that goes on after mistakes, and the formatter. It knows
// nothing of what names mean.
//
// A file's tokens are cut at its declarations (split.go), and each piece is
// read whole by the grammar (grammar.go; leaves.go and expr.go by hand). Only a
// piece that can't be read whole is taken apart (recover.go), so that layout
// never changes what a correct file means. The lower files make the tree.
package syntax
