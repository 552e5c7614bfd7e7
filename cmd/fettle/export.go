package main

import (
	"fmt"
	"io"
	"slices"
	"strings"

	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func exportCommand() *cli.Command {
	return &cli.Command{
		Name:      "export",
		Usage:     "write a chain's coefficients for other programs",
		UsageText: "fettle export [options] CHAIN",
		Description: "taps: one tap a line; biquads: rows of b0 b1 b2 a0 a1 a2; json: all of it;\n" +
			"wav: the kernel as 64-bit float. The stages fir and biquads read these back.\n" +
			"Coefficients are causal: latency is in them.\n\n" +
			"EXIT STATUS\n   0 done; 1 not done (usage, chain, file); 130 interrupted",
		Flags: []cli.Flag{
			rateFlag(),
			phaseFlag(),
			&cli.StringFlag{Name: "as", Value: string(filter.FormJSON), Usage: "write `FORM`: taps, biquads, json or wav"},
			&cli.IntFlag{Name: "channel", Usage: "of channel `N`, where the chain treats channels apart", DefaultText: "any"},
			&cli.StringFlag{Name: "out", Value: "-", Usage: "write to `FILE` (-: standard output)"},
		},
		Action: export,
	}
}

func export(c *cli.Context) error {
	chain, phase, err := oneChain(c)
	if err != nil {
		return err
	}
	rate, err := rateOf(c.String("rate"))
	if err != nil {
		return err
	}
	form := c.String("as")
	if !slices.Contains(filter.Forms, form) {
		return fmt.Errorf("--as: there is no form %q; allowed are %s", form, strings.Join(filter.Forms, ", "))
	}
	f, err := unlessInterrupted(c.Context, func() (*filter.Filter, error) { return chain.Realise(rate, phase) })
	if err != nil {
		return err
	}
	path, err := pathOf(f, c.Int("channel"))
	if err != nil {
		return err
	}
	return writeTo(c, c.String("out"), func(w io.Writer) error {
		if err := f.Export(w, path, filter.Form(form)); err != nil {
			return fmt.Errorf("%s: %w", c.Args().First(), err)
		}
		return nil
	})
}

// pathOf finds the way that a channel (from 1) takes, 0 for a chain that treats
// all alike.
func pathOf(f *filter.Filter, channel int) (*filter.Path, error) {
	paths := f.Paths()
	if channel < 0 {
		return nil, fmt.Errorf("--channel: %d is no channel; they count from 1", channel)
	}
	if channel == 0 && len(paths) > 1 {
		return nil, fmt.Errorf("--channel: the chain treats channels apart; name one")
	}
	for _, p := range paths {
		if p.Channel == channel {
			return p, nil
		}
	}
	return paths[len(paths)-1], nil
}
