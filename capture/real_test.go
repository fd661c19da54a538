package capture

import (
	"io"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

// Two real captures of an open data set (CC0 1.0; testdata/real/SOURCES.md).
// The figures were counted by independent programs.
func TestRealCaptures(t *testing.T) {
	type period struct {
		bus               string
		id                uint32
		count             int
		mean              float64 // ms, to three decimals
		shortest, longest int64   // us
	}
	for _, c := range []struct {
		file        string
		frames      int
		pairs       int
		first, last int64 // us
		back        int
		lengths     map[uint8]int
		periods     []period
	}{
		{"steering-lock-to-lock.log.gz", 19871, 130, 239164800, 245030600, 2854, map[uint8]int{1: 58, 4: 1, 6: 10, 7: 58, 8: 19744},
			[]period{{"can0", 0x236, 583, 9.988, 8700, 11400}, {"can1", 0x287, 582, 9.972, 9300, 10700}}},
		{"parking-brake.log.gz", 17279, 127, 282012600, 366310300, 2425, map[uint8]int{1: 51, 6: 5, 7: 50, 8: 17173}, nil},
	} {
		t.Run(c.file, func(t *testing.T) {
			source, err := Open("../testdata/real/"+c.file, Options{})
			require.NoError(t, err)
			defer source.Close()
			type key struct {
				bus uint16
				id  uint32
			}
			times := map[key][]int64{}
			lengths := map[uint8]int{}
			var first, last int64
			frames, back := 0, 0
			batch := make([]frame.Frame, 100)
			for {
				n, err := source.Read(batch)
				for i := range batch[:n] {
					f := &batch[i]
					if frames == 0 {
						first = f.Time
					} else if f.Time < last {
						back++
					}
					last = f.Time
					frames++
					lengths[f.DLC]++
					times[key{f.Bus, f.ID}] = append(times[key{f.Bus, f.ID}], f.Time)
				}
				if err != nil {
					require.ErrorIs(t, err, io.EOF)
					break
				}
			}
			require.Equal(t, c.frames, frames)
			require.Zero(t, source.Counts().Malformed)
			require.Len(t, times, c.pairs)
			require.Equal(t, c.first*1000, first)
			require.Equal(t, c.last*1000, last)
			require.Equal(t, c.back, back)
			require.Equal(t, c.lengths, lengths)
			for _, p := range c.periods {
				bus := uint16(0)
				if source.Interfaces()[1] == p.bus {
					bus = 1
				}
				at := times[key{bus, p.id}]
				require.Len(t, at, p.count)
				shortest, longest := int64(1<<62), int64(0)
				for i := 1; i < len(at); i++ {
					d := at[i] - at[i-1]
					shortest, longest = min(shortest, d), max(longest, d)
				}
				require.Equal(t, p.shortest*1000, shortest)
				require.Equal(t, p.longest*1000, longest)
				require.InDelta(t, p.mean, float64(at[len(at)-1]-at[0])/float64(len(at)-1)/1e6, 0.0005)
			}
		})
	}
}
