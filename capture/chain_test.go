package capture

import (
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

func TestChainSharesInterfaces(t *testing.T) {
	one := NewText("a", strings.NewReader("(1.0) can1 100#\n# note\n(1.0) can0 100#\n"), Options{})
	two := NewText("b", strings.NewReader("(1.0) can0 100#\nbroken\n\n(1.0) can2 100#\n"), Options{})
	chain := NewChain(one, two)
	require.Equal(t, "a", chain.Name())
	batch := make([]frame.Frame, 10)
	var buses []uint16
	var records []int64
	for {
		n, err := chain.Read(batch)
		for _, f := range batch[:n] {
			buses = append(buses, f.Bus)
			records = append(records, f.Record)
		}
		if err != nil {
			require.ErrorIs(t, err, io.EOF)
			break
		}
	}
	require.Equal(t, []uint16{0, 1, 1, 2}, buses)
	require.Equal(t, []int64{1, 2, 1, 3}, records, "each text counts its own")
	require.Equal(t, []string{"can1", "can0", "can2"}, chain.Interfaces())
	require.Equal(t, frame.Counts{Records: 5, Malformed: 1, Bytes: 39 + 40}, chain.Counts())
	require.Equal(t, int64(2), chain.OtherLines())
	require.Equal(t, "b", chain.Name())
	require.NoError(t, chain.Close())
}

// A file is closed as soon as it is read; a damaged one ends the chain after
// its frames.
func TestChainOfFiles(t *testing.T) {
	dir := t.TempDir()
	whole := zipped(t, numberedLines(5000))
	var texts []*Text
	for i, content := range [][]byte{[]byte("(1.0) a 100#\n"), whole[:len(whole)/2], whole} {
		path := filepath.Join(dir, string(rune('a'+i)))
		require.NoError(t, os.WriteFile(path, content, 0o600))
		text, err := Open(path, Options{})
		require.NoError(t, err)
		texts = append(texts, text)
	}
	chain := NewChain(texts...)
	batch := make([]frame.Frame, 100)
	total := 0
	var err error
	for err == nil {
		var n int
		n, err = chain.Read(batch)
		total += n
	}
	var damage *DamageError
	require.ErrorAs(t, err, &damage)
	require.Equal(t, filepath.Join(dir, "b"), damage.Name)
	require.Equal(t, chain.Name(), damage.Name)
	require.Nil(t, texts[0].closer)
	require.Greater(t, total, 1000)
	_, again := chain.Read(batch)
	require.Equal(t, err, again)
	require.NoError(t, chain.Close())
	require.NoError(t, chain.Close())

	none := NewChain()
	require.Empty(t, none.Name())
	_, err = none.Read(batch)
	require.ErrorIs(t, err, io.EOF)
}
