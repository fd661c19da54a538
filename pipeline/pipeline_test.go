package pipeline

import (
	"bytes"
	"context"
	"errors"
	"io"
	"testing"

	"busloom/decode"
	"busloom/frame"
	"busloom/output"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

// frames is a source of frames a second apart that ends in err.
type frames struct {
	left      int
	malformed int64
	read      int64
	err       error
}

func (s *frames) Read(batch []frame.Frame) (int, error) {
	n := 0
	for ; n < len(batch) && n < 3 && s.left > 0; n++ {
		s.left--
		s.read++
		batch[n] = frame.Frame{Time: s.read * 1e9, ID: 0x100, Len: 1}
	}
	if n == 0 {
		return 0, s.err
	}
	return n, nil
}

func (s *frames) Interfaces() []string { return []string{"vcan0"} }
func (s *frames) Counts() frame.Counts {
	return frame.Counts{Records: s.read + s.malformed, Malformed: s.malformed}
}

func plan(t *testing.T) *decode.Plan {
	network, list := schema.Compile(schema.MapFiles{"p.bus": "busloom 1\nnetwork P\nbus b 500 kbit/s\necu A on b\necu B on b\nmessage M 0x100 on b, 1 byte {\n  from A to B\n  x at 0.7..0.0\n}\n"}, "p.bus")
	require.False(t, list.Failed())
	p, err := decode.NewPlan(network, decode.Options{})
	require.NoError(t, err)
	return p
}

// failing fails from the given byte on.
type failing struct{ left int }

func (f *failing) Write(p []byte) (int, error) {
	if len(p) > f.left {
		return 0, io.ErrShortWrite
	}
	f.left -= len(p)
	return len(p), nil
}

func TestRun(t *testing.T) {
	seconds := func(s int64, since bool) *Moment { return &Moment{Time: s * 1e9, SinceZero: since} }
	damage := errors.New("damage")
	for _, c := range []struct {
		name    string
		source  *frames
		window  Window
		lines   int
		skipped int64
		read    error
	}{
		{"everything", &frames{left: 10, err: io.EOF}, Window{}, 10, 0, nil},
		{"nothing", &frames{err: io.EOF}, Window{}, 0, 0, nil},
		{"from", &frames{left: 10, err: io.EOF}, Window{From: seconds(8, false)}, 3, 7, nil},
		{"to, after the first", &frames{left: 10, err: io.EOF}, Window{To: seconds(3, true)}, 4, 6, nil},
		{"both", &frames{left: 10, err: io.EOF}, Window{From: seconds(2, true), To: seconds(5, false)}, 3, 7, nil},
		{"damaged", &frames{left: 10, malformed: 2, err: damage}, Window{}, 10, 0, damage},
	} {
		t.Run(c.name, func(t *testing.T) {
			p := plan(t)
			format, err := output.New("csv", p, output.Options{})
			require.NoError(t, err)
			var out bytes.Buffer
			res := Run(context.Background(), Config{Source: c.source, Plan: p, Window: c.window, Format: format, Out: &out})
			require.NoError(t, res.Check(c.source.Counts()))
			require.Equal(t, c.lines, bytes.Count(out.Bytes(), []byte("\n"))-1)
			require.Equal(t, c.skipped, res.Skipped)
			require.Equal(t, c.read, res.Read)
			require.NoError(t, res.Write)
			require.Equal(t, c.source.malformed, res.Totals.Malformed)
		})
	}
}

func TestRunTellsWhatFails(t *testing.T) {
	p := plan(t)
	format, err := output.New("csv", p, output.Options{})
	require.NoError(t, err)
	source := &frames{left: 100_000, err: io.EOF}
	res := Run(context.Background(), Config{Source: source, Plan: p, Format: format, Out: &failing{left: flushAt}})
	require.ErrorIs(t, res.Write, io.ErrShortWrite)
	require.Less(t, source.read, int64(100_000), "it doesn't go on for nothing")
	require.NoError(t, res.Check(source.Counts()))

	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	res = Run(ctx, Config{Source: &frames{left: 10, err: io.EOF}, Plan: p})
	require.True(t, res.Interrupted)
	require.Zero(t, res.Totals.Sum())

	res.Totals.Malformed = 1
	require.ErrorContains(t, res.Check(frame.Counts{}), "accounted for")
}
