package main

import (
	"fmt"
	"io"
	"text/tabwriter"

	"fettle/cmd/fettle/internal/batch"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

// flag is a switch.
func flag(name, usage string) cli.Flag {
	return &cli.BoolFlag{Name: name, Usage: usage, DisableDefaultText: true}
}

// planOf plans the batch that the command line names: inputs through one chain, or
// a list with its own.
func planOf(c *cli.Context, o batch.Options) (*batch.Plan, error) {
	list := c.String("plan")
	if list == "" {
		chain, phase, err := loadChain(c.String("chain"), c.String("phase"))
		if err != nil {
			return nil, err
		}
		o.Phase = phase
		return batch.New(chain, c.Args().Slice(), o)
	}
	listed, err := batch.ReadList(list)
	if err != nil {
		return nil, err
	}
	loaded := map[string]*filter.Chain{}
	var chains []*filter.Chain
	for _, l := range listed {
		if loaded[l.Chain] == nil {
			if loaded[l.Chain], o.Phase, err = loadChain(l.Chain, c.String("phase")); err != nil {
				return nil, fmt.Errorf("the list %s, line %d: %w", list, l.Line, err)
			}
		}
		chains = append(chains, loaded[l.Chain])
	}
	return batch.NewFromList(list, listed, chains, o)
}

// printPlan says what render would do.
func printPlan(w io.Writer, p *batch.Plan) error {
	t := tabwriter.NewWriter(w, 0, 0, 2, ' ', 0)
	fmt.Fprintln(t, "state\trecording\tchain\trate, Hz\tlength, s\tinto")
	var bytes int64
	todo := 0
	for _, j := range p.Jobs {
		rate, length := "?", "?"
		if j.Rate > 0 {
			rate, length = fmt.Sprint(j.Rate), fmt.Sprintf("%.1f", float64(j.Frames)/float64(j.Rate))
		}
		state := "done"
		if !j.Done {
			state, bytes, todo = "to do", bytes+j.Need+j.NeedRemoved, todo+1
		}
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\t%s\t%s\n", state, plain(j.Path), plain(j.Chain.Name), rate, length, plain(j.Output))
	}
	if err := t.Flush(); err != nil {
		return err
	}
	fmt.Fprintf(w, "%s to clean, about %.1f MB of outputs; %d already done. Nothing was written.\n", count(todo, "recording"), float64(bytes)/1e6, len(p.Jobs)-todo)
	if len(p.Problems) > 0 {
		return &failure{exitSomeFailed, p.Problems}
	}
	return nil
}
