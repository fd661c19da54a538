// Package syntax reads descriptions: a lexer, a tree with the span of every
// word, a parser that goes on after mistakes, and the formatter. It knows
// nothing of what names mean.
package syntax
