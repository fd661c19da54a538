// Package plain is the reader that anyone would write first: the standard
// library's line scanner, the CAN library's own frame parser and bit helpers,
// and floating point. Benchmarks hold Busloom against it; nothing else uses it.
package plain

import (
	"bufio"
	"bytes"
	"fmt"
	"io"
	"strconv"

	"busloom/bits"
	"busloom/schema"

	"go.einride.tech/can"
)

// signal is one value as the CAN library's helpers want it.
type signal struct {
	name       string
	start, len uint8
	bigEndian  bool
	signed     bool
	scale, off float64
	unit       string
}

// message has the signals that are always there and that the helpers can read.
type message struct {
	name    string
	signals []signal
}

// Reader decodes the classic frames of a log.
type Reader struct {
	byBus map[string]map[uint32]*message
}

// Result counts the work that was done, so that unequal work shows.
type Result struct {
	Lines, Frames, Values int64
	Sum                   float64
}

// New makes a reader of a network; buses are found by interface name.
func New(network *schema.Network, interfaces map[string]string) *Reader {
	r := &Reader{byBus: map[string]map[uint32]*message{}}
	for iface, bus := range interfaces {
		ids := map[uint32]*message{}
		for _, m := range network.Messages {
			if m.Bus.Name != bus || m.FD || m.Size > 8 {
				continue
			}
			out := &message{name: m.Name}
			for _, s := range m.Signals {
				if p, ok := plainSignal(s); ok && len(s.When) == 0 {
					out.signals = append(out.signals, p)
				}
			}
			ids[m.ID.Send] = out
		}
		r.byBus[iface] = ids
	}
	return r
}

func plainSignal(s *schema.Signal) (signal, bool) {
	if len(s.Place.Runs) != 1 || s.Width > 64 || s.Curve != nil {
		return signal{}, false
	}
	run := s.Place.Runs[0]
	out := signal{name: s.Name, len: uint8(s.Width), scale: 1, unit: s.Unit.Symbol, signed: s.Kind == schema.Signed}
	if s.Affine != nil {
		out.scale, _ = s.Affine.A.Float64()
		out.off, _ = s.Affine.B.Float64()
	}
	if run.Heavy.Byte < run.Light.Byte {
		out.bigEndian = true
		out.start = position(run.Heavy)
	} else {
		out.start = position(run.Light)
	}
	return out, true
}

func position(b bits.Bit) uint8 { return uint8(8*b.Byte + b.Bit) }

// Read decodes everything; with out it also prints each value as a CSV row.
func (r *Reader) Read(in io.Reader, out io.Writer) (Result, error) {
	var res Result
	var row []byte
	lines := bufio.NewScanner(in)
	for lines.Scan() {
		res.Lines++
		line := lines.Bytes()
		open, rest, ok := bytes.Cut(line, []byte(" "))
		if !ok {
			continue
		}
		iface, text, ok := bytes.Cut(rest, []byte(" "))
		if !ok || bytes.Contains(text, []byte("##")) {
			continue
		}
		var f can.Frame
		if err := f.UnmarshalString(string(text)); err != nil {
			continue
		}
		m := r.byBus[string(iface)][f.ID]
		if m == nil {
			continue
		}
		res.Frames++
		for i := range m.signals {
			s := &m.signals[i]
			value := s.value(&f.Data)
			res.Values++
			res.Sum += value
			if out != nil {
				row = append(row, open[1:len(open)-1]...)
				row = append(append(row, ','), iface...)
				row = append(append(row, ','), m.name...)
				row = append(append(row, ','), s.name...)
				row = strconv.AppendFloat(append(row, ','), value, 'f', -1, 64)
				row = append(append(row, ','), s.unit...)
				row = append(row, '\n')
			}
		}
		if len(row) > 1<<16 {
			if _, err := out.Write(row); err != nil {
				return res, err
			}
			row = row[:0]
		}
	}
	if out != nil && len(row) > 0 {
		if _, err := out.Write(row); err != nil {
			return res, err
		}
	}
	if err := lines.Err(); err != nil {
		return res, fmt.Errorf("line %d: %w", res.Lines, err)
	}
	return res, nil
}

func (s *signal) value(d *can.Data) float64 {
	var v float64
	switch {
	case s.bigEndian && s.signed:
		v = float64(d.SignedBitsBigEndian(s.start, s.len))
	case s.bigEndian:
		v = float64(d.UnsignedBitsBigEndian(s.start, s.len))
	case s.signed:
		v = float64(d.SignedBitsLittleEndian(s.start, s.len))
	default:
		v = float64(d.UnsignedBitsLittleEndian(s.start, s.len))
	}
	return v*s.scale + s.off
}
