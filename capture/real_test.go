package capture

import (
	"io"
	"slices"
	"testing"

	"busloom/frame"

	"github.com/stretchr/testify/require"
)

// Open data set of real captures, CC0, see testdata/real/SOURCES.md. The figures
// were counted by programs that share nothing with this one.
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
		alone       int64 // s between the earliest frame and the next, 0 if they're close
	}{
		{"steering-lock-to-lock.log.gz", 19871, 130, 239164800, 245030600, 2854, map[uint8]int{1: 58, 4: 1, 6: 10, 7: 58, 8: 19744},
			[]period{{"can0", 0x236, 583, 9.988, 8700, 11400}, {"can1", 0x287, 582, 9.972, 9300, 10700}}, 0},
		{"parking-brake.log.gz", 17279, 127, 282012600, 366310300, 2425, map[uint8]int{1: 51, 6: 5, 7: 50, 8: 17173}, nil, 79},
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
			var all []int64
			for _, at := range times {
				all = append(all, at...)
			}
			slices.Sort(all)
			require.Equal(t, c.alone, (all[1]-all[0])/1e9)
			if c.alone > 0 {
				require.True(t, slices.ContainsFunc([]uint16{0, 1}, func(bus uint16) bool {
					return slices.Contains(times[key{bus, 0x236}], all[0])
				}))
			}
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
