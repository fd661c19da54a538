package main

import (
	"fmt"

	"busloom/diag"

	"github.com/spf13/cobra"
)

func checkCommand(std *streams) *cobra.Command {
	var format string
	var quiet bool
	cmd := &cobra.Command{
		Use:   "check FILE...",
		Short: "Say what is wrong with descriptions",
		Long: `Check compiles each description (or reads each compiled database) and prints
every problem: where it is, what is wrong, what to do. busloom explain CODE
tells more of a code. The problems go to standard output, the count to
standard error.

Exit codes: 0 no errors (warnings and notes don't count); 1 errors; 2 wrong
usage; 5 a file can't be read.`,
		Example: `  busloom check schemas/heron.bus
  busloom check --quiet schemas/heron.bus       # without the notes
  busloom check --format json schemas/heron.bus # for an editor or a CI job`,
		Args: atLeast(1, "a description"),
		RunE: func(_ *cobra.Command, args []string) error {
			f := problemFormat(format)
			if err := f.valid(); err != nil {
				return err
			}
			all := &diag.List{}
			for _, path := range args {
				network, list, err := readNetwork(path)
				if err != nil {
					return err
				}
				all.Add(list)
				if network != nil && f == problemsText {
					fmt.Fprintf(std.err, "%s: %s: %s, %s, %s, %s; %s\n", path, network.Name, count(len(network.Buses), "bus"),
						count(len(network.ECUs), "ECU"), count(len(network.Messages), "message"), count(network.CountSignals(), "signal"), countProblems(list))
				} else if f == problemsText {
					fmt.Fprintf(std.err, "%s: %s\n", path, countProblems(list))
				}
			}
			var err error
			if f == problemsJSON {
				err = diag.RenderJSON(std.out, all.Sorted())
			} else {
				err = diag.Render(std.out, all.Sorted(), diag.Style{Color: colorful(std.out), Notes: !quiet})
			}
			if err != nil {
				return ioError(err)
			}
			if all.Failed() {
				return &exitError{code: exitDescription}
			}
			return nil
		},
	}
	cmd.Flags().StringVar(&format, "format", "text", "how problems are printed: text or json")
	cmd.Flags().BoolVarP(&quiet, "quiet", "q", false, "print errors and warnings, not notes")
	return cmd
}
