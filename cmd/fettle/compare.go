package main

import (
	"errors"
	"fmt"
	"io"
	"os"
	"slices"
	"strings"

	"fettle/audio"
	"fettle/audit/choose"
	"fettle/audit/limits"
	"fettle/audit/report"
	"fettle/audit/report/page"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func compareCommand() *cli.Command {
	return &cli.Command{
		Name:      "compare",
		Usage:     "set realisations of a chain side by side and recommend one",
		UsageText: "fettle compare [options] CHAIN [CHAIN...]",
		Description: compareHelp() +
			"EXIT STATUS\n   0 done; 1 could not start (usage, chain); 3 no realisation keeps the\n   limits; 130 interrupted",
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "as", Value: strings.Join(choose.Usual, ","), Usage: "compare the realisations `LIST` (given may be named, too)"},
			&cli.StringFlag{Name: "for", Usage: "what the output is for: `PURPOSE`", DefaultText: "each in turn"},
			limitFlag(),
			comparedRateFlag(),
			&cli.StringFlag{Name: "recording", Usage: "what becomes of the onsets in `FILE`, too"},
			kernelFlag(),
			jsonFlag(),
			htmlFlag(),
			plotsFlag(),
			&cli.StringFlag{Name: "csv", Usage: "write the rows to `FILE`; -: in place of the table"},
			&cli.StringFlag{Name: "save", Usage: "write the chain as advised by --for or --limit to the new `FILE`"},
		},
		Action: compare,
	}
}

// compareHelp says what the rules are.
func compareHelp() string {
	var b strings.Builder
	b.WriteString("Audits each realisation and recommends the first, in the order of the\npurpose, that keeps all its limits. Limits given here or in the chain are\nkept too; they go before the purpose's on the same measure. Purposes:\n\n")
	for _, r := range choose.Rules() {
		fmt.Fprintf(&b, "   %-10s %s:\n              %s\n", r.Purpose, r.Meaning, strings.Join(r.Limits, "; "))
	}
	b.WriteString("\nmixed has stages that ring long after the sound (hum, low cuts) recursive\nand all others linear; written is the chain as its file has it.\n\n")
	return b.String()
}

func compare(c *cli.Context) error {
	r, err := comparisonOf(c)
	if err != nil {
		return err
	}
	if err := tryComparisonFiles(c, r); err != nil {
		return err
	}
	result, err := unlessInterrupted(c.Context, func() (*choose.Comparison, error) {
		out, err := choose.Compare(r)
		if err == nil {
			err = out.MeasureSpeed()
		}
		return out, err
	})
	if err != nil {
		return err
	}
	if err := writeComparison(c, result); err != nil {
		return err
	}
	if len(result.Rows) == 0 {
		return errors.New("every realisation is refused, for the reasons above; compare others with --as")
	}
	asked := result.Asked()
	switch {
	case asked == nil:
		return nil
	case asked.Chosen != nil:
		return saveAdvised(c, asked.Chosen.Row.Shown())
	case c.String("save") != "":
		return &failure{exitLimit, errors.New("--save: nothing was written, for no realisation keeps all limits; save with limits that one can keep")}
	}
	return &failure{exitLimit, nil}
}

// comparisonOf reads what the command line asks for.
func comparisonOf(c *cli.Context) (r choose.Request, err error) {
	if c.NArg() == 0 {
		return r, errors.New("compare: takes at least one chain file; see fettle compare --help")
	}
	for _, path := range c.Args().Slice() {
		chain, err := comparedChain(path)
		if err != nil {
			return r, err
		}
		r.Chains = append(r.Chains, chain)
	}
	if r.Names, err = namesOf(c.String("as")); err != nil {
		return r, err
	}
	if c.IsSet("for") {
		if r.Purpose, err = choose.ParsePurpose(c.String("for")); err != nil {
			return r, fmt.Errorf("--for: %w", err)
		}
	}
	if r.Limits, err = limits.Parse(*c.Generic("limit").(*texts)...); err != nil {
		return r, fmt.Errorf("--limit: %w", err)
	}
	r.Recording = c.String("recording")
	if r.Rate, err = comparedRate(c); err != nil {
		return r, err
	}
	r.Kernel, _, err = kernelOf(c)
	return r, err
}

func comparedRateFlag() cli.Flag {
	flag := rateFlag().(*cli.StringFlag)
	flag.DefaultText = "that of --recording, or " + flag.Value
	return flag
}

// comparedRate is the recording's where one is named: what is heard is what is measured.
func comparedRate(c *cli.Context) (int, error) {
	asked, err := rateOf(c.String("rate"))
	recording := c.String("recording")
	if err != nil || recording == "" {
		return asked, err
	}
	rate, err := rateOfRecording(recording)
	if err != nil {
		return 0, fmt.Errorf("--recording: %w", err)
	}
	if c.IsSet("rate") && asked != rate {
		return 0, fmt.Errorf("--rate: is %d Hz, but %s has %d Hz; leave out --rate, or name a recording of that rate", asked, recording, rate)
	}
	return rate, nil
}

func rateOfRecording(name string) (int, error) {
	r, err := audio.Open(name)
	if err != nil {
		return 0, err
	}
	defer r.Close()
	return r.Format().SampleRate, nil
}

func comparedChain(path string) (choose.Chain, error) {
	if err := isFile(path); err != nil {
		return choose.Chain{}, err
	}
	chain, err := choose.Load(path)
	if err == nil {
		_, err = limits.Resolve(chain.Limits)
	}
	return chain, err
}

// namesOf reads a list of realisations.
func namesOf(list string) ([]string, error) {
	var names []string
	for _, text := range strings.Split(list, ",") {
		name, err := choose.ParseName(strings.TrimSpace(text))
		switch {
		case err != nil:
			return nil, fmt.Errorf("--as: %w", err)
		case slices.Contains(names, name):
			return nil, fmt.Errorf("--as: %s stands there twice; keep one", name)
		}
		names = append(names, name)
	}
	return names, nil
}

// tryComparisonFiles proves before any work is done that what is asked for can be
// written.
func tryComparisonFiles(c *cli.Context, r choose.Request) error {
	if err := tryReports(c); err != nil {
		return err
	}
	name := c.String("save")
	if name == "" {
		return nil
	}
	if !r.Asks() {
		return errors.New("--save: there is one advice for each purpose; say with --for or --limit which to follow")
	}
	if name == "-" {
		return nil
	}
	if _, err := os.Lstat(name); err == nil {
		return fmt.Errorf("--save: %s: is there already; name a new file", name)
	}
	for _, chain := range r.Chains { // any may be advised
		if err := sameBeside(chain, name); err != nil {
			return err
		}
	}
	return tryWriting(name)
}

// writeComparison prints the tables, unless standard output is for another form of
// them, and writes the files that were asked for.
func writeComparison(c *cli.Context, result *choose.Comparison) error {
	if c.String("json") != "-" && c.String("csv") != "-" && c.String("save") != "-" && c.String("html") != "-" {
		if err := report.Compare(c.App.Writer, result); err != nil {
			return err
		}
	}
	err := writeTo(c, c.String("csv"), func(w io.Writer) error { return report.CompareCSV(w, result) })
	if err != nil {
		return err
	}
	err = writeTo(c, c.String("json"), func(w io.Writer) error { return report.CompareJSON(w, result, c.App.Version) })
	if err != nil {
		return err
	}
	return writePages(c, func() (page.Page, error) { return comparePage(c, result) })
}

// saveAdvised writes the chain that was advised.
func saveAdvised(c *cli.Context, advised *choose.Candidate) error {
	name := c.String("save")
	if name == "" {
		return nil
	}
	text, err := advised.Save()
	if err != nil {
		return fmt.Errorf("--save: %w", err)
	}
	return writeTo(c, name, func(w io.Writer) error {
		_, err := w.Write(text)
		return err
	})
}

// sameBeside makes sure that the coefficient files that a chain names are found
// from another place too.
func sameBeside(chain choose.Chain, name string) error {
	if there, err := filter.Parse(chain.Text, name); err != nil || there.SHA256 != chain.SHA256 {
		return fmt.Errorf("--save: %s: the coefficient files that %s names are not beside it; name a file in the same folder", name, chain.File)
	}
	return nil
}
