package main

import (
	"errors"
	"fmt"
	"io"
	"slices"

	"fettle/audio"
	"fettle/audit/capture"
	"fettle/audit/limits"
	"fettle/audit/pair"
	"fettle/audit/probe"
	"fettle/audit/report"
	"fettle/audit/report/page"

	"github.com/urfave/cli/v2"
)

const measuredExitHelp = "EXIT STATUS\n   0 done; 1 could not start (usage, files) or nothing to measure;\n   3 a limit is exceeded; 130 interrupted"

func auditCaptureCommand() *cli.Command {
	return &cli.Command{
		Name:      "capture",
		Usage:     "measure a device or program by what it made of a probe",
		UsageText: "fettle audit capture [options] PROBE CAPTURE",
		Description: "PROBE is a file of fettle probe, CAPTURE what the device made of it, at the same\n" +
			"sample rate. The probe may stand anywhere in it, at any level and polarity.\n" +
			"Figures carry their 95 % intervals; what noise hides is not stated. Latency\n" +
			"counts from the first frame of CAPTURE as if it had begun with the probe.\n\n" + measuredExitHelp,
		Flags:  measuredFlags(),
		Action: auditCapture,
	}
}

func auditPairCommand() *cli.Command {
	return &cli.Command{
		Name:      "pair",
		Usage:     "measure what was done to a recording, from it and its original",
		UsageText: "fettle audit pair [options] ORIGINAL PROCESSED",
		Description: "Needs no probe: the recording itself is one, as far as it holds sound in every\n" +
			"band. Figures carry their 95 % intervals and are stated where coherence\n" +
			"allows. Says so when no linear filter leads from the one to the other.\n\n" + measuredExitHelp,
		Flags:  measuredFlags(),
		Action: auditPair,
	}
}

func measuredFlags() []cli.Flag {
	return []cli.Flag{
		limitFlag(), jsonFlag(), htmlFlag(), plotsFlag(),
		&cli.StringFlag{Name: "csv", Usage: "write the bands to `FILE`; -: in place of the table"},
		&cli.StringFlag{Name: "curve-csv", Usage: "write the response over frequency to `FILE`"},
	}
}

// measuredForms are the ways in which a measurement is told.
type measuredForms struct {
	text, bands, curve, json func(io.Writer) error
	page                     func() (page.Page, error)
	failed                   bool // by a limit
}

// beginMeasured reads what both audits share: two files and limits.
func beginMeasured(c *cli.Context, first, second string) (report.Names, []limits.Limit, error) {
	n := report.Names{}
	if c.NArg() != 2 {
		return n, nil, fmt.Errorf("%s: takes two files, %s and %s, not %d; see fettle %[1]s --help", commandName(c), first, second, c.NArg())
	}
	n.From, n.To = c.Args().Get(0), c.Args().Get(1)
	l, err := limits.Parse(*c.Generic("limit").(*texts)...)
	if err != nil {
		return n, nil, fmt.Errorf("--limit: %w", err)
	}
	return n, l, tryReports(c)
}

// reportFlags name the files that an audit writes.
var reportFlags = []string{"json", "csv", "curve-csv", "html"}

// tryReports proves before any work is done that the reports can be written.
func tryReports(c *cli.Context) error {
	shown := ""
	for _, flag := range reportFlags {
		name := c.String(flag)
		if name == "-" && shown != "" {
			return fmt.Errorf("--%s: standard output is for --%s already; name a file for one of them", flag, shown)
		}
		if name == "-" {
			shown = flag
		}
		if err := tryWriting(name); err != nil {
			return err
		}
	}
	return nil
}

// toStdout tells whether standard output is for another form of the figures than text.
func toStdout(c *cli.Context) bool {
	for _, flag := range reportFlags {
		if c.String(flag) == "-" {
			return true
		}
	}
	return false
}

func (m measuredForms) write(c *cli.Context) error {
	if !toStdout(c) {
		if err := m.text(c.App.Writer); err != nil {
			return err
		}
	}
	for flag, write := range map[string]func(io.Writer) error{"csv": m.bands, "curve-csv": m.curve, "json": m.json} {
		if err := writeTo(c, c.String(flag), write); err != nil {
			return err
		}
	}
	if err := writePages(c, m.page); err != nil {
		return err
	}
	if m.failed {
		return &failure{exitLimit, nil}
	}
	return nil
}

func auditCapture(c *cli.Context) error {
	n, l, err := beginMeasured(c, "PROBE", "CAPTURE")
	if err != nil {
		return err
	}
	r, err := unlessInterrupted(c.Context, func() (*capture.Report, error) { return measureCapture(n) })
	if err != nil {
		return err
	}
	r.Judge(l)
	shown := plainNames(n)
	return measuredForms{
		text:  func(w io.Writer) error { return report.Capture(w, shown, r) },
		bands: func(w io.Writer) error { return report.CaptureBandsCSV(w, n.To, r) },
		curve: func(w io.Writer) error { return report.CaptureCurveCSV(w, n.To, r) },
		json:  func(w io.Writer) error { return report.CaptureJSON(w, n, r, c.App.Version) },
		page:  func() (page.Page, error) { return capturePage(c, shown, r) },

		failed: slices.ContainsFunc(r.Channels, func(ch *capture.Result) bool { return len(limits.Failed(ch.Verdicts)) > 0 }),
	}.write(c)
}

func plainNames(n report.Names) report.Names {
	return report.Names{From: plain(n.From), To: plain(n.To)}
}

// measureCapture reads the probe's parameters out of its file and measures the capture.
func measureCapture(n report.Names) (*capture.Report, error) {
	probeFile, err := audio.Open(n.From)
	if err != nil {
		return nil, err
	}
	defer probeFile.Close()
	captured, err := audio.Open(n.To)
	if err != nil {
		return nil, err
	}
	defer captured.Close()
	p, err := parametersOf(probeFile, captured, n)
	if err != nil {
		return nil, err
	}
	switch err := capture.Check(p, probeFile, captured); {
	case errors.Is(err, capture.ErrSwapped):
		return nil, swapped(n)
	case err != nil:
		return nil, fmt.Errorf("%s: %w", n.From, err)
	}
	if err := captured.Rewind(); err != nil {
		return nil, err
	}
	r, err := capture.Measure(p, captured)
	if errors.Is(err, capture.ErrNotFound) {
		return nil, fmt.Errorf("%s: %w; capture it whole, louder, and at %d Hz", n.To, err, p.Rate)
	}
	if err != nil {
		return nil, fmt.Errorf("%s: %w", n.To, err)
	}
	return r, nil
}

func swapped(n report.Names) error {
	return fmt.Errorf("%s, %s: probe and capture are swapped; name the probe first", n.From, n.To)
}

// parametersOf reads a probe's parameters from its file.
func parametersOf(probeFile, captured *audio.Recording, n report.Names) (probe.Parameters, error) {
	p, err := probe.Of(probeFile)
	if !errors.Is(err, probe.ErrNoProbe) {
		return p, err
	}
	if _, other := probe.Of(captured); other == nil {
		return p, swapped(n)
	}
	return p, fmt.Errorf("%s: %w", n.From, err)
}

func auditPair(c *cli.Context) error {
	n, l, err := beginMeasured(c, "ORIGINAL", "PROCESSED")
	if err != nil {
		return err
	}
	r, err := unlessInterrupted(c.Context, func() (*pair.Report, error) { return pair.Measure(opener(n.From), opener(n.To)) })
	if err != nil {
		return err
	}
	r.Judge(l)
	shown := plainNames(n)
	err = measuredForms{
		text:  func(w io.Writer) error { return report.Pair(w, shown, r) },
		bands: func(w io.Writer) error { return report.PairBandsCSV(w, n.To, r) },
		curve: func(w io.Writer) error { return report.PairCurveCSV(w, n.To, r) },
		json:  func(w io.Writer) error { return report.PairJSON(w, n, r, c.App.Version) },
		page:  func() (page.Page, error) { return pairPage(c, shown, r) },

		failed: slices.ContainsFunc(r.Channels, func(ch *pair.Result) bool { return len(limits.Failed(ch.Verdicts)) > 0 }),
	}.write(c)
	switch {
	case err != nil || r.Verdict == pair.Filtered:
		return err
	case toStdout(c): // nobody has read the verdict
		return fmt.Errorf("%s, %s: %s", n.From, n.To, r.Reason)
	}
	return &failure{exitNotStarted, nil}
}

func opener(path string) pair.Opener {
	return func() (audio.Source, error) { return audio.Open(path) }
}
