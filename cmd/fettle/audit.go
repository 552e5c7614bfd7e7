package main

import (
	"context"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math"
	"os"
	"strings"

	"fettle/audio/pcm"
	"fettle/audit"
	"fettle/audit/limits"
	"fettle/audit/report"
	"fettle/audit/report/page"
	"fettle/cmd/fettle/internal/batch"
	"fettle/filter"
	"fettle/filter/stream/machine"

	"github.com/urfave/cli/v2"
)

func auditCommand() *cli.Command {
	return &cli.Command{
		Name:        "audit",
		Usage:       "say what a chain, a device or a treatment does to time",
		UsageText:   "fettle audit chain CHAIN\nfettle audit capture PROBE CAPTURE\nfettle audit pair ORIGINAL PROCESSED\nfettle audit limits",
		Subcommands: []*cli.Command{auditChainCommand(), auditCaptureCommand(), auditPairCommand(), auditLimitsCommand()},
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
			"played. Delay spread, smear and rings are defined in the README. A limit is\n" +
			"a named set, see fettle audit limits, or a bound such as\n" +
			"\"pre-ring=-60 dB beyond 5 ms\"; those of the chain are judged too.\n\n" +
			"EXIT STATUS\n   0 done; 1 could not start (usage, chain); 3 a limit is exceeded;\n   130 interrupted",
		Flags: []cli.Flag{
			rateFlag(),
			&cli.StringFlag{Name: "rates", Usage: "compare sample rates `LIST`, such as 44.1k,48k,96k"},
			phaseFlag(),
			limitFlag(),
			&cli.StringFlag{Name: "recording", Usage: "what becomes of the onsets in `FILE`, too, at its rate"},
			&cli.StringFlag{Name: "through-file", Usage: "measure through files of format `F`, such as pcm24, too"},
			flag("stages", "what each stage costs by itself, too"),
			flag("methods", "print a paragraph for a treatment report instead"),
			kernelFlag(),
			jsonFlag(),
			htmlFlag(),
			plotsFlag(),
			&cli.StringFlag{Name: "csv", Usage: "write the bands to `FILE`; -: in place of the table"},
			&cli.StringFlag{Name: "curve-csv", Usage: "write the response over frequency to `FILE`"},
		},
		Action: auditChain,
	}
}

func limitFlag() cli.Flag {
	return &cli.GenericFlag{Name: "limit", Value: new(texts), Usage: "judge by `LIMIT`; may be given more than once"}
}

func rateFlag() cli.Flag {
	return &cli.StringFlag{Name: "rate", Value: "48k", Usage: "realise at sample rate `RATE`, such as 44.1k"}
}

func phaseFlag() cli.Flag {
	return &cli.StringFlag{Name: "phase", Usage: "`PHASE`: linear, minimum, iir, zero or given, not the file's"}
}

func jsonFlag() cli.Flag {
	return &cli.StringFlag{Name: "json", Usage: "write all figures to `FILE`; -: in place of the table"}
}

func auditChain(c *cli.Context) error {
	a, err := newChainAudit(c)
	if err != nil {
		return err
	}
	if err := tryReports(c); err != nil {
		return err
	}
	results, err := unlessInterrupted(c.Context, func() ([]*audit.Result, error) { return a.run(c.Context) })
	if err != nil {
		return err
	}
	if err := a.print(c, results); err != nil {
		return err
	}
	complain(c.App.ErrWriter, a.refused)
	if err := writeReports(c, append(results, a.stages...), a.heard); err != nil {
		return err
	}
	if err := writePages(c, func() (page.Page, error) { return auditPage(c, a, results) }); err != nil {
		return err
	}
	if audit.Exceeded(results) {
		return &failure{exitLimit, nil}
	}
	return nil
}

// chainAudit is what the command line asks of a chain.
type chainAudit struct {
	chain  *filter.Chain
	phase  filter.Realisation
	rates  []int
	kernel machine.Kernel
	limits []limits.Limit
	file   *pcm.Encoding // of files to measure through; nil: none
	apart  bool          // each stage by itself, too
	heard  report.Heard  // empty: no recording is named
	// heardBy is the chain at the recording's rate.
	heardBy *filter.Filter
	refused batch.Problems  // rates that the chain cannot serve
	stages  []*audit.Result // of the first rate
}

func newChainAudit(c *cli.Context) (a *chainAudit, err error) {
	a = &chainAudit{apart: c.Bool("stages"), heard: report.Heard{Recording: c.String("recording")}}
	if a.chain, a.phase, err = oneChain(c); err != nil {
		return nil, err
	}
	if a.rates, err = ratesOf(c); err != nil {
		return nil, err
	}
	if a.kernel, _, err = kernelOf(c); err != nil {
		return nil, err
	}
	if a.file, err = encodingOf("through-file", c.String("through-file")); err != nil {
		return nil, err
	}
	if a.limits, err = limitsOf(c, a.chain); err != nil {
		return nil, err
	}
	return a, nil
}

// limitsOf are the chain's limits and then those of the command line.
func limitsOf(c *cli.Context, chain *filter.Chain) ([]limits.Limit, error) {
	all, err := limits.Resolve(chain.Limits)
	if err != nil {
		return nil, err
	}
	more, err := limits.Parse(*c.Generic("limit").(*texts)...)
	if err != nil {
		return nil, fmt.Errorf("--limit: %w", err)
	}
	return append(all, more...), nil
}

func (a *chainAudit) run(ctx context.Context) ([]*audit.Result, error) {
	var all []*audit.Result
	for _, rate := range a.rates {
		f, err := a.chain.Realise(rate, a.phase)
		if err != nil {
			a.refused = append(a.refused, err)
			continue
		}
		results, err := audit.Chain(f, a.kernel)
		if err != nil {
			return nil, err
		}
		for _, r := range results {
			r.Judge(a.limits)
		}
		if a.file != nil {
			if err := audit.Ship(ctx, f, results, a.kernel, *a.file); err != nil {
				return nil, err
			}
		}
		all = append(all, results...)
	}
	if all == nil {
		return nil, a.refused
	}
	var err error
	if a.heard.Recording != "" {
		if err = a.listen(); err != nil {
			return nil, err
		}
	}
	if a.apart {
		a.stages, err = audit.Stages(a.chain, all[0].Rate, a.phase, a.kernel)
	}
	return all, err
}

// listen compares the onsets of the recording with what the chain makes of them, at
// the recording's own rate.
func (a *chainAudit) listen() (err error) {
	rate, err := rateOfRecording(a.heard.Recording)
	if err != nil {
		return err
	}
	if a.heardBy, err = a.chain.Realise(rate, a.phase); err != nil {
		return fmt.Errorf("%s: %w", a.heard.Recording, err)
	}
	reports, err := audit.Listen(a.heard.Recording, a.kernel, a.heardBy)
	if err == nil {
		a.heard.Onsets = reports[0]
	}
	return err
}

// print prints the figures, unless standard output is for another form of them.
func (a *chainAudit) print(c *cli.Context, results []*audit.Result) error {
	w := c.App.Writer
	switch {
	case toStdout(c):
		return nil
	case c.Bool("methods"):
		return printEach(w, results, func(r *audit.Result) error { return report.Methods(w, a.chain, r, c.App.Version) })
	case len(a.rates) > 1:
		fmt.Fprintf(w, "audit of %s\n", plain(a.chain.Name))
		if err := report.Brief(w, results); err != nil {
			return err
		}
	default:
		if err := printEach(w, results, func(r *audit.Result) error { return report.Text(w, r) }); err != nil {
			return err
		}
	}
	for _, r := range results {
		if len(r.ThroughFile) == 0 {
			continue
		}
		fmt.Fprintf(w, "\n%s\n", report.Label(r))
		if err := report.ThroughFile(w, r); err != nil {
			return err
		}
	}
	if a.heard.Onsets != nil {
		fmt.Fprintln(w)
		if err := report.Onsets(w, plain(a.heard.Recording), a.heard.Onsets); err != nil {
			return err
		}
	}
	if !a.apart {
		return nil
	}
	fmt.Fprintln(w)
	return report.Stages(w, a.stages)
}

// printEach puts an empty line between results.
func printEach(w io.Writer, results []*audit.Result, print func(*audit.Result) error) error {
	for i, r := range results {
		if i > 0 {
			fmt.Fprintln(w)
		}
		if err := print(r); err != nil {
			return err
		}
	}
	return nil
}

// writeReports writes the files that were asked for.
func writeReports(c *cli.Context, results []*audit.Result, heard report.Heard) error {
	if err := writeTo(c, c.String("csv"), func(w io.Writer) error { return report.BandsCSV(w, results) }); err != nil {
		return err
	}
	if err := writeTo(c, c.String("curve-csv"), func(w io.Writer) error { return report.CurveCSV(w, results) }); err != nil {
		return err
	}
	return writeTo(c, c.String("json"), func(w io.Writer) error {
		return report.JSONHeard(w, results, heard, c.App.Version)
	})
}

// oneChain reads the one chain that is named, and the phase.
func oneChain(c *cli.Context) (*filter.Chain, filter.Realisation, error) {
	if c.NArg() != 1 {
		return nil, "", fmt.Errorf("%s: takes one chain file, not %d; see fettle %s --help", commandName(c), c.NArg(), commandName(c))
	}
	return loadChain(c.Args().First(), c.String("phase"))
}

// ratesOf reads the sample rates to audit at.
func ratesOf(c *cli.Context) ([]int, error) {
	texts := []string{c.String("rate")}
	if list := c.String("rates"); list != "" {
		if c.IsSet("rate") {
			return nil, errors.New("--rates: names them all; leave out --rate")
		}
		texts = strings.Split(list, ",")
	}
	var rates []int
	for _, text := range texts {
		rate, err := rateOf(strings.TrimSpace(text))
		if err != nil {
			return nil, err
		}
		rates = append(rates, rate)
	}
	return rates, nil
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
	if err != nil {
		return nil, phase, err
	}
	_, err = limits.Resolve(chain.Limits) // whose names are known here only
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
