package main

import (
	"fmt"
	"io"
	"os"
	"path/filepath"

	"fettle/audit"
	"fettle/audit/choose"
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
func auditPage(c *cli.Context, name string, results []*audit.Result) page.Page {
	p := page.Page{Title: plain(name), Version: c.App.Version}
	rows := report.BriefTable(results)
	p.Tables = []page.Table{{Caption: "The audit as a whole", Head: rows[0], Rows: rows[1:]}}
	for _, r := range results {
		p.Subjects = append(p.Subjects, page.Of(report.Label(r), r))
	}
	return p
}

// comparePage is the page of a comparison, one subject a row and way of treatment.
func comparePage(c *cli.Context, result *choose.Comparison) page.Page {
	rows := report.CompareTable(result)
	p := page.Page{Title: "Realisations side by side", Version: c.App.Version, Notes: report.CompareNotes(result),
		Tables: []page.Table{{Caption: "Realisations", Head: rows[0], Rows: rows[1:]}}}
	for _, a := range result.Advice {
		p.Summary = append(p.Summary, report.AdviceWords(result, a)...)
	}
	for _, row := range result.Rows {
		for _, r := range row.Shown().Results {
			p.Subjects = append(p.Subjects, page.Of(report.RowLabel(result, row, r), r))
		}
	}
	return p
}

// writePages writes what --html and --plots ask for.
func writePages(c *cli.Context, p page.Page) error {
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
