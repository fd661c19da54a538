package bits

import "fmt"

// Bit is one position of a payload.
type Bit struct {
	Byte int // 0 is the first byte
	Bit  int // 7 is the heaviest of its byte
}

// String is the form of the language, such as 3.7.
func (b Bit) String() string { return fmt.Sprintf("%d.%d", b.Byte, b.Bit) }

// Run is an unbroken stretch from its heaviest bit to its lightest.
//
//   - Heavy.Byte == Light.Byte: the bits between, Heavy.Bit >= Light.Bit.
//   - Heavy.Byte < Light.Byte: heavy byte first. The run goes down to bit 0 of
//     the heavy byte and on at bit 7 of the next higher byte.
//   - Heavy.Byte > Light.Byte: light byte first. The run goes down to bit 0 of
//     the heavy byte and on at bit 7 of the next lower byte.
type Run struct {
	Heavy, Light Bit
}

// Place is where a value sits: its runs, heaviest first.
type Place struct {
	Runs []Run
}
