package frame

// MaxLen is the largest payload in bytes (CAN FD).
const MaxLen = 64

// Flags tell frames apart. The zero value is a classic data frame with an
// 11-bit identifier.
type Flags uint8

// The flags of a frame.
const (
	Extended      Flags = 1 << iota // 29-bit identifier
	Remote                          // remote request: no data, Len 0
	Error                           // error report of the interface: ID is the class, Data the detail
	FD                              // CAN FD format
	BitRateSwitch                   // FD: data phase at the higher rate
	ErrorPassive                    // FD: the sender was error passive
)

// Frame is one record of a bus. Bytes of Data at and after Len are undefined:
// readers reuse frames and don't clear them.
type Frame struct {
	// Time is in nanoseconds since 1970-01-01 UTC, or since the capture's own
	// zero where its text has no absolute time.
	Time int64
	// Record counts the records of the source from 1; Offset is the record's
	// first byte in its file (after decompression), 0 on live buses.
	Record int64
	Offset int64
	// ID is the identifier without flags, or the class bits of an error frame.
	ID uint32
	// Bus is an index into the source's Interfaces.
	Bus uint16
	// Len is the payload's length in bytes.
	Len uint8
	// DLC is the length code of the wire, 0..15. For classic frames it may be
	// above 8 while Len is 8; a remote frame keeps the requested length here.
	DLC   uint8
	Flags Flags
	Data  [MaxLen]byte
}

// Payload is the data that the frame carries.
func (f *Frame) Payload() []byte { return f.Data[:f.Len] }

// Has reports whether all the flags are set.
func (f *Frame) Has(flags Flags) bool { return f.Flags&flags == flags }
