package main

import (
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"

	"fettle/audit"
	"fettle/audit/capture"
	"fettle/audit/choose"
	"fettle/audit/hear"
	"fettle/audit/pair"
	"fettle/audit/report"
	"fettle/audit/report/page"

	"github.com/urfave/cli/v2"
)

func htmlFlag() cli.Flag {
	return &cli.StringFlag{Name: "html", Usage: "write a page with tables and plots to `FILE`"}
}

func plotsFlag() cli.Flag {
	return &cli.StringFlag{Name: "plots", Usage: "write each plot as SVG and PNG into the folder `DIR`"}
}

// auditPage is the page of one chain's audit.
func auditPage(c *cli.Context, a *chainAudit, results []*audit.Result) (page.Page, error) {
	p := page.Page{Title: plain(a.chain.Name), Version: c.App.Version}
	p.Tables = []page.Table{tableOf("The audit as a whole", report.BriefTable(results))}
	for _, r := range results {
		p.Subjects = append(p.Subjects, page.Of(report.Label(r), r))
	}
	if a.heardBy == nil {
		return p, nil
	}
	return p, addHearing(&p, a.heard.Recording, []hear.Way{heardWay(string(a.heardBy.Phase()), a.heardBy, a.kernel, results)})
}

// comparePage is the page of a comparison, one subject a row and way of treatment.
func comparePage(c *cli.Context, result *choose.Comparison) (page.Page, error) {
	p := page.Page{Title: plain(report.CompareTitle(result)), Version: c.App.Version, Notes: report.CompareNotes(result),
		Tables: []page.Table{tableOf("Realisations", report.CompareTable(result))}}
	for _, a := range result.Advice {
		p.Summary = append(p.Summary, report.AdviceWords(result, a)...)
	}
	var ways []hear.Way
	for _, row := range result.Rows {
		shown := row.Shown()
		for _, r := range shown.Results {
			p.Subjects = append(p.Subjects, page.Of(report.RowLabel(result, row, r), r))
		}
		ways = append(ways, heardWay(report.RowName(result, row), shown.Filter, result.Kernel, shown.Results))
	}
	if result.Recording == "" || len(ways) == 0 {
		return p, nil
	}
	return p, addHearing(&p, result.Recording, ways)
}

// writePages writes what --html and --plots ask for; it makes the page only then.
func writePages(c *cli.Context, make func() (page.Page, error)) error {
	if c.String("html") == "" && c.String("plots") == "" {
		return nil
	}
	p, err := unlessInterrupted(c.Context, make)
	if err != nil {
		return err
	}
	if err := writeTo(c, c.String("html"), func(w io.Writer) error { return page.Write(w, p) }); err != nil {
		return err
	}
	dir := c.String("plots")
	if dir == "" {
		return nil
	}
	files, err := page.PlotFiles(p.Subjects)
	if err != nil {
		return err
	}
	heard, err := page.OnsetPlotFiles(p.Hearing)
	if err != nil {
		return err
	}
	files = append(files, heard...)
	if err := os.MkdirAll(dir, 0o777); err != nil {
		return fmt.Errorf("--plots: %w; choose another folder", err)
	}
	for _, f := range files {
		err := writeTo(c, filepath.Join(dir, f.Name), func(w io.Writer) error {
			_, err := w.Write(f.Data)
			return err
		})
		if err != nil {
			return err
		}
	}
	return nil
}

// capturePage is the page of a capture, one subject a channel.
func capturePage(c *cli.Context, n report.Names, r *capture.Report) (page.Page, error) {
	p := page.Page{Title: n.To + ", a capture of " + n.From, Version: c.App.Version, Notes: append(notesOf(r.Warnings), measuredNote)}
	p.Tables = []page.Table{tableOf("The capture as a whole", report.CaptureTable(r))}
	for _, ch := range r.Channels {
		p.Subjects = append(p.Subjects, page.OfCapture(ch))
	}
	return p, nil
}

// measuredNote says what differs from the page of a chain.
const measuredNote = "Shaded bands and ± are 95 % intervals."

// notesOf makes whole sentences of warnings.
func notesOf(warnings []string) []string {
	var out []string
	for _, w := range warnings {
		out = append(out, strings.ToUpper(w[:1])+w[1:]+".")
	}
	return out
}

// pairPage is the page of a processed recording beside its original, one subject a
// channel.
func pairPage(c *cli.Context, n report.Names, r *pair.Report) (page.Page, error) {
	p := page.Page{Title: n.To + " beside " + n.From, Version: c.App.Version, Notes: append(notesOf(r.Warnings), measuredNote)}
	if r.Reason != "" {
		p.Summary = []string{r.Reason + "."}
	}
	p.Tables = []page.Table{tableOf("The pair as a whole", report.PairTable(r))}
	for _, ch := range r.Channels {
		p.Subjects = append(p.Subjects, page.OfPair(r, ch))
	}
	return p, nil
}

func tableOf(caption string, rows [][]string) page.Table {
	return page.Table{Caption: caption, Head: rows[0], Rows: rows[1:]}
}
