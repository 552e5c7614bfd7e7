package main

import (
	"cmp"
	"errors"
	"fmt"
	"os"

	"fettle/audit/probe"
	"fettle/filter"

	"github.com/urfave/cli/v2"
)

func probeCommand() *cli.Command {
	return &cli.Command{
		Name:      "probe",
		Usage:     "make a recording that a device or program is audited by",
		UsageText: "fettle probe chirp --out FILE\nfettle probe impulse --out FILE",
		Description: "Play the probe through the device, or process it with the program, record\n" +
			"what comes out at the same sample rate, and give both files to\n" +
			"fettle audit capture. The probe file carries its own parameters.\n\n" + folded(probe.Caution, 76),
		Subcommands: []*cli.Command{
			probeKindCommand(probe.Chirp, "an exponential sweep, for devices and programs alike",
				&cli.StringFlag{Name: "from", Usage: "lowest frequency at full level, `HZ`", DefaultText: "10 Hz"},
				&cli.StringFlag{Name: "to", Usage: "highest frequency at full level, `HZ`", DefaultText: "0.46 of the rate"},
				&cli.Float64Flag{Name: "pause", Usage: "silence after each chirp, in `SECONDS`", DefaultText: "2"}),
			probeKindCommand(probe.Impulse, "single samples, for programs; a loudspeaker is better served by a chirp",
				&cli.IntFlag{Name: "dither", Usage: "carry the dither of a path of `BITS` bits", DefaultText: "none"}),
		},
		Action: func(c *cli.Context) error {
			if c.Args().Present() {
				return fmt.Errorf("%q: there is no such probe; make a chirp or an impulse", c.Args().First())
			}
			return cli.ShowSubcommandHelp(c)
		},
	}
}

func probeKindCommand(kind probe.Kind, usage string, own ...cli.Flag) *cli.Command {
	d := probe.Defaults(kind, 48000)
	seconds := "length of a chirp in `SECONDS`"
	if kind == probe.Impulse {
		seconds = "from impulse to impulse in `SECONDS`"
	}
	return &cli.Command{
		Name:        string(kind),
		Usage:       usage,
		UsageText:   "fettle probe " + string(kind) + " [options] --out FILE",
		Description: folded(probe.Caution, 76),
		Flags: append([]cli.Flag{
			&cli.StringFlag{Name: "out", Usage: "write the probe to the new `FILE`"},
			&cli.StringFlag{Name: "rate", Value: "48k", Usage: "sample rate `RATE` of the probe and of the capture"},
			&cli.IntFlag{Name: "channels", Value: d.Channels, Usage: "the same probe in `N` channels"},
			&cli.StringFlag{Name: "format", Value: "pcm24", Usage: "write `FORMAT`, such as pcm16 or float32"},
			&cli.Float64Flag{Name: "seconds", Value: d.Seconds, Usage: seconds},
			&cli.StringFlag{Name: "level", Value: fmt.Sprintf("%g dB", d.Level), Usage: "peak `LEVEL` re full scale"},
			&cli.IntFlag{Name: "repeats", Value: d.Repeats, Usage: "play it `N` times; fewer than 3 give no intervals"},
		}, own...),
		Action: func(c *cli.Context) error { return makeProbe(c, kind) },
	}
}

func makeProbe(c *cli.Context, kind probe.Kind) error {
	if c.Args().Present() {
		return fmt.Errorf("probe %s: takes no %q; name the file with --out", kind, c.Args().First())
	}
	p, err := probeOf(c, kind)
	if err != nil {
		return err
	}
	to, err := encodingOf("format", cmp.Or(c.String("format"), "pcm24"))
	if err != nil {
		return err
	}
	name := c.String("out")
	switch _, err := os.Lstat(name); {
	case name == "":
		return errors.New("--out: missing; name the file to write the probe to")
	case err == nil:
		return fmt.Errorf("--out: %s: is there already; name a new file", name)
	}
	if err := p.Write(c.Context, name, *to); err != nil {
		return err
	}
	describeProbe(c, name, p)
	return nil
}

// probeOf reads what the command line asks for.
func probeOf(c *cli.Context, kind probe.Kind) (p probe.Parameters, err error) {
	rate, err := rateOf(c.String("rate"))
	if err != nil {
		return p, err
	}
	r := probe.Defaults(kind, rate)
	r.Channels, r.Seconds, r.Repeats, r.Dither = c.Int("channels"), c.Float64("seconds"), c.Int("repeats"), c.Int("dither")
	if c.IsSet("pause") {
		r.Pause = c.Float64("pause")
	}
	if r.Level, err = filter.ParseLevel(c.String("level")); err != nil {
		return p, fmt.Errorf("--level: %w", err)
	}
	for flag, to := range map[string]*float64{"from": &r.From, "to": &r.To} {
		if c.IsSet(flag) {
			if *to, err = filter.ParseFrequency(c.String(flag)); err != nil {
				return p, fmt.Errorf("--%s: %w", flag, err)
			}
		}
	}
	return r.Plan()
}

func describeProbe(c *cli.Context, name string, p probe.Parameters) {
	fmt.Fprintf(c.App.Writer, "%s: %s, %.1f s in all\n", plain(name), p, float64(p.Frames())/float64(p.Rate))
	if p.Repeats < 3 {
		fmt.Fprintln(c.App.Writer, "With fewer than 3 repeats an audit states no intervals, and with one no drift.")
	}
	fmt.Fprintln(c.App.Writer)
	printWrapped(c, probe.Caution)
}
