package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"strings"
	"syscall"
	"time"

	"busloom/capture"
	"busloom/decode"
	"busloom/frame"
	"busloom/output"
	"busloom/pipeline"

	"github.com/spf13/cobra"
)

// decodeFlags are the flags of decode as they were given.
type decodeFlags struct {
	buses    []string
	format   string
	units    []string
	only     []string
	from, to string
	changes  bool
	step     time.Duration
	all      bool
	strict   bool
	times    string
	json     bool
	dates    bool
	out      string
	rejects  int
}

func decodeCommand(std *streams) *cobra.Command {
	var f decodeFlags
	cmd := &cobra.Command{
		Use:   "decode DESCRIPTION CAPTURE...",
		Short: "Read what the control units said in a capture",
		Long: `Decode reads candump-style text (log or screen form, plain or gzip) and prints
what it means. DESCRIPTION is a description or a compiled database; CAPTURE is
a file, or - for standard input; several are read one after the other.

Every record ends in exactly one class (decoded, undescribed, remote, error
frame, unmapped, malformed) and the totals, which add up, go to standard error.

Formats:
  table    lines for people (the default)
  csv      one row per value, RFC 4180
  wide     one column per signal, the last values held
  jsonl    one JSON object per frame
  summary  per message and signal: counts, periods, ranges, codes, states
  none     the accounting only

Exit codes: 0 clean; 1 the description has errors; 2 wrong usage; 3 the capture
had malformed records; 4 protection failures with --strict; 5 reading or
writing failed; 130 interrupted. docs/output.md has the columns and classes.`,
		Example: `  busloom decode --map can0=chassis --map can1=powertrain --map can2=body \
      schemas/heron.bus testdata/heron/wet_stop.log.gz
  busloom decode --map can0=chassis --only 'WheelSpeeds.*' --unit km/h=m/s \
      --format csv schemas/heron.bus testdata/heron/wet_stop.log.gz
  busloom decode --format summary --from +10 --to +20 one-bus.bus drive.log
  busloom decode --format wide --step 100ms one-bus.bus - < drive.log`,
		Args: atLeast(2, "a description and a capture"),
		RunE: func(cmd *cobra.Command, args []string) error {
			return runDecode(cmd.Context(), std, &f, args[0], args[1:])
		},
	}
	flags := cmd.Flags()
	flags.StringArrayVar(&f.buses, "map", nil, "tie an interface to a bus, such as can0=chassis (repeatable)")
	flags.StringVarP(&f.format, "format", "f", "table", "table, csv, wide, jsonl, summary or none")
	flags.StringArrayVar(&f.units, "unit", nil, "show a unit as another, such as km/h=m/s (repeatable)")
	flags.StringArrayVar(&f.only, "only", nil, "only messages and signals that match, such as 'Wheel*' or '*.speed' (repeatable)")
	flags.StringVar(&f.from, "from", "", "leave out what is earlier: seconds as in the capture, or +SECONDS after its first record")
	flags.StringVar(&f.to, "to", "", "leave out what is later")
	flags.BoolVar(&f.changes, "changes", false, "only values that differ from the signal's last one")
	flags.DurationVar(&f.step, "step", 0, "table, wide: a row each STEP (such as 100ms) with the last values held")
	flags.BoolVar(&f.all, "all", false, "also show undescribed, unmapped and remote frames")
	flags.BoolVar(&f.strict, "strict", false, "exit with 4 if a checksum or counter failed")
	flags.StringVar(&f.times, "times", "written", "how times are meant: written, or since-previous where each is the distance from the line before")
	flags.BoolVar(&f.json, "json", false, "summary: as JSON")
	flags.BoolVar(&f.dates, "dates", false, "table: times as dates in UTC")
	flags.StringVarP(&f.out, "output", "o", "", "write into a file, which appears whole or not at all")
	flags.IntVar(&f.rejects, "show-malformed", 10, "how many malformed records are told one by one")
	return cmd
}

func runDecode(ctx context.Context, std *streams, f *decodeFlags, description string, captures []string) error {
	if err := checkNotInput(f.out, append([]string{description}, captures...)...); err != nil {
		return err
	}
	if f.rejects < 0 {
		return usageError("--show-malformed %d is below zero", f.rejects)
	}
	window, err := parseWindow(f.from, f.to)
	if err != nil {
		return err
	}
	network, err := loadNetwork(std, description)
	if err != nil {
		return err
	}
	buses, err := pairs("map", f.buses)
	if err != nil {
		return err
	}
	units, err := pairs("unit", f.units)
	if err != nil {
		return err
	}
	plan, err := decode.NewPlan(network, decode.Options{Buses: buses, Units: units, Only: f.only})
	if err != nil {
		return usageError("%v", err)
	}
	format, err := output.New(f.format, plan, output.Options{
		Changes: f.changes, Step: f.step, All: f.all, JSON: f.json, Dates: f.dates,
	})
	if err != nil {
		return usageError("%v", err)
	}
	source, err := openCaptures(ctx, std, f, captures)
	if err != nil {
		return err
	}
	defer source.Close()
	w, err := createOutput(std, f.out)
	if err != nil {
		return err
	}
	defer w.drop()

	progress := newProgress(std.err)
	result := pipeline.Run(ctx, pipeline.Config{
		Source: source, Plan: plan, Window: window, Format: format, Out: w, Progress: progress.update,
	})
	progress.done()
	return finishDecode(std, f, source, w, &result)
}

// finishDecode prints the accounting, keeps the output and finds the exit
// code: of several that apply, the first of 5, 130, 3, 4.
func finishDecode(std *streams, f *decodeFlags, source frame.Source, w *outputFile, result *pipeline.Result) error {
	if err := result.Check(source.Counts()); err != nil {
		return err
	}
	if result.Write != nil {
		return ioError(describeWrite(f.out, result.Write))
	}
	if err := w.keep(); err != nil {
		return ioError(err)
	}
	if _, err := io.WriteString(std.err, output.Accounting(result.Totals, result.Skipped)); err != nil {
		return ioError(err)
	}
	switch {
	case result.Read != nil:
		return ioError(result.Read)
	case result.Interrupted:
		return &exitError{exitInterrupted, errors.New("interrupted: what was read until then is above")}
	case result.Totals.Malformed > 0:
		return &exitError{code: exitMalformed}
	case f.strict && result.Totals.ProtectionFailures() > 0:
		return &exitError{exitProtection, fmt.Errorf("%d frames failed their checksum or counter", result.Totals.ProtectionFailures())}
	}
	return nil
}

func describeWrite(path string, err error) error {
	if path == "" || path == "-" {
		path = "standard output"
	}
	if errors.Is(err, syscall.EPIPE) {
		return fmt.Errorf("%s was closed by its reader before all was written", path)
	}
	return fmt.Errorf("can't write %s: %w", path, err)
}

// openCaptures opens the files one after the other as one source; malformed
// records are told on standard error, the first few one by one.
func openCaptures(ctx context.Context, std *streams, f *decodeFlags, paths []string) (*capture.Chain, error) {
	opts := capture.Options{}
	switch f.times {
	case "written":
	case "since-previous":
		opts.Times = capture.SincePrevious
	default:
		return nil, usageError("--times is %q: it can be written or since-previous", f.times)
	}
	told := 0
	opts.Reject = func(r capture.Reject) {
		if told++; told <= f.rejects {
			fmt.Fprintln(std.err, r.Error())
		} else if told == f.rejects+1 {
			fmt.Fprintln(std.err, "more malformed records follow; they are counted")
		}
	}
	var sources []*capture.Text
	for _, path := range paths {
		if path == "-" {
			sources = append(sources, capture.NewText("standard input", newInterruptible(ctx, std.in), opts))
			continue
		}
		if info, err := os.Stat(path); err == nil && info.IsDir() {
			return nil, ioError(fmt.Errorf("%s is a folder, not a capture", path))
		}
		text, err := capture.Open(path, opts)
		if err != nil {
			return nil, ioError(err)
		}
		sources = append(sources, text)
	}
	return capture.NewChain(sources...), nil
}

// pairs reads flags of the form a=b.
func pairs(flag string, values []string) (map[string]string, error) {
	out := map[string]string{}
	for _, v := range values {
		a, b, ok := strings.Cut(v, "=")
		if !ok || a == "" || b == "" {
			return nil, usageError("--%s %s: it is written %s", flag, v, map[string]string{"map": "INTERFACE=BUS, such as can0=chassis", "unit": "UNIT=UNIT, such as km/h=m/s"}[flag])
		}
		if _, twice := out[a]; twice {
			return nil, usageError("--%s names %s twice", flag, a)
		}
		out[a] = b
	}
	return out, nil
}
