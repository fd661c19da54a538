// Command bench prints Busloom's speed as ratios, measured side by side in one
// run: each command in turn, round after round, so that a machine whose speed
// drifts treats all alike. Beside each time stands the amount of work, so that
// unequal work shows.
package main

import (
	"bufio"
	"flag"
	"fmt"
	"io"
	"os"
	"os/exec"
	"path/filepath"
	"sort"
	"strings"
	"syscall"
	"time"

	"busloom/bench/plain"
	"busloom/heron"
	"busloom/schema"
)

// interfaces of the bench capture.
var interfaces = map[string]string{"can0": "chassis", "can1": "powertrain", "can2": "body"}

func main() {
	busloom := flag.String("busloom", "bin/busloom", "the program to measure")
	lines := flag.Int64("lines", 4_000_000, "lines of the capture")
	rounds := flag.Int("rounds", 7, "rounds; medians are printed")
	mode := flag.String("plain", "", "internal: run the plain reader (read, csv) on the file argument")
	flag.Parse()
	var err error
	if *mode != "" {
		err = runPlain(*mode, flag.Arg(0))
	} else {
		err = run(*busloom, *lines, *rounds)
	}
	if err != nil {
		fmt.Fprintln(os.Stderr, "bench:", err)
		os.Exit(1)
	}
}

func runPlain(mode, path string) error {
	network, problems := schema.Compile(schema.DiskFiles(), "schemas/heron.bus")
	if problems.Failed() {
		return fmt.Errorf("schemas/heron.bus has errors: run busloom check")
	}
	f, err := os.Open(path)
	if err != nil {
		return err
	}
	defer f.Close()
	var out io.Writer
	if mode == "csv" {
		out = os.Stdout
	}
	res, err := plain.New(network, interfaces).Read(f, out)
	fmt.Fprintf(os.Stderr, "%d lines, %d frames, %d values, sum %g\n", res.Lines, res.Frames, res.Values, res.Sum)
	return err
}

// subject is one command to measure.
type subject struct {
	name string
	args []string
	env  []string

	wall   []float64 // seconds
	memory int64     // KiB, the most of any round
	told   string    // the last line on standard error
}

func run(busloom string, lines int64, rounds int) error {
	dir, err := os.MkdirTemp("", "busloom-bench-")
	if err != nil {
		return err
	}
	defer os.RemoveAll(dir)
	path := filepath.Join(dir, "drive.log")
	if err := makeCapture(path, lines); err != nil {
		return err
	}
	info, err := os.Stat(path)
	if err != nil {
		return err
	}
	database := filepath.Join(dir, "heron.json")
	if out, err := exec.Command(busloom, "compile", "schemas/heron.bus", "-o", database).CombinedOutput(); err != nil {
		return fmt.Errorf("%w: %s", err, out)
	}
	self, err := os.Executable()
	if err != nil {
		return err
	}
	one := []string{"GOMAXPROCS=1"}
	decode := func(format string) []string {
		args := []string{busloom, "decode", "--format", format}
		for iface, bus := range interfaces {
			args = append(args, "--map="+iface+"="+bus)
		}
		return append(args, database, path)
	}
	subjects := []*subject{
		{name: "wc -l", args: []string{"wc", "-l", path}},
		{name: "busloom, nothing printed", args: decode("none"), env: one},
		{name: "busloom, CSV", args: decode("csv"), env: one},
		{name: "busloom, summary", args: decode("summary"), env: one},
		{name: "plain reader, nothing printed", args: []string{self, "-plain", "read", path}, env: one},
		{name: "plain reader, AppendFloat CSV", args: []string{self, "-plain", "csv", path}, env: one},
	}
	fmt.Printf("%d lines, %.1f MB, %d rounds, one core for each program but wc\n\n", lines, float64(info.Size())/1e6, rounds)
	for round := range rounds + 1 { // the first one warms up
		for _, s := range subjects {
			if err := s.run(round > 0); err != nil {
				return fmt.Errorf("%s: %w", s.name, err)
			}
		}
	}
	report(subjects, lines)
	return compileSpeed(dir, busloom)
}

// compileSpeed times the check of a description of 20,000 messages with
// 160,000 signals.
func compileSpeed(dir, busloom string) error {
	path := filepath.Join(dir, "large.bus")
	var b strings.Builder
	b.WriteString("busloom 1\nnetwork Large\n")
	var buses []string
	for i := range 16 {
		fmt.Fprintf(&b, "bus bus%d 500 kbit/s\n", i)
		buses = append(buses, fmt.Sprintf("bus%d", i))
	}
	fmt.Fprintf(&b, "ecu A on %s\necu B on %[1]s\n", strings.Join(buses, ", "))
	b.WriteString("codes Sensor {\n  ones: absent\n  ones - 1: fault\n}\n")
	for i := range 20_000 {
		fmt.Fprintf(&b, "message Message%d 0x%08X on bus%d, 8 bytes \"One of many\" {\n  from A to B\n  every 1 s, lost after 5 s\n\n", i, i, i%16)
		for j := range 8 {
			fmt.Fprintf(&b, "  signal_%d at %d.7..%d.0 = raw * 0.01 km/h  within 0..2.5 km/h  codes Sensor  \"What it is\"\n", j, j, j)
		}
		b.WriteString("}\n\n")
	}
	if err := os.WriteFile(path, []byte(b.String()), 0o644); err != nil {
		return err
	}
	s := &subject{name: "busloom check", args: []string{busloom, "check", "--quiet", path}}
	for range 3 {
		if err := s.run(true); err != nil {
			return err
		}
	}
	fmt.Printf("\ncompile 20,000 messages, 160,000 signals (%.1f MB): %.1f s, %.1f MB/s, %.0f MiB\n",
		float64(b.Len())/1e6, median(s.wall), float64(b.Len())/1e6/median(s.wall), float64(s.memory)/1024)
	return nil
}

func makeCapture(path string, lines int64) error {
	f, err := os.Create(path)
	if err != nil {
		return err
	}
	w := bufio.NewWriterSize(f, 1<<20)
	if err := heron.Write(w, heron.Bench, heron.Options{Frames: lines}); err != nil {
		return err
	}
	if err := w.Flush(); err != nil {
		return err
	}
	return f.Close()
}

func (s *subject) run(counts bool) error {
	cmd := exec.Command(s.args[0], s.args[1:]...)
	cmd.Env = append(os.Environ(), s.env...)
	var told strings.Builder
	cmd.Stderr = &told
	null, err := os.OpenFile(os.DevNull, os.O_WRONLY, 0)
	if err != nil {
		return err
	}
	defer null.Close()
	cmd.Stdout = null
	start := time.Now()
	err = cmd.Run()
	wall := time.Since(start).Seconds()
	if err != nil {
		return fmt.Errorf("%w: %s", err, told.String())
	}
	if !counts {
		return nil
	}
	s.wall = append(s.wall, wall)
	if usage, ok := cmd.ProcessState.SysUsage().(*syscall.Rusage); ok {
		s.memory = max(s.memory, usage.Maxrss)
	}
	all := strings.Split(strings.TrimSpace(told.String()), "\n")
	s.told = all[len(all)-1]
	return nil
}

func median(v []float64) float64 {
	v = append([]float64(nil), v...)
	sort.Float64s(v)
	return v[len(v)/2]
}

// ratio is the median of the ratios round by round.
func ratio(a, b *subject) float64 {
	var r []float64
	for i := range a.wall {
		r = append(r, a.wall[i]/b.wall[i])
	}
	return median(r)
}

func report(subjects []*subject, lines int64) {
	wc, read, csv, plainRead, plainCSV := subjects[0], subjects[1], subjects[2], subjects[4], subjects[5]
	fmt.Printf("%-32s %10s %10s %12s %10s\n", "", "seconds", "ns/line", "x wc -l", "MiB")
	for _, s := range subjects {
		fmt.Printf("%-32s %10.3f %10.1f %12.2f %10.1f\n", s.name, median(s.wall), median(s.wall)*1e9/float64(lines), ratio(s, wc), float64(s.memory)/1024)
	}
	fmt.Println()
	fmt.Printf("plain reader / busloom, nothing printed: %.1f\n", ratio(plainRead, read))
	fmt.Printf("plain AppendFloat CSV / busloom CSV:     %.1f\n\n", ratio(plainCSV, csv))
	for _, s := range subjects {
		if s.told != "" {
			fmt.Printf("%s: %s\n", s.name, s.told)
		}
	}
}
