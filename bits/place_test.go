package bits_test

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/rogpeppe/go-internal/txtar"
	"github.com/stretchr/testify/require"
	"pgregory.net/rapid"

	"busloom/bits"
)

func parse(t require.TestingT, text string) bits.Place {
	p, err := bits.Parse(text)
	require.NoError(t, err)
	return p
}

// The expected bits are written by hand from the definition in Run.
func TestPlaceBits(t *testing.T) {
	for _, c := range []struct {
		place string
		want  string
		last  int
		whole bool
	}{
		{"3.2", "3.2", 3, false},
		{"0.7..0.0", "0.7 0.6 0.5 0.4 0.3 0.2 0.1 0.0", 0, true},
		{"1.3..1.0", "1.3 1.2 1.1 1.0", 1, false},
		{"0.7..1.0", "0.7 0.6 0.5 0.4 0.3 0.2 0.1 0.0 1.7 1.6 1.5 1.4 1.3 1.2 1.1 1.0", 1, true},
		{"1.7..0.0", "1.7 1.6 1.5 1.4 1.3 1.2 1.1 1.0 0.7 0.6 0.5 0.4 0.3 0.2 0.1 0.0", 1, true},
		{"0.1..1.6", "0.1 0.0 1.7 1.6", 1, false},
		{"1.1..0.6", "1.1 1.0 0.7 0.6", 1, false},
		{"0.0..2.7", "0.0 1.7 1.6 1.5 1.4 1.3 1.2 1.1 1.0 2.7", 2, false},
		{"2.0..0.7", "2.0 1.7 1.6 1.5 1.4 1.3 1.2 1.1 1.0 0.7", 2, false},
		{"0.1..0.0 then 4.7..4.5", "0.1 0.0 4.7 4.6 4.5", 4, false},
		{"4.0 then 0.7 then 63.3..63.2", "4.0 0.7 63.3 63.2", 63, false},
		{"2.7..2.0 then 0.7..0.0", "2.7 2.6 2.5 2.4 2.3 2.2 2.1 2.0 0.7 0.6 0.5 0.4 0.3 0.2 0.1 0.0", 2, true},
	} {
		t.Run(c.place, func(t *testing.T) {
			p := parse(t, c.place)
			require.NoError(t, p.Check())
			var got []string
			for _, b := range p.Bits() {
				got = append(got, b.String())
			}
			require.Equal(t, c.want, strings.Join(got, " "))
			require.Equal(t, len(strings.Fields(c.want)), p.Width())
			require.Equal(t, c.last, p.LastByte())
			require.Equal(t, c.whole, p.WholeBytes())
			require.Equal(t, c.place, p.String())
		})
	}
}

func TestPlaceRefused(t *testing.T) {
	for _, c := range []struct{ place, run, problem string }{
		{"3.0..3.7", "3.0..3.7", "within one byte a run goes down from its heaviest bit: write 3.7..3.0"},
		{"0.8", "0.8", "a byte has the bits 7 to 0, so 0.8 can't be"},
		{"0.7..1.9", "0.7..1.9", "a byte has the bits 7 to 0, so 1.9 can't be"},
		{"64.7..63.0", "64.7..63.0", "a payload has at most the bytes 0 to 63, so 64.7 can't be"},
		{"0.7..1.0 then 1.3..1.2", "1.3..1.2", "bit 1.3 is in it twice"},
		{"1.7..0.0 then 0.0..2.0", "0.0..2.0", "bit 0.0 is in it twice"},
		{"4.4 then 4.5 then 4.4", "4.4", "bit 4.4 is in it twice"},
	} {
		t.Run(c.place, func(t *testing.T) {
			p := parse(t, c.place)
			var problem *bits.PlaceError
			require.ErrorAs(t, p.Check(), &problem)
			require.Equal(t, c.problem, problem.Problem)
			require.Equal(t, c.problem, problem.Error())
			require.Equal(t, c.run, problem.Run.String())
		})
	}
	var problem *bits.PlaceError
	require.ErrorAs(t, bits.Place{}.Check(), &problem)
	require.Error(t, bits.Run{Heavy: bits.Bit{Byte: -1, Bit: 0}, Light: bits.Bit{}}.Check())
	require.Error(t, bits.Run{Heavy: bits.Bit{Byte: 0, Bit: -1}, Light: bits.Bit{}}.Check())
}

// A file name is a place, the contents its picture, drawn by hand.
func TestPicture(t *testing.T) {
	text, err := os.ReadFile(filepath.Join("testdata", "pictures.txtar"))
	require.NoError(t, err)
	archive := txtar.Parse(text)
	require.NotEmpty(t, archive.Files)
	for _, f := range archive.Files {
		t.Run(f.Name, func(t *testing.T) {
			require.Equal(t, string(f.Data), bits.Picture(parse(t, f.Name)))
		})
	}
}

func TestPictureOfNothing(t *testing.T) {
	require.Equal(t, "byte | 7 6 5 4 3 2 1 0\n", bits.Picture(bits.Place{}))
}

func TestParseRefused(t *testing.T) {
	for _, text := range []string{"", "3", "3.", ".3", "0.7..", "..1.0", "0.7...1.0", "0.7..1.0 then ", "0.7 then", "-1.0", "+0.7", "0.7..end", "a.b", "0.7 ..1.0", "99999.0", "00.7", "0.07"} {
		_, err := bits.Parse(text)
		require.ErrorContains(t, err, "is not a position", "%q", text)
	}
}

func TestShift(t *testing.T) {
	p := parse(t, "0.7..1.0 then 3.2")
	require.Equal(t, "6.7..7.0 then 9.2", p.Shift(6).String())
	require.Equal(t, "0.7..1.0 then 3.2", p.String(), "the place itself stays")
	require.Equal(t, p, p.Shift(6).Shift(-6))
}

func TestPlaceAgainstWalk(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		p := drawPlace(t, 64, 512)
		require.NoError(t, p.Check())
		var want []bits.Bit
		for _, r := range p.Runs {
			want = append(want, walk(r)...)
			require.Len(t, walk(r), r.Width())
		}
		require.Equal(t, want, p.Bits())
		require.Equal(t, len(want), p.Width())
		require.Equal(t, p, parse(t, p.String()))
	})
}

func TestSet(t *testing.T) {
	var s bits.Set
	require.Equal(t, []bits.Run{{Heavy: bits.Bit{Byte: 0, Bit: 7}, Light: bits.Bit{Byte: 1, Bit: 0}}}, s.Missing(2))
	require.Empty(t, s.Missing(0))

	s.Add(parse(t, "0.7..0.0"))
	s.Add(parse(t, "1.5..1.0"))
	s.Add(parse(t, "3.4 then 3.2"))
	at, taken := s.Overlap(parse(t, "1.7..2.0"))
	require.True(t, taken)
	require.Equal(t, "1.5", at.String())
	_, taken = s.Overlap(parse(t, "1.7..1.6 then 3.3"))
	require.False(t, taken)
	require.True(t, s.Has(bits.Bit{Byte: 3, Bit: 4}))
	require.False(t, s.Has(bits.Bit{Byte: 3, Bit: 3}))

	var missing []string
	for _, r := range s.Missing(4) {
		missing = append(missing, r.String())
	}
	require.Equal(t, []string{"1.7..1.6", "2.7..3.5", "3.3", "3.1..3.0"}, missing)

	other := s // an assignment copies
	other.Add(parse(t, "3.3"))
	require.False(t, s.Has(bits.Bit{Byte: 3, Bit: 3}))
}

// What is taken and what is missing never meet, and together are everything.
func TestSetMissingCompletes(t *testing.T) {
	rapid.Check(t, func(t *rapid.T) {
		size := rapid.IntRange(1, 64).Draw(t, "size")
		p := drawPlace(t, size, 8*size)
		var s bits.Set
		s.Add(p)
		rest := bits.Place{Runs: s.Missing(size)}
		require.Equal(t, 8*size, p.Width()+rest.Width())
		for _, r := range rest.Runs {
			one := bits.Place{Runs: []bits.Run{r}}
			require.NoError(t, one.Check())
			_, taken := s.Overlap(one)
			require.False(t, taken)
			s.Add(one)
		}
		require.Empty(t, s.Missing(size))
	})
}
