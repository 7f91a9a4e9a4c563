package main

import (
	"regexp"
	"slices"
	"strings"

	"github.com/urfave/cli/v2"
)

// The option library's complaints, which show its insides.
var (
	unknownOption = regexp.MustCompile(`^flag provided but not defined: -*(.*)$`)
	needsArgument = regexp.MustCompile(`^flag needs an argument: -*(.*)$`)
	badValue      = regexp.MustCompile(`^(?:could not parse|invalid(?: boolean)? value) (".*?") (?:as .* value )?for (?:flag )?-*([^:]+)(?:: .*)?$`)
	badSyntax     = regexp.MustCompile(`^bad flag syntax: (.*)$`)
)

// optionMessage says in our words what the option library found.
func optionMessage(c *cli.Context, err error) string {
	text := err.Error()
	if m := unknownOption.FindStringSubmatch(text); m != nil {
		return "no option --" + m[1] + "; see --help"
	}
	if m := needsArgument.FindStringSubmatch(text); m != nil {
		return "--" + m[1] + " wants a value"
	}
	if m := badValue.FindStringSubmatch(text); m != nil {
		return "--" + m[2] + " = " + m[1] + ", want " + wantedValue(c, m[2])
	}
	if m := badSyntax.FindStringSubmatch(text); m != nil {
		return m[1] + " is no option; see --help"
	}
	return text
}

// wantedValue says what an option takes.
func wantedValue(c *cli.Context, option string) string {
	if c.Command != nil {
		for _, f := range c.Command.Flags {
			if !slices.Contains(f.Names(), option) {
				continue
			}
			switch f.(type) {
			case *cli.BoolFlag:
				return "true or false"
			case *cli.IntFlag, *cli.Int64Flag, *cli.IntSliceFlag:
				return "a whole number"
			case *cli.Float64Flag, *cli.Float64SliceFlag:
				return "a number"
			}
		}
	}
	return "what --help says"
}

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
			if !takesValue(a) {
				continue
			}
			if i+1 == len(args) {
				// Nothing must come to stand behind it and pass for its value.
				return slices.Concat(args[:2], options)
			}
			i++
			options = append(options, args[i])
		default:
			rest = append(rest, a)
		}
	}
	return slices.Concat(args[:2], options, rest)
}
