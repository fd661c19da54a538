package capture

import (
	"bytes"
	"slices"
	"strings"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

// A block depends on its place and the interfaces only: blocks parsed last to
// first, each by a parser of its own, come to what one parser makes of them in
// their order.
func TestBlocksAreParsedByThemselves(t *testing.T) {
	text := numberedLines(30000) + "(1.0) can0 1#\n# note\n" + strings.Repeat("x", 500_000) + "\n" + numberedLines(20000)
	want, source, _, err := readAll(t, strings.NewReader(text), Options{})
	require.NoError(t, err)

	type job struct {
		block        block
		line, record int64
	}
	var jobs []job
	blocks := newBlockReader(strings.NewReader(text))
	scout := parser{ifaces: newInterfaces()}
	overlong := 0
	for b, err := blocks.next(); err == nil; b, err = blocks.next() {
		scout.offset = b.offset
		if b.kind == overlongLine {
			overlong++
			scout.line++
			scout.overlong(b.data)
			continue
		}
		b.data = append(slices.Clone(b.data), make([]byte, slack)...)[:len(b.data)]
		jobs = append(jobs, job{b, scout.line, scout.record})
		scout.parse(b.data, make([]frame.Frame, bytes.Count(b.data, []byte("\n"))))
	}
	require.Greater(t, len(jobs), 5)
	require.Equal(t, 1, overlong)

	parts := make([][]frame.Frame, len(jobs))
	for i, j := range slices.Backward(jobs) {
		p := parser{ifaces: scout.ifaces, offset: j.block.offset, line: j.line, record: j.record}
		batch := make([]frame.Frame, bytes.Count(j.block.data, []byte("\n")))
		n, used := p.parse(j.block.data, batch)
		require.Equal(t, len(j.block.data), used)
		parts[i] = batch[:n]
	}
	got := slices.Concat(parts...)
	for i := range got {
		clear(got[i].Data[got[i].Len:])
	}
	require.Equal(t, want, got)
	require.Equal(t, source.Interfaces(), scout.ifaces.names)
}
