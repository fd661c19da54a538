// Command heron-captures writes captures of the delivery van Heron: the demo's
// (make generate), or one of any length for benchmarks (make bench). It only
// parses flags; the van is in package heron.
package main

import (
	"fmt"
	"io"
	"os"

	"github.com/spf13/cobra"

	"busloom/heron"
)

func main() {
	if err := command().Execute(); err != nil {
		os.Exit(1)
	}
}

func command() *cobra.Command {
	root := &cobra.Command{
		Use:          "heron-captures",
		Short:        "Write captures of the delivery van Heron",
		SilenceUsage: true,
	}
	root.AddCommand(testdataCommand(), benchCommand())
	return root
}

func testdataCommand() *cobra.Command {
	var dir string
	c := &cobra.Command{
		Use:   "testdata -o FOLDER",
		Short: "Write the demo's captures anew",
		Args:  cobra.NoArgs,
		RunE:  func(*cobra.Command, []string) error { return heron.WriteCaptures(dir) },
	}
	c.Flags().StringVarP(&dir, "output", "o", "", "folder for the captures")
	if err := c.MarkFlagRequired("output"); err != nil {
		panic(err) // the flag is defined in the line above
	}
	return c
}

func benchCommand() *cobra.Command {
	var (
		path  string
		lines int64
	)
	c := &cobra.Command{
		Use:   "bench --lines N [-o FILE]",
		Short: "Write a long city drive as candump text",
		Args:  cobra.NoArgs,
		RunE: func(cmd *cobra.Command, _ []string) error {
			if lines <= 0 {
				return fmt.Errorf("--lines %d: expected a number above 0", lines)
			}
			write := func(w io.Writer) error {
				return heron.Write(w, heron.Bench, heron.Options{Frames: lines})
			}
			if path == "" {
				return write(cmd.OutOrStdout())
			}
			return heron.Replace(path, write)
		},
	}
	c.Flags().StringVarP(&path, "output", "o", "", "file to write; standard output without it")
	c.Flags().Int64VarP(&lines, "lines", "n", 4_000_000, "how many records")
	return c
}
