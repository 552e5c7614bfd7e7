package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// flagsFirst moves flags in front of the arguments of their command, since the
// command line library stops looking for flags at the first argument. What
// follows -- stays where it is.
func flagsFirst(app *cli.App, args []string) ([]string, error) {
	if len(args) == 0 {
		return args, nil
	}
	out, rest := args[:1:1], args[1:]
	flags, commands := app.Flags, app.Commands
	for len(rest) > 0 {
		i := slices.IndexFunc(commands, func(c *cli.Command) bool { return c.HasName(rest[0]) })
		if i < 0 {
			break
		}
		out, rest = append(out, rest[0]), rest[1:]
		flags, commands = commands[i].Flags, commands[i].Subcommands
	}
	var moved, stay []string
	for i := 0; i < len(rest); i++ {
		a := rest[i]
		if a == "--" {
			stay = append(stay, rest[i+1:]...)
			break
		}
		if !strings.HasPrefix(a, "-") || a == "-" {
			stay = append(stay, a)
			continue
		}
		moved = append(moved, a)
		if wantsValue(flags, a) {
			if i++; i == len(rest) {
				return nil, fmt.Errorf("%s needs a value; see fettle %s --help", a, strings.Join(out[1:], " "))
			}
			moved = append(moved, rest[i])
		}
	}
	out = append(out, moved...)
	if len(stay) > 0 {
		out = append(append(out, "--"), stay...)
	}
	return out, nil
}

// wantsValue tells whether the word after flag a is its value.
func wantsValue(flags []cli.Flag, a string) bool {
	name := strings.TrimLeft(a, "-")
	if strings.Contains(name, "=") {
		return false
	}
	for _, f := range flags {
		if slices.Contains(f.Names(), name) {
			_, isSwitch := f.(*cli.BoolFlag)
			return !isSwitch
		}
	}
	return false
}
