package main

import (
	"context"
	"errors"
	"fmt"
	"runtime"

	"fettle/audio/pcm"
	"fettle/audit"
	"fettle/audit/report"
	"fettle/cmd/fettle/internal/batch"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func renderCommand() *cli.Command {
	return &cli.Command{
		Name:      "render",
		Usage:     "clean recordings, aligned to the sample, with a treatment record",
		ArgsUsage: "INPUT... (files, folders, ** patterns)",
		Description: "Each recording keeps its length, rate, channels and sample format, and its\n" +
			"name, below FOLDER. Originals are never written to. What was done is appended\n" +
			"to FOLDER/" + batch.RecordName + "; a second run treats only what is new or changed.\n\n" + exitHelp,
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "chain", Required: true, Usage: "chain `FILE`"},
			&cli.StringFlag{Name: "out", Required: true, Usage: "output `FOLDER`, made if need be"},
			phaseFlag(),
			&cli.StringFlag{Name: "format", Usage: "sample `FORMAT` of the outputs: pcm8, pcm16, pcm24, pcm32, float32 or float64 (default: each original's)"},
			&cli.StringFlag{Name: "headroom", Usage: "lower all recordings by a `LEVEL` such as \"3 dB\", or, with fit, each by what it needs"},
			&cli.IntFlag{Name: "jobs", Value: runtime.GOMAXPROCS(0), Usage: "recordings at once"},
			&cli.BoolFlag{Name: "again", Usage: "treat recordings that are already done again"},
			&cli.StringFlag{Name: "json", Usage: "write the audit's figures to `FILE` (- for standard output, in place of the table)"},
		},
		Action: render,
	}
}

func render(c *cli.Context) error {
	options, err := renderOptions(c)
	if err != nil {
		return err
	}
	chain, phase, err := loadChain(c, c.String("chain"))
	if err != nil {
		return err
	}
	options.Phase = phase
	plan, err := batch.New(chain, c.Args().Slice(), options)
	if err != nil {
		return err
	}
	if err := plan.PrepareOut(); err != nil {
		return err
	}
	if err := auditPlan(c, plan); err != nil {
		return err
	}
	return runPlan(c, plan)
}

func renderOptions(c *cli.Context) (batch.Options, error) {
	o := batch.Options{Out: c.String("out"), Jobs: c.Int("jobs"), Again: c.Bool("again"), Version: c.App.Version}
	if c.NArg() == 0 {
		return o, errors.New("no input is named; give files, folders or ** patterns")
	}
	if o.Jobs < 1 {
		return o, fmt.Errorf("--jobs is %d; at least 1 recording is treated at a time", o.Jobs)
	}
	if name := c.String("format"); name != "" {
		e, err := pcm.ParseEncoding(name)
		if err != nil {
			return o, fmt.Errorf("--format: %w", err)
		}
		o.Encoding = &e
	}
	var err error
	o.Headroom, err = headroomOf(c.String("headroom"))
	return o, err
}

func headroomOf(text string) (batch.Headroom, error) {
	switch text {
	case "":
		return batch.Headroom{}, nil
	case "fit":
		return batch.Headroom{Fit: true}, nil
	}
	db, err := filter.ParseLevel(text)
	if err != nil {
		return batch.Headroom{}, fmt.Errorf("--headroom: %w, or fit", err)
	}
	if db < 0 {
		return batch.Headroom{}, fmt.Errorf("--headroom: %s would raise the recordings; give what is taken off, such as \"3 dB\"", text)
	}
	return batch.Headroom{DB: db}, nil
}

// auditPlan audits the chain at every rate that is about to be treated. A rate
// that the chain cannot serve is left to fail with its recordings.
func auditPlan(c *cli.Context, plan *batch.Plan) error {
	var results []*audit.Result
	for _, rate := range plan.Rates() {
		f, err := plan.Filter(rate)
		if errors.Is(err, filter.ErrForRecording) {
			continue
		}
		if err != nil {
			return err
		}
		of, err := audit.Chain(f)
		if err != nil {
			return err
		}
		results = append(results, of...)
	}
	if len(results) > 0 && c.String("json") != "-" {
		fmt.Fprintf(c.App.Writer, "audit of %s\n", plan.Chain.Name)
		if err := report.Brief(c.App.Writer, results); err != nil {
			return err
		}
		fmt.Fprintln(c.App.Writer)
	}
	return writeJSON(c, results)
}

func runPlan(c *cli.Context, plan *batch.Plan) error {
	show := newProgress(c.App.ErrWriter, plan)
	summary, err := plan.Run(c.Context, show)
	show.close()
	if summary != nil {
		for _, e := range summary.Failures {
			fmt.Fprintf(c.App.ErrWriter, "fettle: %v\n", e)
		}
	}
	if err != nil {
		if errors.Is(err, context.Canceled) {
			return context.Canceled
		}
		return &failure{exitSomeFailed, err}
	}
	if c.String("json") != "-" {
		printSummary(c, plan, summary)
	}
	if summary.Failed > 0 {
		return &failure{status: exitSomeFailed}
	}
	return nil
}

func printSummary(c *cli.Context, plan *batch.Plan, s *batch.Summary) {
	fmt.Fprintf(c.App.Writer, "%s cleaned into %s", count(s.Done, "recording"), plan.Options.Out)
	if s.Skipped > 0 {
		fmt.Fprintf(c.App.Writer, ", %d already done", s.Skipped)
	}
	if s.Failed > 0 {
		fmt.Fprintf(c.App.Writer, ", %d failed", s.Failed)
	}
	if s.Warnings > 0 {
		fmt.Fprintf(c.App.Writer, ", %d with warnings in the record", s.Warnings)
	}
	fmt.Fprintln(c.App.Writer)
}

func count(n int, what string) string {
	if n == 1 {
		return fmt.Sprintf("1 %s", what)
	}
	return fmt.Sprintf("%d %ss", n, what)
}
