package output

import (
	"errors"
	"io"
	"strconv"
	"testing"

	"busloom/capture"
	"busloom/decode"
	"busloom/frame"
	"busloom/schema"

	"github.com/stretchr/testify/require"
)

// heronRecords decodes the first records of a demo capture.
func heronRecords(tb testing.TB, limit int, only ...string) (*decode.Plan, []decode.Record) {
	network, list := schema.Compile(schema.DiskFiles(), "../schemas/heron.bus")
	require.False(tb, list.Failed())
	plan, err := decode.NewPlan(network, decode.Options{
		Buses: map[string]string{"can0": "chassis", "can1": "powertrain", "can2": "body"}, Only: only,
	})
	require.NoError(tb, err)
	text, err := capture.Open("../testdata/heron/wet_stop_bad_ring.log.gz", capture.Options{})
	require.NoError(tb, err)
	defer text.Close()
	var records []decode.Record
	tracker := decode.NewTracker(plan)
	for len(records) < limit {
		batch := make([]frame.Frame, 256)
		n, err := text.Read(batch)
		plan.Bind(text.Interfaces())
		for i := range batch[:n] {
			var r decode.Record
			plan.Decode(&batch[i], &r)
			tracker.Observe(&r)
			records = append(records, r)
		}
		if errors.Is(err, io.EOF) {
			break
		}
		require.NoError(tb, err)
	}
	return plan, records
}

func benchmark(b *testing.B, format string, o Options) {
	plan, records := heronRecords(b, 2048)
	f, err := New(format, plan, o)
	require.NoError(b, err)
	rows := 0
	for i := range records {
		rows += len(records[i].Values)
	}
	dst := make([]byte, 0, 1<<24)
	b.ReportAllocs()
	b.ResetTimer()
	for b.Loop() {
		dst = dst[:0]
		for i := range records {
			if len(dst) > 1<<17 {
				dst = dst[:0]
			}
			dst = f.Record(dst, &records[i])
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(rows), "ns/row")
}

func BenchmarkCSV(b *testing.B)     { benchmark(b, "csv", Options{}) }
func BenchmarkJSONL(b *testing.B)   { benchmark(b, "jsonl", Options{}) }
func BenchmarkTable(b *testing.B)   { benchmark(b, "table", Options{}) }
func BenchmarkWide(b *testing.B)    { benchmark(b, "wide", Options{Step: 1e7}) }
func BenchmarkSummary(b *testing.B) { benchmark(b, "summary", Options{}) }
func BenchmarkChanges(b *testing.B) { benchmark(b, "csv", Options{Changes: true}) }

// BenchmarkCSVAppendFloat writes the same columns with as few formatting steps
// as BenchmarkCSV, the time once for each frame, but joins the fields one by
// one and writes numbers through the standard library's shortest float.
func BenchmarkCSVAppendFloat(b *testing.B) {
	_, records := heronRecords(b, 2048)
	rows := 0
	for i := range records {
		rows += len(records[i].Values)
	}
	scale := make(map[*decode.Signal]float64)
	for i := range records {
		for j := range records[i].Values {
			s := records[i].Values[j].Signal
			scale[s] = 1
			for range s.Decimals {
				scale[s] *= 10
			}
		}
	}
	divisors := make([]float64, 4096)
	for s, d := range scale {
		divisors[s.Index] = d
	}
	dst, time := make([]byte, 0, 1<<24), []byte(nil)
	b.ReportAllocs()
	b.ResetTimer()
	for b.Loop() {
		dst = dst[:0]
		for i := range records {
			if len(dst) > 1<<17 {
				dst = dst[:0]
			}
			r := &records[i]
			time = strconv.AppendFloat(time[:0], float64(r.Frame.Time)/1e9, 'f', 6, 64)
			for j := range r.Values {
				v := &r.Values[j]
				s := v.Signal
				dst = append(dst, time...)
				dst = append(append(dst, ','), s.Message.Bus...)
				dst = append(append(dst, ','), s.Message.Model.Name...)
				dst = append(append(dst, ','), s.Path...)
				dst = append(dst, ',')
				word := ""
				if v.State == decode.Number {
					dst = strconv.AppendFloat(dst, float64(v.Num)/divisors[s.Index], 'f', -1, 64)
				} else {
					word = s.Text(v)
				}
				dst = append(append(dst, ','), s.Unit.Symbol...)
				dst = append(append(dst, ','), word...)
				dst = append(dst, ",,\r\n"...)
			}
		}
	}
	b.ReportMetric(float64(b.Elapsed().Nanoseconds())/float64(b.N)/float64(rows), "ns/row")
}
