package schema

import (
	"fmt"
	"math/big"

	"busloom/diag"
	"busloom/schema/internal/syntax"
	"busloom/unit"
)

// Highest bit rates: ISO 11898-2:2016 (classic CAN 1 Mbit/s), common practice
// (transceivers with signal improvement, 8 Mbit/s in the data phase).
const (
	highestRate   = 1_000_000
	highestFDRate = 8_000_000
)

// defineBuses checks bit rates.
func (c *compiler) defineBuses() {
	eachDecl(c, func(src *source, d *syntax.BusDecl) {
		sym := c.own(src, nsBus, d.Name)
		if sym == nil {
			return
		}
		bus := &Bus{Name: d.Name.Text, Text: d.Text.Value, Span: d.Name.Span}
		ok := c.bitRate(src, d.Rate, highestRate, "the bit rate", &bus.BitRate)
		if d.FD != nil {
			ok = c.bitRate(src, *d.FD, highestFDRate, "the data bit rate", &bus.FDRate) && ok
			if ok && bus.FDRate < bus.BitRate {
				c.report(diag.BusMistake, d.FD.Span, fmt.Sprintf("the data phase is slower (%s) than the rest (%s)", d.FD.Span.Text(), d.Rate.Span.Text()), "give the higher rate behind fd")
				ok = false
			}
		}
		if ok {
			sym.bus = bus
			c.net.Buses = append(c.net.Buses, bus)
		}
	})
}

func (c *compiler) bitRate(src *source, q syntax.Quantity, highest int64, what string, to *int64) bool {
	if q.Number.Value == nil {
		return false
	}
	perSecond := unit.Unit{Symbol: "bit/s", Dim: "bit s^-1", Factor: big.NewRat(1, 1)}
	v, ok := c.quantity(src, q, perSecond, false, what)
	if !ok {
		return false
	}
	if !v.IsInt() || v.Sign() <= 0 || v.Cmp(big.NewRat(highest, 1)) > 0 {
		c.report(diag.BusMistake, q.Span, fmt.Sprintf("%s of %s isn't one that a bus has: more than 0, at most %d kbit/s", what, q.Span.Text(), highest/1000), "write it such as 500 kbit/s")
		return false
	}
	*to = v.Num().Int64()
	return true
}

// defineECUs checks where ECUs are and that no source address is given twice
// on a bus.
func (c *compiler) defineECUs() {
	type address struct {
		bus    *Bus
		source uint8
	}
	taken := map[address]*syntax.ECUDecl{}
	eachDecl(c, func(src *source, d *syntax.ECUDecl) {
		sym := c.own(src, nsECU, d.Name)
		if sym == nil {
			return
		}
		ecu := &ECU{Name: d.Name.Text, Text: d.Text.Value, Span: d.Name.Span}
		complete := true
		for i, name := range d.Buses {
			bus := c.resolveName(src, nsBus, name)
			if bus == nil || bus.bus == nil {
				complete = false
				continue
			}
			if onBus(ecu, bus.bus) {
				c.report(diag.DuplicateName, name.Span, fmt.Sprintf("%s is on %s twice", d.Name.Text, name.Text), "remove one of the two").Also(d.Buses[i-1].Span, "already here")
				continue
			}
			ecu.Buses = append(ecu.Buses, bus.bus)
		}
		if d.Source != nil {
			v, ok := wholeBelow(*d.Source, 256)
			if !ok {
				c.report(diag.SourceClash, d.Source.Span, fmt.Sprintf("a source address is a byte, and %s is none", d.Source.Raw), "write 0x00 to 0xFF")
				return
			}
			source := uint8(v)
			ecu.Source = &source
			for _, b := range ecu.Buses {
				key := address{b, source}
				if first := taken[key]; first != nil {
					c.report(diag.SourceClash, d.Source.Span, fmt.Sprintf("%s has the source address 0x%02X on %s already", first.Name.Text, source, b.Name), "give each ECU of a bus an address of its own").
						Also(first.Source.Span, "given here")
				} else {
					taken[key] = d
				}
			}
		}
		if complete {
			sym.ecu = ecu
			c.net.ECUs = append(c.net.ECUs, ecu)
		}
	})
}

func onBus(e *ECU, b *Bus) bool {
	for _, have := range e.Buses {
		if have == b {
			return true
		}
	}
	return false
}
