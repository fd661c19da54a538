// Package ident turns the names and paths of a description into identifiers of
// generated code. Its functions are pure: the same path gives the same
// identifier everywhere, so the compiler can refuse two names that would become
// one.
package ident
