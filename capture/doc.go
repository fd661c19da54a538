// Package capture turns captures into frames: candump-style text in its log
// and screen forms, plain or gzip. Bytes are cut into blocks of whole lines
// (blocks.go); a block is parsed by itself (parse.go, fast.go), so that a later
// reader can parse several at once and keep their order.
package capture
