package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"runtime/debug"
	"slices"
	"strings"

	"fettle/cmd/fettle/internal/batch"

	"github.com/urfave/cli/v2"
)

// Exit statuses, a promise to scripts.
const (
	exitDone        = 0
	exitNotStarted  = 1 // usage, chain, no input: nothing was done
	exitSomeFailed  = 2 // finished, but some recordings failed
	exitLimit       = 3 // a limit is exceeded
	exitInterrupted = 130
)

const exitHelp = `EXIT STATUS
   0 done; 1 could not start (usage, chain, no input); 2 finished, but some
   recordings failed; 3 a limit is exceeded; 130 interrupted`

// failure carries an exit status; its error may be nil when all was said.
type failure struct {
	status int
	err    error
}

func (f *failure) Error() string { return fmt.Sprint(f.err) }
func (f *failure) Unwrap() error { return f.err }

// run is the whole program without process state: the one place where errors
// become messages and statuses.
func run(ctx context.Context, args []string, stdout, stderr io.Writer) int {
	app := newApp(stdout, stderr)
	args, err := flagsFirst(app, args)
	if err == nil {
		err = app.RunContext(ctx, args)
	}
	return finish(err, stderr)
}

func finish(err error, stderr io.Writer) int {
	if err == nil {
		return exitDone
	}
	status := exitNotStarted
	var f *failure
	switch {
	case errors.As(err, &f):
		status, err = f.status, f.err
	case errors.Is(err, context.Canceled):
		status, err = exitInterrupted, errors.New("interrupted")
	}
	complain(stderr, err)
	return status
}

// complain prints an error; of several problems, each on a line of its own.
func complain(w io.Writer, err error) {
	var problems batch.Problems
	switch {
	case errors.As(err, &problems):
		for _, e := range problems {
			complain(w, e)
		}
	case err != nil:
		fmt.Fprintf(w, "fettle: %s\n", plain(err.Error()))
	}
}

func newApp(stdout, stderr io.Writer) *cli.App {
	app := &cli.App{
		Name:      "fettle",
		Usage:     "clean recordings, aligned to the sample",
		UsageText: "fettle render --chain CHAIN --out FOLDER INPUT...\nfettle audit chain CHAIN\nfettle audit capture PROBE CAPTURE\nfettle audit pair ORIGINAL PROCESSED\nfettle audit limits\nfettle probe chirp --out FILE\nfettle compare CHAIN [CHAIN...]\nfettle export CHAIN\nfettle verify FOLDER\nfettle gather FOLDER",
		Description: "Puts recordings through one chain of filters and hands them back aligned\n" +
			"to the sample, with a record of what was done; and says in numbers what\n" +
			"the chain does to time. Flags may stand before or after arguments.",
		Version:   version(),
		Writer:    stdout,
		ErrWriter: stderr,
		Commands:  []*cli.Command{renderCommand(), auditCommand(), probeCommand(), compareCommand(), exportCommand(), verifyCommand(), gatherCommand()},
		// Errors are printed in one place, by finish.
		ExitErrHandler:  func(*cli.Context, error) {},
		OnUsageError:    usageError,
		HideHelpCommand: true,
	}
	app.CustomAppHelpTemplate = cli.AppHelpTemplate + "\n" + exitHelp + "\n"
	app.Action = func(c *cli.Context) error {
		if c.Args().Present() {
			return fmt.Errorf("%q: there is no such command; see fettle --help", c.Args().First())
		}
		return cli.ShowAppHelp(c)
	}
	for _, c := range app.Commands {
		quiet(c)
	}
	return app
}

// quiet makes a command hand usage errors on instead of printing its help.
func quiet(c *cli.Command) {
	c.OnUsageError = usageError
	c.HideHelpCommand = true
	for _, sub := range c.Subcommands {
		quiet(sub)
	}
}

func usageError(c *cli.Context, err error, _ bool) error {
	return fmt.Errorf("%w; see %s --help", err, strings.TrimSpace("fettle "+commandName(c)))
}

// commandName is what was called, such as "audit chain".
func commandName(c *cli.Context) string {
	var names []string
	for _, at := range c.Lineage() {
		if at.Command != nil && at.Command.Name != "" && at.Command.Name != c.App.Name && !slices.Contains(names, at.Command.Name) {
			names = append(names, at.Command.Name)
		}
	}
	slices.Reverse(names)
	return strings.Join(names, " ")
}

// version is the module's version where the build knows one.
func version() string {
	info, ok := debug.ReadBuildInfo()
	if !ok || info.Main.Version == "" || info.Main.Version == "(devel)" {
		return "devel"
	}
	return info.Main.Version
}
