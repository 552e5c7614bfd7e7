package main

import (
	"errors"
	"fmt"
	"runtime"

	"fettle/cmd/fettle/internal/batch"

	"github.com/urfave/cli/v2"
)

func verifyCommand() *cli.Command {
	return &cli.Command{
		Name:      "verify",
		Usage:     "check treated recordings against their record",
		UsageText: "fettle verify [options] FOLDER",
		Description: "Reads every output of FOLDER and compares it with the treatment record: is it\n" +
			"there, whole, and unchanged since? Files that no record names are listed.\n\n" +
			"EXIT STATUS\n   0 all as recorded; 1 could not start; 2 something is not; 130 interrupted",
		Flags: []cli.Flag{
			flag("originals", "check the originals too, where they were"),
			&cli.IntFlag{Name: "jobs", Value: runtime.GOMAXPROCS(0), Usage: "read `N` files at once"},
		},
		Action: verify,
	}
}

func verify(c *cli.Context) error {
	folder, err := oneFolder(c)
	if err != nil {
		return err
	}
	v, err := batch.Verify(c.Context, folder, batch.Check{Originals: c.Bool("originals"), Jobs: c.Int("jobs")})
	if err != nil {
		return err
	}
	for _, path := range v.Strangers {
		fmt.Fprintf(c.App.Writer, "%s: is in no record\n", plain(path))
	}
	fmt.Fprintf(c.App.Writer, "%s as recorded", count(v.Outputs, "output"))
	if n := len(v.Failures); n > 0 {
		fmt.Fprintf(c.App.Writer, ", %d not", n)
	}
	fmt.Fprintln(c.App.Writer)
	if len(v.Failures) > 0 {
		return &failure{exitSomeFailed, v.Failures}
	}
	return nil
}

func gatherCommand() *cli.Command {
	return &cli.Command{
		Name:      "gather",
		Usage:     "make one record of those of a batch's shards",
		UsageText: "fettle gather [options] FOLDER",
		Description: "After all parts of a batch were rendered with --shard into FOLDER, checks that no\n" +
			"recording is missing or there twice and that one kernel was used, and merges\n" +
			"the parts' records into FOLDER/" + batch.RecordName + ".\n\n" +
			"EXIT STATUS\n   0 merged; 1 not merged, for the reasons given; 2 merged, but some recordings\n   had failed",
		Flags:  []cli.Flag{flag("mixed-kernels", "accept parts that were made with different kernels")},
		Action: gather,
	}
}

func gather(c *cli.Context) error {
	folder, err := oneFolder(c)
	if err != nil {
		return err
	}
	m, err := batch.Merge(folder, c.Bool("mixed-kernels"))
	if err != nil {
		return err
	}
	fmt.Fprintf(c.App.Writer, "%s of %s in one record", count(m.Done, "recording"), count(m.Shards, "shard"))
	if n := len(m.Failures); n > 0 {
		fmt.Fprintf(c.App.Writer, ", %d failed", n)
	}
	fmt.Fprintln(c.App.Writer)
	if len(m.Failures) > 0 {
		return &failure{exitSomeFailed, m.Failures}
	}
	return nil
}

func oneFolder(c *cli.Context) (string, error) {
	if c.NArg() != 1 {
		return "", errors.New(commandName(c) + ": takes one folder; see fettle " + commandName(c) + " --help")
	}
	return c.Args().First(), nil
}
