package frame

import (
	"errors"
	"fmt"

	"go.einride.tech/can"
)

// ErrNotClassic is returned for frames that the CAN library's Frame can't
// hold: FD frames and error reports.
var ErrNotClassic = errors.New("no classic CAN frame")

// ToLibrary is the frame as the CAN library has it. Time, bus and a length
// code above 8 are left behind.
func (f *Frame) ToLibrary() (can.Frame, error) {
	if f.Flags&(FD|Error) != 0 {
		return can.Frame{}, ErrNotClassic
	}
	out := can.Frame{ID: f.ID, Length: f.Len, IsRemote: f.Has(Remote), IsExtended: f.Has(Extended)}
	if out.IsRemote {
		out.Length = min(f.DLC, 8)
		return out, nil
	}
	copy(out.Data[:], f.Payload())
	return out, nil
}

// FromLibrary makes a frame of the CAN library's.
func FromLibrary(in can.Frame) (Frame, error) {
	if err := in.Validate(); err != nil {
		return Frame{}, fmt.Errorf("%w: %w", ErrNotClassic, err)
	}
	out := Frame{ID: in.ID, Len: in.Length, DLC: in.Length}
	if in.IsExtended {
		out.Flags |= Extended
	}
	if in.IsRemote {
		out.Flags |= Remote
		out.Len = 0
		return out, nil
	}
	copy(out.Data[:], in.Data[:in.Length])
	return out, nil
}
