package main

import (
	"bytes"
	"fmt"
	"io"

	"busloom/diag"
	"busloom/schema"

	"github.com/spf13/cobra"
)

func fmtCommand(std *streams) *cobra.Command {
	var write, check bool
	cmd := &cobra.Command{
		Use:   "fmt [-w | --check] FILE...",
		Short: "Lay descriptions out in the one canonical way",
		Long: `Fmt prints each description in its canonical layout: comments stay, meaning
stays, diffs get small. With -w it rewrites the files in place; with --check it
names those that aren't laid out so and exits with 1. A file with syntax errors
is left as it is. FILE - is standard input.`,
		Example: `  busloom fmt -w schemas/heron.bus schemas/common/*.bus
  busloom fmt --check schemas/heron.bus
  busloom fmt - < draft.bus`,
		Args: atLeast(1, "a description, or - for standard input"),
		RunE: func(_ *cobra.Command, args []string) error {
			if write && check {
				return usageError("-w and --check exclude each other")
			}
			failed := false
			for _, path := range args {
				text, err := readFormatInput(std, path)
				if err != nil {
					return ioError(err)
				}
				list := &diag.List{}
				laid, ok := schema.Format(diag.NewFile(path, text), list)
				if err := diag.Render(std.err, list.Sorted(), diag.Style{Color: colorful(std.err)}); err != nil {
					return ioError(err)
				}
				if !ok {
					failed = true
					continue
				}
				same := bytes.Equal(laid, text)
				switch {
				case check && !same:
					failed = true
					fmt.Fprintln(std.out, path)
				case check:
				case write && path != "-":
					if !same {
						err = replaceFile(std, path, laid)
					}
				default:
					_, err = std.out.Write(laid)
				}
				if err != nil {
					return ioError(err)
				}
			}
			if failed {
				return &exitError{code: exitDescription}
			}
			return nil
		},
	}
	cmd.Flags().BoolVarP(&write, "write", "w", false, "rewrite the files in place")
	cmd.Flags().BoolVar(&check, "check", false, "name the files that aren't in the canonical layout")
	return cmd
}

func readFormatInput(std *streams, path string) ([]byte, error) {
	if path == "-" {
		return io.ReadAll(io.LimitReader(std.in, largestDescription))
	}
	return readDescription(path)
}

func replaceFile(std *streams, path string, text []byte) error {
	w, err := createOutput(std, path)
	if err != nil {
		return err
	}
	defer w.drop()
	if _, err := w.Write(text); err != nil {
		return err
	}
	return w.keep()
}
