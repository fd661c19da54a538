package capture

import (
	"errors"
	"io"

	"busloom/frame"
)

// Chain reads texts one after the other as one source with one numbering of
// interfaces.
type Chain struct {
	texts  []*Text
	at     int
	ifaces *interfaces
}

var _ frame.Source = (*Chain)(nil)

// NewChain joins texts in their order. None of them may have been read before;
// each is closed when it has been read to its end.
func NewChain(texts ...*Text) *Chain {
	c := &Chain{texts: texts, ifaces: newInterfaces()}
	// The texts share one numbering, so no frame has to be renumbered.
	for _, t := range texts {
		t.parser.ifaces = c.ifaces
	}
	return c
}

// Read implements frame.Source. An error of one text ends the chain.
func (c *Chain) Read(batch []frame.Frame) (int, error) {
	for c.at < len(c.texts) {
		n, err := c.texts[c.at].Read(batch)
		if n > 0 || (err != nil && !errors.Is(err, io.EOF)) {
			return n, err
		}
		if err == nil {
			return 0, nil
		}
		if err := c.texts[c.at].Close(); err != nil {
			return 0, err
		}
		c.at++
	}
	return 0, io.EOF
}

// Name is the file that is being read.
func (c *Chain) Name() string {
	if len(c.texts) == 0 {
		return ""
	}
	return c.texts[min(c.at, len(c.texts)-1)].name
}

// Interfaces implements frame.Source.
func (c *Chain) Interfaces() []string { return c.ifaces.names }

// Counts implements frame.Source: the sum of all texts.
func (c *Chain) Counts() frame.Counts {
	var sum frame.Counts
	for _, t := range c.texts {
		n := t.Counts()
		sum.Records += n.Records
		sum.Malformed += n.Malformed
		sum.Bytes += n.Bytes
	}
	return sum
}

// OtherLines is the number of lines read that aren't records, of all texts.
func (c *Chain) OtherLines() int64 {
	sum := int64(0)
	for _, t := range c.texts {
		sum += t.OtherLines()
	}
	return sum
}

// Close closes all texts.
func (c *Chain) Close() error {
	var all error
	for _, t := range c.texts {
		all = errors.Join(all, t.Close())
	}
	return all
}
