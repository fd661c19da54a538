// Package bits is the only home of bit arithmetic: where a value sits in a
// payload (Place), which bits that is, whether it is legal, how it is drawn,
// and how the raw value is taken out and put in.
//
// A position is written byte.bit, byte 0 the first of the payload, bit 7 the
// heaviest of its byte. A run goes from its heaviest bit to its lightest.
package bits
