package main

import (
	"bytes"
	"context"
	"os/exec"
	"reflect"
	"strings"
	"testing"

	"github.com/urfave/cli/v2"
)

// lineOf gives the line to go on with for a command line of weigh.
func lineOf(t *testing.T, args ...string) (line string) {
	t.Helper()
	command := weighCommand()
	command.Action = func(c *cli.Context) error {
		line = goOn(c, "some/where")
		return nil
	}
	app := &cli.App{Commands: []*cli.Command{command}, DisableSliceFlagSeparator: true}
	if err := app.RunContext(context.Background(), optionsFirst(append([]string{"knell", "weigh"}, args...), app.Commands)); err != nil {
		t.Fatal(err)
	}
	return line
}

func TestGoOn(t *testing.T) {
	for _, tc := range []struct {
		args []string
		want string
	}{
		{nil, "knell weigh --out some/where"},
		{[]string{"a.toml", "--out", "other", "--replace", "--json"}, "knell weigh --json --out some/where a.toml"},
		{[]string{"--demo", "surface", "--seed", "9", "--quiet=false"}, "knell weigh --demo surface --seed 9 --out some/where"},
		{[]string{"my event.toml", "--strain", "H1=a,b.txt", "--strain", "L1=it's.txt", "--workers=3"},
			`knell weigh --strain H1=a,b.txt --strain 'L1=it'\''s.txt' --workers 3 --out some/where 'my event.toml'`},
		{[]string{"--", "-odd.toml"}, "knell weigh --out some/where -- -odd.toml"},
	} {
		got := lineOf(t, tc.args...)
		if got != tc.want {
			t.Errorf("%q: got %s, want %s", tc.args, got, tc.want)
		}
	}
}

// TestGoOnInAShell has a shell take the line apart.
func TestGoOnInAShell(t *testing.T) {
	shell, err := exec.LookPath("sh")
	if err != nil {
		t.Skip("no shell here")
	}
	odd := `a $HOME "b" 'c' \d *;&.toml`
	out, err := exec.Command(shell, "-c", "knell() { printf '%s\n' \"$@\"; }\n"+lineOf(t, odd)).Output()
	if err != nil {
		t.Fatal(err)
	}
	got := strings.Split(string(bytes.TrimSuffix(out, []byte("\n"))), "\n")
	if want := []string{"weigh", "--out", "some/where", odd}; !reflect.DeepEqual(got, want) {
		t.Errorf("got %q, want %q", got, want)
	}
}

func TestThousands(t *testing.T) {
	for n, want := range map[int64]string{0: "0", 999: "999", 1000: "1,000", 123456: "123,456", 1234567: "1,234,567"} {
		if got := thousands(n); got != want {
			t.Errorf("got %s, want %s", got, want)
		}
	}
}
