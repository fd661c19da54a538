package decode

import (
	"busloom/bits"
	"busloom/crc"
	"busloom/frame"
	"busloom/schema"
)

// checksum verifies the checksum of a message.
type checksum struct {
	place   bits.Extractor
	engine  *crc.Engine // nil for xor8 and sum8
	sum     bool
	feeds   []schema.Feed
	counter *bits.Extractor
	need    int // payload bytes

	// For narrow CRCs over a known number of bytes: the checksum of the
	// constant bytes, what each payload byte adds to it, and what the bytes
	// add that the counter chooses.
	apart     bool
	base      uint64
	terms     []term
	byCounter []uint16
}

// term is a payload byte's part of a checksum.
type term struct {
	table *[256]uint16
	at    uint8
}

// apartTables shares the tables of crc.Apart among the messages of a plan.
type apartTables map[apartKey]*[256]uint16

type apartKey struct {
	params crc.Params
	after  int
}

func (t apartTables) get(e *crc.Engine, after int) *[256]uint16 {
	key := apartKey{e.Params(), after}
	key.params.Name = ""
	if t[key] == nil {
		t[key] = e.Apart(after)
	}
	return t[key]
}

func newChecksum(s *schema.Signal, tables apartTables) *checksum {
	rule := s.Checksum
	c := &checksum{place: bits.Compile(s.Place), feeds: rule.Feed, sum: rule.Method == "sum8"}
	c.need = c.place.Need()
	if rule.Counter != nil {
		e := bits.Compile(rule.Counter.Place)
		c.counter = &e
		c.need = max(c.need, e.Need())
	}
	length := 0
	for _, f := range rule.Feed {
		switch {
		case f.Kind != schema.FeedBytes:
			length++
		case f.Last < 0:
			c.need = max(c.need, f.First)
			length = -1 << 20 // unknown
		default:
			c.need = max(c.need, f.Last+1)
			length += f.Last + 1 - f.First
		}
	}
	if rule.CRC != nil {
		c.engine = crc.New(*rule.CRC)
		if rule.CRC.Width <= crc.MaxApart && length >= 0 {
			c.takeApart(tables, length)
		}
	}
	return c
}

// takeApart prepares the tables.
func (c *checksum) takeApart(tables apartTables, length int) {
	c.apart, c.base = true, c.engine.Zeros(length)
	left := length
	for _, f := range c.feeds {
		switch f.Kind {
		case schema.FeedBytes:
			for at := f.First; at <= f.Last; at++ {
				left--
				c.terms = append(c.terms, term{tables.get(c.engine, left), uint8(at)})
			}
		case schema.FeedByCounter:
			left--
			if len(c.byCounter) != 0 && len(c.byCounter) != len(f.Table) {
				c.apart = false // two tables of different lengths: rare, done bytewise
				return
			}
			if c.byCounter == nil {
				c.byCounter = make([]uint16, len(f.Table))
			}
			for i, b := range f.Table {
				c.byCounter[i] ^= tables.get(c.engine, left)[b]
			}
		default:
			left--
			c.base ^= uint64(tables.get(c.engine, left)[f.Byte])
		}
	}
}

// check is Unchecked if the frame is too short for it.
func (c *checksum) check(f *frame.Frame) Check {
	if int(f.Len) < c.need {
		return Unchecked
	}
	var got uint64
	switch {
	case c.apart:
		acc := uint16(0)
		for i := range c.terms {
			t := &c.terms[i]
			acc ^= t.table[f.Data[t.at&(frame.MaxLen-1)]]
		}
		if c.byCounter != nil {
			acc ^= c.byCounter[c.counter.Raw(f.Data[:])%uint64(len(c.byCounter))]
		}
		got = c.base ^ uint64(acc)
	case c.engine != nil:
		got = c.crc(f)
	default:
		got = uint64(c.bytewise(f))
	}
	if got == c.place.Raw(f.Data[:]) {
		return Good
	}
	return Bad
}

// stretch is the payload bytes of a feed.
func stretch(feed *schema.Feed, f *frame.Frame) []byte {
	if feed.Last < 0 {
		return f.Data[feed.First:f.Len]
	}
	return f.Data[feed.First : feed.Last+1]
}

func (c *checksum) chosen(feed *schema.Feed, f *frame.Frame) byte {
	return feed.Table[c.counter.Raw(f.Data[:])%uint64(len(feed.Table))]
}

func (c *checksum) crc(f *frame.Frame) uint64 {
	reg := c.engine.Start()
	for i := range c.feeds {
		switch feed := &c.feeds[i]; feed.Kind {
		case schema.FeedBytes:
			reg = c.engine.Update(reg, stretch(feed, f))
		case schema.FeedByCounter:
			reg = c.engine.UpdateByte(reg, c.chosen(feed, f))
		default:
			reg = c.engine.UpdateByte(reg, feed.Byte)
		}
	}
	return c.engine.Finish(reg)
}

// bytewise is the exclusive or, or the sum, of all that is fed.
func (c *checksum) bytewise(f *frame.Frame) byte {
	var reg byte
	var one [1]byte
	for i := range c.feeds {
		feed := &c.feeds[i]
		data := one[:]
		switch feed.Kind {
		case schema.FeedBytes:
			data = stretch(feed, f)
		case schema.FeedByCounter:
			one[0] = c.chosen(feed, f)
		default:
			one[0] = feed.Byte
		}
		if c.sum {
			reg = crc.SUM8(reg, data)
		} else {
			reg = crc.XOR8(reg, data)
		}
	}
	return reg
}
