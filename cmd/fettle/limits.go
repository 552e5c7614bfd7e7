package main

import (
	"fmt"
	"strings"

	"fettle/audit/limits"

	"github.com/urfave/cli/v2"
)

func auditLimitsCommand() *cli.Command {
	return &cli.Command{
		Name:      "limits",
		Usage:     "list the named sets of limits, their sources and what they are for",
		UsageText: "fettle audit limits",
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return fmt.Errorf("audit limits: takes no %q; it lists all", c.Args().First())
			}
			for _, l := range limits.Sets() {
				fmt.Fprintf(c.App.Writer, "%s\n", l.Name)
				for _, text := range []string{l.Source + " (" + string(l.Status) + ")", l.Measure, l.Range, l.Help} {
					printWrapped(c, text)
				}
				fmt.Fprintln(c.App.Writer)
			}
			fmt.Fprintln(c.App.Writer, "A table from memory gives advice and never makes a run fail.")
			return nil
		},
	}
}

// printWrapped sets a paragraph in four columns, for 80.
func printWrapped(c *cli.Context, text string) {
	line := "   "
	for _, word := range strings.Fields(text) {
		if len(line)+1+len(word) > 80 {
			fmt.Fprintln(c.App.Writer, line)
			line = "   "
		}
		line += " " + word
	}
	if strings.TrimSpace(line) != "" {
		fmt.Fprintln(c.App.Writer, line)
	}
}
