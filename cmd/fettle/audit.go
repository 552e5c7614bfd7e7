package main

import (
	"fmt"
	"io"
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
		Subcommands: []*cli.Command{auditChainCommand()},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return fmt.Errorf("there is no audit of %q; see fettle audit --help", c.Args().First())
			}
			return cli.ShowSubcommandHelp(c)
		},
	}
}

func auditChainCommand() *cli.Command {
	return &cli.Command{
		Name:      "chain",
		Usage:     "measure a chain by impulse and by chirp, through the path that render uses",
		ArgsUsage: "CHAIN",
		Description: "Probes the chain in the computer, at float64; nothing is played.\n" +
			"Delay spread, smear and rings are defined in the README.\n\n" + exitHelp,
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "rate", Value: "48k", Usage: "sample rate to audit at, such as `44.1k`"},
			phaseFlag(),
			&cli.StringFlag{Name: "json", Usage: "also write all figures to `FILE` (- for standard output, in place of the table)"},
		},
		Action: auditChain,
	}
}

func phaseFlag() cli.Flag {
	return &cli.StringFlag{Name: "phase", Usage: "realise the chain as `linear`, minimum, iir or given, whatever its file says"}
}

func auditChain(c *cli.Context) error {
	if c.NArg() != 1 {
		return fmt.Errorf("audit chain takes one chain file, not %d; see fettle audit chain --help", c.NArg())
	}
	rate, err := rateOf(c.String("rate"))
	if err != nil {
		return err
	}
	chain, phase, err := loadChain(c, c.Args().First())
	if err != nil {
		return err
	}
	f, err := chain.Realise(rate, phase)
	if err != nil {
		return err
	}
	results, err := audit.Chain(f)
	if err != nil {
		return err
	}
	if c.String("json") != "-" {
		for i, r := range results {
			if i > 0 {
				fmt.Fprintln(c.App.Writer)
			}
			if err := report.Text(c.App.Writer, r); err != nil {
				return err
			}
		}
	}
	return writeJSON(c, results)
}

// writeJSON writes the report that --json asks for.
func writeJSON(c *cli.Context, results []*audit.Result) error {
	return writeTo(c, c.String("json"), func(w io.Writer) error {
		return report.JSON(w, results, c.App.Version)
	})
}

// loadChain reads a chain and the phase that --phase asks for.
func loadChain(c *cli.Context, path string) (*filter.Chain, filter.Realisation, error) {
	phase := filter.Written
	if name := c.String("phase"); name != "" {
		var err error
		if phase, err = filter.ParseRealisation(name); err != nil {
			return nil, "", fmt.Errorf("--phase: %w", err)
		}
	}
	chain, err := filter.Load(path)
	return chain, phase, err
}

func rateOf(text string) (int, error) {
	hz, err := filter.ParseFrequency(strings.TrimSpace(text))
	if err != nil {
		return 0, fmt.Errorf("--rate: %w", err)
	}
	if hz < 1 || hz > 1<<31 || hz != float64(int(hz)) {
		return 0, fmt.Errorf("--rate: %s is %g Hz; a sample rate is a whole number of Hz", text, hz)
	}
	return int(hz), nil
}
