package main

import "github.com/spf13/cobra"

// atLeast checks that n arguments are given; what says which in words.
func atLeast(n int, what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) < n {
			return usageError("%s needs %s; busloom %[1]s --help shows examples", cmd.Name(), what)
		}
		return nil
	}
}

// exactly is atLeast, and no more.
func exactly(n int, what string) cobra.PositionalArgs {
	return func(cmd *cobra.Command, args []string) error {
		if len(args) != n {
			return usageError("%s takes %s; busloom %[1]s --help shows examples", cmd.Name(), what)
		}
		return nil
	}
}
