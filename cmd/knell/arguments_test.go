package main

import (
	"slices"
	"strings"
	"testing"

	"github.com/urfave/cli/v2"
)

func TestOptionsFirst(t *testing.T) {
	commands := []*cli.Command{weighCommand(), checkCommand(), modesCommand()}
	for _, tc := range []struct{ in, want string }{
		{"knell", "knell"},
		{"knell weigh", "knell weigh"},
		{"knell weigh a.toml --json", "knell weigh --json a.toml"},
		{"knell weigh a.toml --seed 3 --quiet b", "knell weigh --seed 3 --quiet a.toml b"},
		{"knell weigh a.toml --seed=3", "knell weigh --seed=3 a.toml"},
		{"knell weigh a.toml --seed -3", "knell weigh --seed -3 a.toml"},
		{"knell weigh a.toml --seed", "knell weigh --seed"},
		{"knell weigh --strain H1=a --strain L1=b a.toml", "knell weigh --strain H1=a --strain L1=b a.toml"},
		{"knell weigh -- --json", "knell weigh -- --json"},
		{"knell weigh a.toml -- --json --quiet", "knell weigh a.toml -- --json --quiet"},
		{"knell weigh - --json", "knell weigh --json -"},
		{"knell other a --json", "knell other a --json"},
		{"knell --json weigh a", "knell --json weigh a"},
	} {
		if got := optionsFirst(strings.Fields(tc.in), commands); !slices.Equal(got, strings.Fields(tc.want)) {
			t.Errorf("%q becomes %q, want %q", tc.in, got, tc.want)
		}
	}
}
