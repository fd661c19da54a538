package main

import (
	"fmt"
	"runtime/debug"
)

// Exit codes, as docs/output.md has them.
const (
	exitClean       = 0
	exitDescription = 1
	exitUsage       = 2
	exitMalformed   = 3
	exitProtection  = 4
	exitIO          = 5
	exitInterrupted = 130
)

// exitError ends the program with a code, and a sentence if there is one.
type exitError struct {
	code int
	err  error
}

func (e *exitError) Error() string {
	if e.err == nil {
		return fmt.Sprintf("exit code %d", e.code)
	}
	return e.err.Error()
}

func (e *exitError) Unwrap() error { return e.err }

func usageError(format string, args ...any) error {
	return &exitError{exitUsage, fmt.Errorf(format, args...)}
}

func ioError(err error) error { return &exitError{exitIO, err} }

// version is the module's version, or devel with the revision it was built
// from.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		return "unknown"
	}
	v := info.Main.Version
	if v == "" || v == "(devel)" {
		v = "devel"
	}
	return v
}
