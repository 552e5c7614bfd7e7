package main

import (
	"fmt"
	"strings"
	"unicode/utf8"

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
				for _, text := range []string{l.Source + " (" + string(l.Status) + ")", l.Measure, l.Range, l.Values, l.Help} {
					if text != "" {
						printWrapped(c, text)
					}
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
	fmt.Fprintln(c.App.Writer, "    "+strings.ReplaceAll(folded(text, 76), "\n", "\n    "))
}

// folded breaks a paragraph into lines of at most width characters.
func folded(text string, width int) string {
	var b strings.Builder
	at := 0
	for _, word := range strings.Fields(text) {
		n := utf8.RuneCountInString(word)
		switch {
		case at == 0:
		case at+1+n > width:
			b.WriteByte('\n')
			at = 0
		default:
			b.WriteByte(' ')
			at++
		}
		b.WriteString(word)
		at += n
	}
	return b.String()
}
