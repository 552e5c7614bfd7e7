package main

import (
	"context"
	"errors"
	"fmt"
	"runtime"
	"sync"

	"fettle/audio/pcm"
	"fettle/audit"
	"fettle/audit/limits"
	"fettle/audit/report"
	"fettle/cmd/fettle/internal/batch"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func renderCommand() *cli.Command {
	return &cli.Command{
		Name:  "render",
		Usage: "clean recordings, aligned, with a treatment record",
		UsageText: "fettle render [options] --chain CHAIN --out FOLDER INPUT...\n" +
			"fettle render [options] --plan LIST --out FOLDER",
		Description: "An input is a file, a folder or a quoted ** pattern; of folders and patterns,\n" +
			".wav and .wave files are taken; hidden ones and output folders are not.\n\n" +
			"Each recording keeps its length, rate, channels and sample format, and its\n" +
			"name, below FOLDER. Originals are never written to. What was done is appended\n" +
			"to FOLDER/" + batch.RecordName + "; a second run treats only what is new or changed.\n\n" +
			"LIST is a CSV file with the columns recording and chain, for a batch of\n" +
			"several chains. --from and --to render a trial of each, NAME.trial.wav.\n\n" +
			"Formats: pcm8, pcm16, pcm24, pcm32, float32, float64.\n\n" + exitHelp,
		Flags: []cli.Flag{
			&cli.StringFlag{Name: "chain", Usage: "clean through the chain in `CHAIN`, a YAML file"},
			&cli.StringFlag{Name: "plan", Usage: "clean what `LIST` names, each through its chain"},
			&cli.StringFlag{Name: "out", Usage: "put outputs into `FOLDER`, made if need be"},
			&cli.StringFlag{Name: "removed", Usage: "put what the chains take out into `FOLDER`"},
			phaseFlag(),
			&cli.StringFlag{Name: "format", Usage: "write `FORMAT`, such as pcm24 (default: as each original)"},
			&cli.StringFlag{Name: "headroom", Usage: "lower all by `LEVEL`, such as \"3 dB\"; fit: as each needs"},
			&cli.StringFlag{Name: "from", Usage: "try a stretch from `TIME` on, such as 1:20"},
			&cli.StringFlag{Name: "to", Usage: "try a stretch up to `TIME`"},
			&cli.IntFlag{Name: "jobs", Value: runtime.GOMAXPROCS(0), Usage: "treat `N` recordings at once"},
			kernelFlag(),
			&cli.StringFlag{Name: "shard", Usage: "treat `PART` of the batch: 2/8, or auto in a Slurm array"},
			flag("again", "treat again what is already done"),
			flag("rehash", "tell by contents, not by size and time, what is done"),
			flag("over-limit", "render although a limit of the chain is exceeded"),
			flag("stop-on-error", "begin no more once a recording has failed"),
			flag("no-proof", "do not read outputs back"),
			flag("dry-run", "print what would be done, and do nothing"),
			jsonFlag(),
		},
		Action: render,
	}
}

func render(c *cli.Context) error {
	options, err := renderOptions(c)
	if err != nil {
		return err
	}
	boundMemory(options.Jobs)
	plan, err := planOf(c, options)
	if err != nil {
		return err
	}
	if c.Bool("dry-run") {
		return printPlan(c.App.Writer, plan)
	}
	if err := plan.PrepareOut(); err != nil {
		return err
	}
	if err := tryWriting(c.String("json")); err != nil {
		return err
	}
	return auditAndRun(c, plan)
}

// auditAndRun renders while the audit is under way, as nothing that is written
// depends on it; of both, its figures come first.
func auditAndRun(c *cli.Context, plan *batch.Plan) error {
	if plan.HasLimits() {
		return auditThenRun(c, plan)
	}
	ctx, cancel := context.WithCancel(c.Context)
	defer cancel()
	show := newProgress(plan)
	var summary *batch.Summary
	var failed error
	var done sync.WaitGroup
	done.Go(func() { summary, failed = plan.Run(ctx, show) })
	_, err := auditPlan(c, plan)
	if err != nil {
		cancel()
	} else {
		show.start(c.Context, c.App.ErrWriter)
	}
	done.Wait()
	show.close()
	if err != nil && c.Context.Err() == nil {
		return auditFailed(c, plan, summary, err)
	}
	return finishRun(c, plan, summary, failed)
}

// auditFailed tells a batch that was not begun from one that was stopped on the way.
func auditFailed(c *cli.Context, plan *batch.Plan, summary *batch.Summary, err error) error {
	if summary == nil || summary.Done == 0 {
		return err
	}
	complain(c.App.ErrWriter, summary.Failures)
	printSummary(c, plan, summary)
	return &failure{exitSomeFailed, fmt.Errorf("the audit failed: %w; what was cleaned stays, and the same command goes on from there", err)}
}

// auditThenRun writes nothing if the audit finds a limit of a chain exceeded.
func auditThenRun(c *cli.Context, plan *batch.Plan) error {
	exceeded, err := auditPlan(c, plan)
	if err != nil {
		return err
	}
	if exceeded && !c.Bool("over-limit") {
		return &failure{exitLimit, errors.New("a limit of the chain is exceeded, and nothing was written; fettle audit chain says by how much; change the chain, or render in spite of it with --over-limit")}
	}
	show := newProgress(plan)
	show.start(c.Context, c.App.ErrWriter)
	summary, err := plan.Run(c.Context, show)
	show.close()
	if err := finishRun(c, plan, summary, err); err != nil {
		return err
	}
	if exceeded {
		return &failure{exitLimit, nil}
	}
	return nil
}

func renderOptions(c *cli.Context) (batch.Options, error) {
	o := batch.Options{
		Out: c.String("out"), Removed: c.String("removed"), Jobs: c.Int("jobs"), Cores: runtime.GOMAXPROCS(0), Version: c.App.Version,
		Again: c.Bool("again"), Rehash: c.Bool("rehash"), StopOnError: c.Bool("stop-on-error"), NoProof: c.Bool("no-proof"),
	}
	listed := c.String("plan") != ""
	switch {
	case listed && c.String("chain") != "":
		return o, errors.New("--plan: names the chains itself; leave out --chain")
	case listed && c.NArg() > 0:
		return o, errors.New("--plan: names the recordings itself; leave out inputs")
	case !listed && c.String("chain") == "":
		return o, errors.New("--chain: is missing; name the chain file to clean with")
	case o.Out == "":
		return o, errors.New("--out: is missing; name the folder for the outputs")
	case !listed && c.NArg() == 0:
		return o, errors.New("render: no input is named; give files, folders or ** patterns")
	case o.Jobs < 1:
		return o, fmt.Errorf("--jobs: %d recordings at once are too few; give 1 or more", o.Jobs)
	}
	var err error
	if o.Kernel, o.KernelGiven, err = kernelOf(c); err != nil {
		return o, err
	}
	if o.Stretch, err = batch.ParseStretch(c.String("from"), c.String("to")); err != nil {
		return o, err
	}
	if text := c.String("shard"); text != "" {
		if o.Shard, err = batch.ParseShard(text); err != nil {
			return o, fmt.Errorf("--shard: %w", err)
		}
	}
	if o.Encoding, err = encodingOf("format", c.String("format")); err != nil {
		return o, err
	}
	o.Headroom, err = headroomOf(c.String("headroom"))
	return o, err
}

// encodingOf reads the format that a flag names; nil for none.
func encodingOf(flag, name string) (*pcm.Encoding, error) {
	if name == "" {
		return nil, nil
	}
	e, err := pcm.ParseEncoding(name)
	if err != nil {
		return nil, fmt.Errorf("--%s: %w", flag, err)
	}
	return &e, nil
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
	if !(db >= 0) {
		return batch.Headroom{}, fmt.Errorf("--headroom: %s would raise the recordings; give what is taken off, such as \"3 dB\"", text)
	}
	return batch.Headroom{DB: db}, nil
}

// auditPlan audits the chain at every rate that is about to be treated, and
// prints and writes the figures, and tells whether a limit is exceeded.
func auditPlan(c *cli.Context, plan *batch.Plan) (exceeded bool, err error) {
	all, err := unlessInterrupted(c.Context, func() ([]*audit.Result, error) { return audits(plan) })
	if err != nil {
		return false, err
	}
	results := all
	for c.String("json") != "-" && len(results) > 0 {
		n := 1
		for n < len(results) && results[n].Chain == results[0].Chain {
			n++
		}
		fmt.Fprintf(c.App.Writer, "audit of %s\n", plain(results[0].Chain))
		if err := report.Brief(c.App.Writer, results[:n]); err != nil {
			return false, err
		}
		fmt.Fprintln(c.App.Writer)
		results = results[n:]
	}
	return audit.Exceeded(all), writeJSON(c, all)
}

// audits leaves out a rate that the chain cannot serve: its recordings fail
// with the reason when their turn comes.
func audits(plan *batch.Plan) ([]*audit.Result, error) {
	var results []*audit.Result
	for _, use := range plan.Uses() {
		f, err := plan.Filter(use)
		if errors.Is(err, filter.ErrForRecording) {
			continue
		}
		if err != nil {
			return nil, err
		}
		of, err := audit.Chain(f, plan.Options.Kernel)
		if err != nil {
			return nil, err
		}
		judges, err := limits.Resolve(use.Chain.Limits)
		if err != nil {
			return nil, err
		}
		for _, r := range of {
			r.Judge(judges)
		}
		results = append(results, of...)
	}
	return results, nil
}

func finishRun(c *cli.Context, plan *batch.Plan, summary *batch.Summary, err error) error {
	if summary != nil {
		complain(c.App.ErrWriter, summary.Warnings)
		complain(c.App.ErrWriter, summary.Failures)
		if c.String("json") != "-" {
			printSummary(c, plan, summary)
		}
	}
	switch {
	case errors.Is(err, context.Canceled):
		return &failure{exitInterrupted, errors.New("interrupted: what was not finished was left as it was; the same command goes on from there")}
	case err != nil || summary.Failed() > 0:
		return &failure{exitSomeFailed, err}
	}
	return nil
}

func printSummary(c *cli.Context, plan *batch.Plan, s *batch.Summary) {
	fmt.Fprintf(c.App.Writer, "%s cleaned into %s", count(s.Done, "recording"), plain(plan.Options.Out))
	for _, more := range []struct {
		n    int
		what string
	}{
		{s.Skipped, "already done"}, {s.Failed(), "failed"}, {s.Left, "left"}, {len(s.Warnings), "warnings"},
	} {
		if more.n > 0 {
			fmt.Fprintf(c.App.Writer, ", %d %s", more.n, more.what)
		}
	}
	fmt.Fprintln(c.App.Writer)
}

func count(n int, what string) string {
	if n == 1 {
		return fmt.Sprintf("1 %s", what)
	}
	return fmt.Sprintf("%d %ss", n, what)
}
