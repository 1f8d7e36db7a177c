// Command fallshadow turns raw camera frames of time-of-flight absorption images of
// partially condensed Bose gases into atom numbers, condensate fractions and temperatures.
package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"os"
	"os/signal"
	"syscall"

	"github.com/alecthomas/kong"
	"github.com/mattn/go-isatty"

	"fallshadow/cmd/fallshadow/internal/settings"
)

// The exit codes; the help says the same.
const (
	exitOK          = 0
	exitError       = 1
	exitUsage       = 2
	exitSomeFailed  = 3
	exitInterrupted = 130
)

const description = `From a night's folder of raw camera frames (atoms, light, dark) to atom number, condensate fraction, temperature and chemical potential, with errors and flags.

Exit codes: 0 all went well; 1 nothing or not all could be done, see the message; 2 the command line or the settings are wrong and nothing was run; 3 done, but some shots failed, each with its reason in the table; 130 interrupted, what was done is kept.`

// errSomeFailed ends a command that did its work on shots of which some failed.
var errSomeFailed = errors.New("some shots failed")

// commands is the command line.
type commands struct {
	Batch     batchCmd     `cmd:"" help:"Fit the shots of a night and write the table of results."`
	Check     checkCmd     `cmd:"" help:"Look at a night before it is fitted: what would be read, and what is wrong. Nothing is written."`
	Calibrate calibrateCmd `cmd:"" help:"Measure what the settings need."`
	Curve     curveCmd     `cmd:"" help:"Analyse a fitted night: the condensate fraction against temperature, theory, the transition."`
	Export    exportCmd    `cmd:"" help:"Write the table of a fitted night as CSV, FITS table or JSON lines."`
	Init      initCmd      `cmd:"" help:"Print commented settings of a laboratory to start from."`
	Predict   predictCmd   `cmd:"" help:"Say what a planned shot will show after any flight, and how well it will tell N, T and the fraction."`
	Simulate  simulateCmd  `cmd:"" help:"Write a night of simulated raw shots with known truth."`
	Watch     watchCmd     `cmd:"" help:"Fit the shots of a night while it is being taken, with a line and a page that show each."`
}

// terminal is where a command writes to.
type terminal struct {
	out, err io.Writer
	live     bool // err is a screen that lines can be redrawn on
}

func main() {
	os.Exit(run(os.Args[1:], terminal{os.Stdout, os.Stderr, isatty.IsTerminal(os.Stderr.Fd())}))
}

// run executes a command line and returns the exit code.
func run(args []string, t terminal) int {
	// The first signal stops the work in an orderly way, a second one at once.
	ctx, stop := signal.NotifyContext(context.Background(), os.Interrupt, syscall.SIGTERM)
	defer stop()
	context.AfterFunc(ctx, stop)

	parser, err := kong.New(&commands{}, kong.Name("fallshadow"), kong.Description(description),
		kong.Writers(t.out, t.err), kong.ConfigureHelp(kong.HelpOptions{Compact: true}),
		kong.BindTo(ctx, (*context.Context)(nil)), kong.BindTo(t.out, (*io.Writer)(nil)), kong.Bind(t))
	if err != nil {
		return complain(t, err, exitError)
	}
	command, err := parser.Parse(args)
	if err != nil {
		return complain(t, fmt.Errorf("%w (see fallshadow --help)", err), exitUsage)
	}
	err = command.Run()
	var wrong settings.Problems
	var misused misuse
	switch {
	case err == nil:
		return exitOK
	case errors.Is(err, errSomeFailed):
		return exitSomeFailed
	case errors.As(err, &wrong), errors.As(err, &misused):
		return complain(t, err, exitUsage)
	case ctx.Err() != nil:
		return complain(t, err, exitInterrupted)
	}
	return complain(t, err, exitError)
}

func complain(t terminal, err error, code int) int {
	fmt.Fprintf(t.err, "fallshadow: %v\n", err)
	return code
}
