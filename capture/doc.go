// Package capture turns captures into frames: candump-style text in its log
// and screen forms, mixed at will, plain or gzip.
//
// Bytes are cut into blocks of whole lines (blocks.go); a block is parsed by
// itself (parse.go), so that a later reader can parse several at once and keep
// their order. A line goes through the fast path (fast.go) if it looks like
// most lines do, else through the plain parser (line*.go), which alone says
// what a record is. A broken line becomes a Reject, and reading goes on.
package capture
