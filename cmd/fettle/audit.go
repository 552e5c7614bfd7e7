package main

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"strings"

	"fettle/audit"
	"fettle/audit/report"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func auditCommand() *cli.Command {
	return &cli.Command{
		Name:        "audit",
		Usage:       "say what a chain does to time",
		UsageText:   "fettle audit chain CHAIN",
		Subcommands: []*cli.Command{auditChainCommand()},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return fmt.Errorf("%q: there is no such audit; see fettle audit --help", c.Args().First())
			}
			return cli.ShowSubcommandHelp(c)
		},
	}
}

func auditChainCommand() *cli.Command {
	return &cli.Command{
		Name:      "chain",
		Usage:     "measure a chain by impulse and by chirp",
		UsageText: "fettle audit chain [options] CHAIN",
		Description: "Sends both probes through the very path that render uses; nothing is\n" +
			"played. Delay spread, smear and rings are defined in the README.\n\n" +
			"EXIT STATUS\n   0 done; 1 could not start (usage, chain); 130 interrupted",
		Flags: []cli.Flag{
			rateFlag(),
			phaseFlag(),
			kernelFlag(),
			jsonFlag(),
		},
		Action: auditChain,
	}
}

func rateFlag() cli.Flag {
	return &cli.StringFlag{Name: "rate", Value: "48k", Usage: "realise at sample rate `RATE`, such as 44.1k"}
}

func phaseFlag() cli.Flag {
	return &cli.StringFlag{Name: "phase", Usage: "`PHASE`: linear, minimum, iir, zero or given, over the file"}
}

func jsonFlag() cli.Flag {
	return &cli.StringFlag{Name: "json", Usage: "write all figures to `FILE`; -: in place of the table"}
}

func auditChain(c *cli.Context) error {
	realise, err := oneChain(c)
	if err != nil {
		return err
	}
	kernel, _, err := kernelOf(c)
	if err != nil {
		return err
	}
	if err := tryWriting(c.String("json")); err != nil {
		return err
	}
	results, err := unlessInterrupted(c.Context, func() ([]*audit.Result, error) {
		f, err := realise()
		if err != nil {
			return nil, err
		}
		return audit.Chain(f, kernel)
	})
	if err != nil {
		return err
	}
	if err := printTables(c, results); err != nil {
		return err
	}
	return writeJSON(c, results)
}

// oneChain reads the one chain that is named, the rate and the phase; realising
// it, which may take seconds, is left to the caller.
func oneChain(c *cli.Context) (realise func() (*filter.Filter, error), err error) {
	if c.NArg() != 1 {
		return nil, fmt.Errorf("%s: takes one chain file, not %d; see fettle %s --help", c.Command.FullName(), c.NArg(), c.Command.FullName())
	}
	rate, err := rateOf(c.String("rate"))
	if err != nil {
		return nil, err
	}
	chain, phase, err := loadChain(c.Args().First(), c.String("phase"))
	if err != nil {
		return nil, err
	}
	return func() (*filter.Filter, error) { return chain.Realise(rate, phase) }, nil
}

// printTables prints the figures, unless standard output is for JSON.
func printTables(c *cli.Context, results []*audit.Result) error {
	if c.String("json") == "-" {
		return nil
	}
	for i, r := range results {
		if i > 0 {
			fmt.Fprintln(c.App.Writer)
		}
		if err := report.Text(c.App.Writer, r); err != nil {
			return err
		}
	}
	return nil
}

// writeJSON writes the report that --json asks for.
func writeJSON(c *cli.Context, results []*audit.Result) error {
	return writeTo(c, c.String("json"), func(w io.Writer) error {
		return report.JSON(w, results, c.App.Version)
	})
}

// loadChain reads a chain and the phase that --phase asks for.
func loadChain(path, phaseName string) (*filter.Chain, filter.Realisation, error) {
	phase := filter.Written
	if phaseName != "" {
		var err error
		if phase, err = filter.ParseRealisation(phaseName); err != nil {
			return nil, "", fmt.Errorf("--phase: %w", err)
		}
	}
	if err := isFile(path); err != nil {
		return nil, "", err
	}
	chain, err := filter.Load(path)
	return chain, phase, err
}

// isFile says in the user's words what a system's error says in its own.
func isFile(chain string) error {
	info, err := os.Stat(chain)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return fmt.Errorf("%s: there is no such chain file; check the name", chain)
	case err == nil && info.IsDir():
		return fmt.Errorf("%s: is a folder, not a chain file; name a file in it", chain)
	}
	return nil // what else may be wrong shows when it is read
}

func rateOf(text string) (int, error) {
	hz, err := filter.ParseFrequency(strings.TrimSpace(text))
	if err != nil {
		return 0, fmt.Errorf("--rate: %w", err)
	}
	if !(hz >= 1 && hz <= math.MaxInt32 && hz == math.Trunc(hz)) {
		return 0, fmt.Errorf("--rate: %q is %g Hz; give a whole number of Hz from 1 on, such as 44.1k", text, hz)
	}
	return int(hz), nil
}
