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
}

func newChecksum(s *schema.Signal) *checksum {
	rule := s.Checksum
	c := &checksum{place: bits.Compile(s.Place), feeds: rule.Feed, sum: rule.Method == "sum8"}
	c.need = c.place.Need()
	if rule.CRC != nil {
		c.engine = crc.New(*rule.CRC)
	}
	if rule.Counter != nil {
		e := bits.Compile(rule.Counter.Place)
		c.counter = &e
		c.need = max(c.need, e.Need())
	}
	for _, f := range rule.Feed {
		if f.Kind == schema.FeedBytes {
			c.need = max(c.need, max(f.First, f.Last)+1)
		}
	}
	return c
}

// check is Unchecked if the frame is too short for it.
func (c *checksum) check(f *frame.Frame) Check {
	if int(f.Len) < c.need {
		return Unchecked
	}
	var got uint64
	if c.engine != nil {
		got = c.crc(f)
	} else {
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

func (c *checksum) byCounter(feed *schema.Feed, f *frame.Frame) byte {
	return feed.Table[c.counter.Raw(f.Data[:])%uint64(len(feed.Table))]
}

func (c *checksum) crc(f *frame.Frame) uint64 {
	reg := c.engine.Start()
	for i := range c.feeds {
		switch feed := &c.feeds[i]; feed.Kind {
		case schema.FeedBytes:
			reg = c.engine.Update(reg, stretch(feed, f))
		case schema.FeedByCounter:
			reg = c.engine.UpdateByte(reg, c.byCounter(feed, f))
		default:
			reg = c.engine.UpdateByte(reg, feed.Byte)
		}
	}
	return c.engine.Finish(reg)
}

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
			one[0] = c.byCounter(feed, f)
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
