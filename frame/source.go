package frame

// Source yields frames in the order in which the capture or the bus has them.
type Source interface {
	// Read fills batch from its front and returns how many frames it filled.
	// It returns n > 0 with a nil error, or 0 with io.EOF or the error that
	// ends the source. Rejected records are skipped and told through Counts.
	Read(batch []Frame) (n int, err error)
	// Interfaces names the interfaces (vcan0, ...) seen so far; a Frame's Bus
	// is an index into it. The slice only grows.
	Interfaces() []string
	// Counts tells what was read so far.
	Counts() Counts
}

// Counts is a source's part of the accounting: Records = frames handed out
// (data, remote and error) + Malformed.
type Counts struct {
	Records   int64 // records read; blank and comment lines aren't records
	Malformed int64 // records that were rejected
	Bytes     int64 // bytes read, after decompression
}
