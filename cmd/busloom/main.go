// Command busloom compiles descriptions of vehicle networks and decodes what
// was captured on their buses. This package only parses flags, opens files and
// prints.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"
	"time"

	"github.com/spf13/cobra"
)

func main() {
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	context.AfterFunc(ctx, func() {
		// A second Ctrl-C ends the program at once, and so does waiting for
		// something that doesn't heed the first.
		stop()
		time.AfterFunc(patience, func() { os.Exit(exitInterrupted) })
	})
	code := run(ctx, os.Args[1:], os.Stdin, os.Stdout, os.Stderr)
	stop()
	os.Exit(code)
}

// patience is how long an interrupted command may take to end by itself.
const patience = 3 * time.Second

// streams are the program's standard streams; data goes to out, talk to err.
type streams struct {
	in       io.Reader
	out, err io.Writer
}

// run is the whole program; its result is the exit code.
func run(ctx context.Context, args []string, stdin io.Reader, stdout, stderr io.Writer) int {
	// A closed pipe is to be an error that is reported, not a silent end.
	signal.Ignore(syscall.SIGPIPE)
	std := &streams{stdin, stdout, stderr}
	root := rootCommand(std)
	root.SetArgs(args)
	root.SetIn(stdin)
	root.SetOut(stdout)
	root.SetErr(stderr)
	err := root.ExecuteContext(ctx)
	var exit *exitError
	switch {
	case err == nil:
		return exitClean
	case errors.As(err, &exit):
		if exit.err != nil {
			fmt.Fprintln(stderr, "busloom:", exit.err)
		}
		return exit.code
	}
	// What cobra itself finds wrong with the command line.
	fmt.Fprintln(stderr, "busloom:", err)
	fmt.Fprintln(stderr, "busloom --help lists the commands; busloom COMMAND --help shows examples")
	return exitUsage
}

func rootCommand(std *streams) *cobra.Command {
	root := &cobra.Command{
		Use:   "busloom",
		Short: "Compile descriptions of vehicle networks and decode what their buses said",
		Long: `Busloom compiles the description of a vehicle network (who sends which message,
where each value sits, what it means) and decodes captures with it.

  busloom check heron.bus                       what is wrong with a description
  busloom decode heron.bus drive.log.gz         what the control units said
  busloom explain PL02                          what a diagnostic code means

Exit codes: 0 clean; 1 the description has errors; 2 wrong usage; 3 the capture
had malformed records; 4 protection failures with --strict; 5 reading or
writing failed; 130 interrupted.`,
		SilenceUsage:  true,
		SilenceErrors: true,
		Version:       version(),
	}
	root.SetVersionTemplate("busloom {{.Version}}\n")
	root.CompletionOptions.HiddenDefaultCmd = true
	root.AddCommand(
		checkCommand(std), fmtCommand(std), compileCommand(std),
		decodeCommand(std), drawCommand(std), explainCommand(std),
	)
	return root
}
