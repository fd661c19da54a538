package main

import (
	"fmt"

	"github.com/spf13/cobra"
)

func compileCommand(std *streams) *cobra.Command {
	var out string
	cmd := &cobra.Command{
		Use:   "compile FILE -o OUT",
		Short: "Write the resolved network as one database",
		Long: `Compile writes the checked network as one self-contained JSON database: no
imports, every formula reduced, every layout resolved, with a fingerprint of
its content. The same network gives the same bytes everywhere. decode, check
and draw take a database wherever they take a description.

The form is documented in docs/database.md.`,
		Example: `  busloom compile schemas/heron.bus -o heron.json
  busloom compile schemas/heron.bus -o - | sha256sum`,
		Args: exactly(1, "one description"),
		RunE: func(_ *cobra.Command, args []string) error {
			if out == "" {
				return usageError("compile needs -o OUT (-o - for standard output)")
			}
			if err := checkNotInput(out, args[0]); err != nil {
				return err
			}
			network, err := loadNetwork(std, args[0])
			if err != nil {
				return err
			}
			w, err := createOutput(std, out)
			if err != nil {
				return err
			}
			defer w.drop()
			if err := network.WriteDatabase(w); err != nil {
				return ioError(err)
			}
			if err := w.keep(); err != nil {
				return ioError(err)
			}
			fmt.Fprintf(std.err, "%s: %s\n", network.Name, network.Fingerprint())
			return nil
		},
	}
	cmd.Flags().StringVarP(&out, "output", "o", "", "the database to write; - for standard output")
	return cmd
}
