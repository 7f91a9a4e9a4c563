package main

import (
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// optionsFirst moves the options of a command line in front of its arguments,
// where the command-line library looks for them, so that
// "knell weigh event.toml --json" means what it says. What follows "--" stays.
func optionsFirst(args []string, commands []*cli.Command) []string {
	if len(args) < 3 {
		return args
	}
	at := slices.IndexFunc(commands, func(c *cli.Command) bool { return c.Name == args[1] })
	if at < 0 {
		return args
	}
	takesValue := func(option string) bool {
		name := strings.TrimLeft(option, "-")
		if strings.Contains(name, "=") {
			return false
		}
		for _, f := range commands[at].Flags {
			if slices.Contains(f.Names(), name) {
				_, isSwitch := f.(*cli.BoolFlag)
				return !isSwitch
			}
		}
		return false
	}
	options, rest := []string{}, []string{}
	for i := 2; i < len(args); i++ {
		switch a := args[i]; {
		case a == "--":
			rest = append(rest, args[i:]...)
			i = len(args)
		case len(a) > 1 && a[0] == '-':
			options = append(options, a)
			if takesValue(a) && i+1 < len(args) {
				i++
				options = append(options, args[i])
			}
		default:
			rest = append(rest, a)
		}
	}
	return slices.Concat(args[:2], options, rest)
}
