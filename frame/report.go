package frame

import (
	"fmt"
	"strings"
)

// Report is what an error frame says. Bits and words: Linux kernel,
// include/uapi/linux/can/error.h.
type Report struct {
	// Class has a phrase for each class bit, in the order of the bits.
	Class []string
	// Detail has what the payload adds, a phrase for each fact; Location and
	// Transceiver are also in it.
	Detail []string
	// Location is the field of the frame that was on the bus at a protocol
	// violation, such as "data section"; empty if unknown.
	Location string
	// Transceiver is the state of the bus wires, such as "CANH short to
	// ground"; empty if unknown.
	Transceiver string
	// Counters is set if the interface's error counters are valid.
	Counters           bool
	TXErrors, RXErrors uint8
}

var errorClasses = []struct {
	bit  uint32
	text string
}{
	{0x001, "transmit timeout"},
	{0x002, "arbitration lost"},
	{0x004, "controller"},
	{0x008, "protocol violation"},
	{0x010, "transceiver"},
	{0x020, "no acknowledgement"},
	{0x040, "bus off"},
	{0x080, "bus error"},
	{0x100, "controller restarted"},
	{0x200, "error counters"},
}

// Class bits that say which payload bytes mean something.
const (
	classLostArbitration = 0x002
	classController      = 0x004
	classProtocol        = 0x008
	classTransceiver     = 0x010
	classCounters        = 0x200
)

var controllerBits = [8]string{
	"receive overflow", "transmit overflow", "receive warning level", "transmit warning level",
	"receive error passive", "transmit error passive", "back to error active", "",
}

var protocolBits = [8]string{
	"bit error", "form error", "stuff error", "can't send a dominant bit", "can't send a recessive bit",
	"overload", "active error", "while transmitting",
}

var protocolPlaces = map[byte]string{
	0x03: "start of frame", 0x02: "ID bits 28 to 21", 0x06: "ID bits 20 to 18", 0x04: "substitute RTR",
	0x05: "identifier extension", 0x07: "ID bits 17 to 13", 0x0F: "ID bits 12 to 5", 0x0E: "ID bits 4 to 0",
	0x0C: "RTR", 0x0D: "reserved bit 1", 0x09: "reserved bit 0", 0x0B: "data length code", 0x0A: "data section",
	0x08: "CRC sequence", 0x18: "CRC delimiter", 0x19: "ACK slot", 0x1B: "ACK delimiter", 0x1A: "end of frame",
	0x12: "intermission",
}

// transceiverHigh and transceiverLow are the states of the two wires: the low
// nibble tells of CANH, the high one of CANL, and both may be faulty at once.
var transceiverHigh = [16]string{
	0x4: "CANH no wire", 0x5: "CANH short to battery", 0x6: "CANH short to supply", 0x7: "CANH short to ground",
}

var transceiverLow = [16]string{
	0x4: "CANL no wire", 0x5: "CANL short to battery", 0x6: "CANL short to supply", 0x7: "CANL short to ground",
	0x8: "CANL short to CANH",
}

// transceiverState is empty for a state that says nothing.
func transceiverState(state byte) string {
	high, low := transceiverHigh[state&15], transceiverLow[state>>4]
	switch {
	case state == 0:
		return ""
	case state&15 != 0 && high == "", state>>4 != 0 && low == "":
		return fmt.Sprintf("transceiver state 0x%02X", state)
	case high != "" && low != "":
		return high + ", " + low
	}
	return high + low
}

// Report reads an error frame. Payload bytes that it lacks say nothing.
func (f *Frame) Report() Report {
	var data [8]byte
	copy(data[:], f.Data[:min(f.Len, 8)])
	var r Report
	known := uint32(0)
	for _, c := range errorClasses {
		known |= c.bit
		if f.ID&c.bit != 0 {
			r.Class = append(r.Class, c.text)
		}
	}
	if rest := f.ID &^ known; rest != 0 {
		r.Class = append(r.Class, fmt.Sprintf("class bits 0x%X", rest))
	}
	if f.ID&classLostArbitration != 0 && data[0] != 0 {
		r.Detail = append(r.Detail, fmt.Sprintf("in bit %d", data[0]))
	}
	if f.ID&classController != 0 {
		r.Detail = appendBits(r.Detail, data[1], controllerBits)
	}
	if f.ID&classProtocol != 0 {
		r.Detail = appendBits(r.Detail, data[2], protocolBits)
		if place, ok := protocolPlaces[data[3]]; ok {
			r.Location = place
			r.Detail = append(r.Detail, "in the "+place)
		} else if data[3] != 0 {
			r.Location = fmt.Sprintf("place 0x%02X", data[3])
			r.Detail = append(r.Detail, "at "+r.Location)
		}
	}
	if f.ID&classTransceiver != 0 {
		if r.Transceiver = transceiverState(data[4]); r.Transceiver != "" {
			r.Detail = append(r.Detail, r.Transceiver)
		}
	}
	if f.ID&classCounters != 0 && f.Len >= 8 {
		r.Counters, r.TXErrors, r.RXErrors = true, data[6], data[7]
	}
	return r
}

func appendBits(dst []string, bits byte, words [8]string) []string {
	for i, w := range words {
		if bits>>i&1 != 0 {
			if w == "" {
				w = fmt.Sprintf("bit %d", i)
			}
			dst = append(dst, w)
		}
	}
	return dst
}

// String is one line: classes, details, counters.
func (r Report) String() string {
	text := strings.Join(r.Class, ", ")
	if text == "" {
		text = "no class"
	}
	if len(r.Detail) > 0 {
		text += ": " + strings.Join(r.Detail, ", ")
	}
	if r.Counters {
		text += fmt.Sprintf("; %d transmit and %d receive errors", r.TXErrors, r.RXErrors)
	}
	return text
}
