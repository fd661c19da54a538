package heron

import (
	"bytes"
	"errors"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"strconv"
	"strings"
	"testing"
	"time"

	"github.com/klauspost/compress/gzip"
	"github.com/stretchr/testify/require"
)

func written(t *testing.T, s Scenario, o Options) []byte {
	t.Helper()
	var out bytes.Buffer
	require.NoError(t, Write(&out, s, o))
	return out.Bytes()
}

// The committed captures are what the program writes now. Their text is
// compared: the compressed bytes may change with the compressor's version.
func TestCapturesAreCurrent(t *testing.T) {
	for _, s := range Scenarios() {
		f, err := os.Open(filepath.Join("..", "testdata", "heron", CaptureName(s)))
		require.NoError(t, err)
		defer f.Close()
		z, err := gzip.NewReader(f)
		require.NoError(t, err)
		require.True(t, z.ModTime.IsZero())
		require.Empty(t, z.Name)
		text, err := io.ReadAll(z)
		require.NoError(t, err)
		require.True(t, bytes.Equal(written(t, s, Options{}), text), "%s isn't current: make generate", CaptureName(s))
	}
}

func TestWriteIsDeterministic(t *testing.T) {
	whole := written(t, WetStop, Options{})
	require.Equal(t, whole, written(t, WetStop, Options{}))
	some := written(t, WetStop, Options{Frames: 1000})
	require.Equal(t, 1000, bytes.Count(some, []byte("\n")))
	require.True(t, bytes.HasPrefix(whole, some))
	begin := written(t, WetStop, Options{Duration: time.Second})
	require.True(t, bytes.HasPrefix(whole, begin))
	require.InDelta(t, 1180, bytes.Count(begin, []byte("\n")), 60)
}

func TestBenchGoesOn(t *testing.T) {
	require.Error(t, Write(io.Discard, Bench, Options{}))
	text := written(t, Bench, Options{Frames: 200_000}) // more than one round of 120 s
	require.Equal(t, 200_000, bytes.Count(text, []byte("\n")))
	require.Equal(t, 2, bytes.Count(text, []byte("can0 20000088#")))
}

type brokenWriter struct{ left int }

var errBroken = errors.New("disk full")

func (b *brokenWriter) Write(p []byte) (int, error) {
	if b.left -= len(p); b.left < 0 {
		return 0, errBroken
	}
	return len(p), nil
}

func TestWriteTellsErrors(t *testing.T) {
	require.ErrorIs(t, Write(&brokenWriter{left: 100_000}, WetStop, Options{}), errBroken)
	dir := t.TempDir()
	path := filepath.Join(dir, "x")
	require.ErrorIs(t, Replace(path, func(io.Writer) error { return errBroken }), errBroken)
	left, err := os.ReadDir(dir)
	require.NoError(t, err)
	require.Empty(t, left, "nothing stays of a file that isn't whole")
}

var lineForm = regexp.MustCompile(`^\((\d{10})\.(\d{6})\) can([012]) ([0-9A-F]{3}|[0-9A-F]{8})#(#1)?((?:[0-9A-F]{2})*|R8)$`)

// rateMbit is the bit rate of each bus as the description has it.
var rateMbit = [busCount]float64{0.5, 0.5, 0.125}

func TestLogIsWhatBusesCanCarry(t *testing.T) {
	for _, s := range Scenarios() {
		var last [busCount]int64 // us
		previous := int64(0)
		seen := map[string]int64{}
		worst := map[string]int64{}
		counters := map[string]int{}
		var errs, remotes, requests int
		for text := range strings.Lines(string(written(t, s, Options{}))) {
			m := lineForm.FindStringSubmatch(strings.TrimSuffix(text, "\n"))
			require.NotNil(t, m, text)
			seconds, err := strconv.ParseInt(m[1], 10, 64)
			require.NoError(t, err)
			us, err := strconv.ParseInt(m[2], 10, 64)
			require.NoError(t, err)
			now := seconds*second + us
			bus, err := strconv.Atoi(m[3])
			require.NoError(t, err)
			require.GreaterOrEqual(t, now, previous, text)
			previous = now
			switch {
			case m[6] == "R8":
				remotes++
				continue
			case m[4] == "20000088":
				errs++
				last[bus] = now
				continue
			case m[4] == "7DF":
				requests++
			}
			// The shortest frame with this payload, ISO 11898-1 without stuff
			// bits: 44 bits and the data, 64 with a 29-bit identifier. FD frames
			// are left out, they change their rate.
			if m[5] == "" && last[bus] > 0 {
				bits := 44 + 4*len(m[6])
				if len(m[4]) == 8 {
					bits += 20
				}
				require.GreaterOrEqual(t, float64(now-last[bus]), float64(bits)/rateMbit[bus]-1, "too soon after the frame before: %s", text)
			}
			last[bus] = now
			key := m[3] + " " + m[4]
			if at, ok := seen[key]; ok {
				worst[key] = max(worst[key], now-at)
			}
			seen[key] = now
			if m[4] == "1A0" {
				count, err := strconv.ParseInt(m[6][3:4], 16, 64)
				require.NoError(t, err)
				if old, ok := counters[key]; ok {
					require.EqualValues(t, (old+1)%15, count, text)
				}
				counters[key] = int(count)
			}
		}
		require.Equal(t, 1, errs, s)
		require.Equal(t, 1, remotes, s)
		require.Positive(t, requests, s)
		for key, limit := range map[string]int64{
			"0 1A0": 12, "0 1C0": 23, "1 1C0": 24, "2 3C0": 28, "1 0A0": 12, "1 120": 53, "1 2C0": 103, "2 3D0": 108, "1 0CF00400": 53,
		} {
			require.Positive(t, worst[key], "%s: %s", s, key)
			require.LessOrEqual(t, worst[key], limit*1000, "%s: %s", s, key)
		}
	}
}

// No compiler may fuse a product and a sum: the bytes would differ between
// machines. The assembly of arm64, which could, is searched for such
// instructions.
func TestNoFusedProducts(t *testing.T) {
	build := exec.Command("go", "build", "-gcflags=-S", "-o", os.DevNull, ".")
	build.Env = append(os.Environ(), "GOOS=linux", "GOARCH=arm64", "CGO_ENABLED=0", "GOFLAGS=")
	assembly, err := build.CombinedOutput()
	require.NoError(t, err, "%s", assembly)
	require.Regexp(t, `FMULD`, string(assembly), "this is the model's assembly")
	fused := regexp.MustCompile(`\([^()]*heron/[^()]*\)\s+FN?M(?:ADD|SUB)[DS]\s`)
	require.Empty(t, fused.FindAllString(string(assembly), -1))
}

func BenchmarkWrite(b *testing.B) {
	b.ReportAllocs()
	require.NoError(b, Write(io.Discard, Bench, Options{Frames: int64(b.N)}))
}
