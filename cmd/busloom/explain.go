package main

import (
	"fmt"
	"strings"

	"busloom/diag"
	"busloom/explain"

	"github.com/spf13/cobra"
)

func explainCommand(std *streams) *cobra.Command {
	return &cobra.Command{
		Use:   "explain [CODE...]",
		Short: "Tell what a diagnostic code means, with a wrong and a right example",
		Long: `Explain prints the page of a diagnostic code: what it means, why it matters, a
wrong example and a right one. Without a code it lists them all.`,
		Example: `  busloom explain PL02
  busloom explain`,
		RunE: func(_ *cobra.Command, args []string) error {
			var b strings.Builder
			if len(args) == 0 {
				for _, info := range diag.Codes() {
					fmt.Fprintf(&b, "%s  %-7s  %s\n", info.Code, info.Severity, info.Title)
				}
			}
			for _, arg := range args {
				code := diag.Code(strings.ToUpper(arg))
				page, ok := explain.Page(code)
				if !ok {
					return usageError("there is no code %s; busloom explain lists them", arg)
				}
				b.WriteString(page)
			}
			if _, err := fmt.Fprint(std.out, b.String()); err != nil {
				return ioError(err)
			}
			return nil
		},
	}
}
