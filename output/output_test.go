package output

import (
	"flag"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"busloom/decode"
	"busloom/frame"

	"github.com/stretchr/testify/require"
)

var update = flag.Bool("update", false, "rewrite the goldens; the run still fails, so that nobody refreshes them by accident")

// TestGolden holds every format against a text that was read and found right.
// CSV has its rows by hand in TestCSVRows.
func TestGolden(t *testing.T) {
	wheels := []string{"Wheels"}
	for _, c := range []struct {
		file, format string
		only         []string
		o            Options
	}{
		{"table_list", "table", nil, Options{}},
		{"table_all_dates", "table", nil, Options{All: true, Dates: true}},
		{"table_columns", "table", wheels, Options{}},
		{"table_columns_changes", "table", wheels, Options{Changes: true}},
		{"table_numbers", "table", []string{"Numbers"}, Options{}},
		{"table_protection_only", "table", []string{"Wheels.sum"}, Options{}},
		{"table_selection", "table", []string{"Pages.low"}, Options{}},
		{"jsonl_selection", "jsonl", []string{"Pages.low"}, Options{}},
		{"table_step", "table", []string{"Wheels", "Pages on *"}, Options{Step: 50 * time.Millisecond}},
		{"wide", "wide", []string{"Wheels", "Pages.low"}, Options{}},
		{"wide_step", "wide", []string{"Wheels.wheel*", "Pages.low"}, Options{Step: 20 * time.Millisecond}},
		{"jsonl", "jsonl", nil, Options{}},
		{"jsonl_all", "jsonl", wheels, Options{All: true}},
		{"csv_changes", "csv", nil, Options{Changes: true}},
		{"summary", "summary", nil, Options{}},
		{"summary_json", "summary", nil, Options{JSON: true}},
		{"summary_only", "summary", []string{"Wheels.wheel*"}, Options{}},
	} {
		t.Run(c.file, func(t *testing.T) {
			plan := smallPlan(t, c.only...)
			got := write(t, c.format, plan, c.o, decodeShots(plan, shots))
			path := filepath.Join("testdata", c.file+".golden")
			if *update {
				require.NoError(t, os.WriteFile(path, []byte(got), 0o644))
				t.Error("golden refreshed; run again without -update")
			}
			want, err := os.ReadFile(path)
			require.NoError(t, err)
			require.Equal(t, string(want), got)
		})
	}
}

// TestNothing writes runs without a frame.
func TestNothing(t *testing.T) {
	plan := smallPlan(t)
	require.Equal(t, "time,bus,message,signal,value,unit,word,code,check\r\n", write(t, "csv", plan, Options{}, nil))
	require.Empty(t, write(t, "jsonl", plan, Options{}, nil))
	require.Contains(t, write(t, "summary", plan, Options{}, nil), "never seen:\n  Wheels on chassis, 100\n")
	require.NotContains(t, write(t, "summary", plan, Options{JSON: true}, nil), `"from"`)
	require.Equal(t, 1, strings.Count(write(t, "wide", plan, Options{Step: time.Second}, nil), "\n"))
}

func TestNewRefuses(t *testing.T) {
	plan := smallPlan(t)
	for _, c := range []struct {
		name string
		o    Options
		want string
	}{
		{"cvs", Options{}, "there is no format cvs (did you mean csv?); there is table, csv, wide, jsonl, summary, none"},
		{"csv", Options{Step: 1}, "--step goes with --format table or wide"},
		{"wide", Options{Step: -1}, "--step is below zero"},
		{"table", Options{JSON: true}, "--json goes with --format summary"},
		{"csv", Options{Dates: true}, "--dates goes with --format table"},
		{"summary", Options{Changes: true}, "--changes goes with rows of values: not with summary, none or --step"},
		{"wide", Options{Changes: true, Step: 1}, "--changes goes with rows of values: not with summary, none or --step"},
	} {
		_, err := New(c.name, plan, c.o)
		require.EqualError(t, err, c.want)
	}
	f, err := New("none", plan, Options{})
	require.NoError(t, err)
	require.Nil(t, f)
}

// TestForks formats blocks of records at the same time, each with a fork, and
// holds the joined blocks against one run.
func TestForks(t *testing.T) {
	plan, records := heronRecords(t, 4096)
	for _, name := range []string{"csv", "jsonl", "table"} {
		f, err := New(name, plan, Options{All: true})
		require.NoError(t, err)
		want := writeAll(f, records)
		const blocks = 7
		var out [blocks]chan []byte
		for i := range blocks {
			out[i] = make(chan []byte, 1)
			fork := f.(Forker).Fork()
			block := records[i*len(records)/blocks : (i+1)*len(records)/blocks]
			go func() {
				var dst []byte
				for j := range block {
					dst = fork.Record(dst, &block[j])
				}
				out[i] <- dst
			}()
		}
		got := f.Header(nil)
		for i := range blocks {
			got = append(got, <-out[i]...)
		}
		require.Equal(t, string(want), string(f.Trailer(got)), name)
	}
	changes, err := New("csv", plan, Options{Changes: true})
	require.NoError(t, err)
	_, ok := changes.(Forker)
	require.False(t, ok, "changes depend on what came before")
}

// TestNoAllocations proves that rows cost no memory once buffers have grown.
func TestNoAllocations(t *testing.T) {
	plan := smallPlan(t)
	var records []decode.Record
	for _, r := range decodeShots(plan, shots) {
		if r.Message == nil || r.Message.Model.Name == "Numbers" {
			continue // big numbers and error frames may
		}
		records = append(records, r)
	}
	text := decodeShots(smallPlan(t, "Numbers.name", "Numbers.blob"), shots)[10:11]
	for name, o := range map[string]Options{"csv": {}, "jsonl": {}, "table": {}, "wide": {Step: time.Second}} {
		f, err := New(name, plan, o)
		require.NoError(t, err)
		dst := writeAll(f, records)
		require.Zero(t, testing.AllocsPerRun(100, func() {
			dst = dst[:0]
			for i := range records {
				dst = f.Record(dst, &records[i])
			}
		}), name)
	}
	for _, name := range []string{"csv", "jsonl"} {
		f, err := New(name, smallPlan(t, "Numbers.name", "Numbers.blob"), Options{})
		require.NoError(t, err)
		dst := make([]byte, 0, 4096)
		f.Record(dst, &text[0])
		require.Zero(t, testing.AllocsPerRun(100, func() { f.Record(dst, &text[0]) }), name)
	}
}

func TestTimes(t *testing.T) {
	for ns, want := range map[int64]string{
		0:                        "0.000000",
		1:                        "0.000000001",
		1000:                     "0.000001",
		-1:                       "-0.000000001",
		-1500 * 1_000_000:        "-1.500000",
		1768467600_002774000:     "1768467600.002774",
		1768467600_002774001:     "1768467600.002774001",
		9223372036854775807:      "9223372036.854775807",
		-9223372036854775807 - 1: "-9223372036.854775808",
	} {
		var c clock
		require.Equal(t, want, string(appendTime(nil, ns)))
		require.Equal(t, want, string(c.append(nil, ns)))
		require.Equal(t, want, string(c.append(nil, ns)), "again")
	}
	// From memory of the epoch: 1e9 s is 2001-09-09 01:46:40 UTC.
	require.Equal(t, "2001-09-09 01:46:40.000000", string(appendDate(nil, second*1_000_000_000)))
	require.Equal(t, "2001-09-09 01:46:40.000000001", string(appendDate(nil, second*1_000_000_000+1)))
}

// TestChecks has every phrase, and several at once.
func TestChecks(t *testing.T) {
	r := decode.Record{}
	require.False(t, wrong(&r))
	require.Empty(t, appendCheck(nil, &r, phrases))
	r = decode.Record{Checksum: decode.Good, Counter: decode.First}
	require.False(t, wrong(&r))
	r = decode.Record{Checksum: decode.Bad, Counter: decode.Lost, Steps: 12, Fit: decode.FitLong, UnknownSelection: true}
	require.Equal(t, "checksum wrong; counter lost 12; frame long; unknown selection", string(appendCheck(nil, &r, phrases)))
	for want, r := range map[string]decode.Record{
		"counter out of range": {Counter: decode.Bad},
		"counter repeated":     {Counter: decode.Repeated},
		"frame short":          {Fit: decode.FitShort},
		"unknown selection":    {UnknownSelection: true},
	} {
		require.True(t, wrong(&r))
		require.Equal(t, want, string(appendCheck(nil, &r, phrases)))
	}
}

// TestAccounting adds the numbers of the text up.
func TestAccounting(t *testing.T) {
	plan := smallPlan(t)
	tracker := decode.NewTracker(plan)
	for _, s := range shots {
		f := &frame.Frame{ID: s.id, Bus: s.bus, Flags: s.flags, Len: uint8(len(s.data))}
		copy(f.Data[:], s.data)
		var r decode.Record
		plan.Decode(f, &r)
		tracker.Observe(&r)
	}
	totals := tracker.Totals()
	totals.Malformed = 3
	require.Equal(t, `24 records read = 15 decoded + 1 undescribed + 1 remote + 1 error frame + 1 unmapped + 3 malformed + 2 outside of the time window
of the decoded: 1 shorter and 1 longer than described
protection failures: 1 wrong checksum, 1 counter out of range, 1 repeated, 1 gap of 3 lost steps
unknown selector values: 1 frame
no bus is tied to can9 (1): use --map INTERFACE=BUS
`, Accounting(totals, 2))
}
