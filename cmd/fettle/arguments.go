package main

import (
	"fmt"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// flagsFirst moves flags in front of the arguments of their command, since the
// command line library stops looking for flags at the first argument. What
// follows -- stays where it is. args[0] is the program. It fails at flags that
// the command does not have, and at a flag whose value is missing.
func flagsFirst(app *cli.App, args []string) ([]string, error) {
	if len(args) == 0 {
		return args, nil
	}
	commands, flags, rest := descend(app, args[1:])
	moved, stay, err := partition(flags, rest)
	if err != nil {
		return nil, fmt.Errorf("%w; see %s --help", err, strings.Join(append([]string{app.Name}, commands...), " "))
	}
	out := slices.Concat(args[:1], commands, moved)
	if len(stay) > 0 {
		out = append(append(out, "--"), stay...)
	}
	return out, nil
}

// descend takes the words at the front that name a command and its
// subcommands, and gives the flags of the last one.
func descend(app *cli.App, args []string) (names []string, flags []cli.Flag, rest []string) {
	flags = append(slices.Clone(app.Flags), cli.VersionFlag)
	commands := app.Commands
	for len(args) > 0 {
		i := slices.IndexFunc(commands, func(c *cli.Command) bool { return c.HasName(args[0]) })
		if i < 0 {
			break
		}
		names, args = append(names, args[0]), args[1:]
		flags, commands = commands[i].Flags, commands[i].Subcommands
	}
	return names, append(slices.Clone(flags), cli.HelpFlag), args
}

// partition sorts words into flags with their values, and arguments.
func partition(flags []cli.Flag, words []string) (moved, stay []string, err error) {
	for len(words) > 0 {
		word := words[0]
		words = words[1:]
		if word == "--" {
			return moved, append(stay, words...), nil
		}
		if !strings.HasPrefix(word, "-") || word == "-" {
			stay = append(stay, word)
			continue
		}
		name, _, hasValue := strings.Cut(strings.TrimLeft(word, "-"), "=")
		flag := find(flags, name)
		if flag == nil {
			return nil, nil, fmt.Errorf("%s: there is no such flag", word)
		}
		moved = append(moved, word)
		if _, isSwitch := flag.(*cli.BoolFlag); hasValue || isSwitch {
			continue
		}
		if len(words) == 0 {
			return nil, nil, fmt.Errorf("%s: its value is missing", word)
		}
		moved, words = append(moved, words[0]), words[1:]
	}
	return moved, stay, nil
}

func find(flags []cli.Flag, name string) cli.Flag {
	for _, f := range flags {
		if slices.Contains(f.Names(), name) {
			return f
		}
	}
	return nil
}
