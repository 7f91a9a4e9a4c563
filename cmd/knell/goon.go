package main

import (
	"fmt"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"

	"github.com/urfave/cli/v2"
)

// goOn is the command line that goes on with the weighing of c in its directory.
func goOn(c *cli.Context, directory string) string {
	words := []string{"knell", c.Command.Name}
	add := func(texts ...string) {
		for _, t := range texts {
			words = append(words, quote(t))
		}
	}
	for _, f := range c.Command.Flags {
		name := f.Names()[0]
		// --replace would begin anew.
		if !c.IsSet(name) || name == "out" || name == "replace" {
			continue
		}
		switch f.(type) {
		case *cli.BoolFlag:
			if c.Bool(name) {
				add("--" + name)
			}
		case *cli.StringSliceFlag:
			for _, v := range c.StringSlice(name) {
				add("--"+name, v)
			}
		default:
			add("--"+name, fmt.Sprint(c.Value(name)))
		}
	}
	add("--out", directory)
	if c.NArg() > 0 {
		// A file may be called like an option.
		if strings.HasPrefix(c.Args().First(), "-") {
			words = append(words, "--")
		}
		add(c.Args().First())
	}
	return strings.Join(words, " ")
}

var plainWord = regexp.MustCompile(`^[A-Za-z0-9_@%+=:,./-]+$`)

// quote writes a word as a shell reads it.
func quote(word string) string {
	// A backslash between folders means nothing to the shells of windows.
	if plainWord.MatchString(filepath.ToSlash(word)) {
		return word
	}
	return "'" + strings.ReplaceAll(word, "'", `'\''`) + "'"
}

// thousands shows a count in groups of three digits.
func thousands(n int64) string {
	digits := []byte(strconv.FormatInt(n, 10))
	for i := len(digits) - 3; i > 0; i -= 3 {
		digits = slices.Insert(digits, i, ',')
	}
	return string(digits)
}
