package main

import (
	"bytes"
	"context"
	"encoding/json"
	"io"
	"math"
	"strings"
	"testing"

	"knell/configs"
)

// knell runs one command line.
func knell(t *testing.T, args ...string) (status int, stdout, stderr string) {
	t.Helper()
	var out, errs bytes.Buffer
	status = run(context.Background(), append([]string{"knell"}, args...), &out, &errs)
	return status, out.String(), errs.String()
}

// parse decodes the one JSON document that out must be.
func parse(t *testing.T, out string, document any) {
	t.Helper()
	d := json.NewDecoder(strings.NewReader(out))
	if err := d.Decode(document); err != nil {
		t.Fatalf("%v in\n%s", err, out)
	}
	if _, err := d.Token(); err != io.EOF {
		t.Errorf("more than one document on standard output:\n%s", out)
	}
}

func TestUsageErrors(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "tiny.toml", tiny)
	for _, tc := range []struct {
		args string
		want string // in the one line on standard error
	}{
		{"frobnicate", `no command "frobnicate", want one of weigh, check, modes`},
		{"help", `no command "help", want one of weigh, check, modes`},
		{"--frobnicate", "no option --frobnicate"},
		{"weigh --frobnicate", "no option --frobnicate"},
		{"weigh tiny.toml --frobnicate", "no option --frobnicate"},
		{"check --out x tiny.toml", "no option --out"},
		{"weigh --out", "--out wants a value"},
		{"weigh tiny.toml --seed", "--seed wants a value"},
		{"weigh tiny.toml --seed x", `--seed = "x", want a whole number`},
		{"weigh tiny.toml --seed 1.5", `--seed = "1.5", want a whole number`},
		{"weigh tiny.toml --seed -1", "--seed"},
		{"weigh tiny.toml --workers -1", "--workers"},
		{"weigh tiny.toml --quiet=maybe", `--quiet = "maybe", want true or false`},
		{"weigh tiny.toml other.toml", "one event file at a time"},
		{"weigh tiny.toml --demo surface", "not both"},
		{"weigh --demo nobody", "surface"},
		{"weigh nobody.toml", "nobody.toml"},
		{"weigh help", "help: event file"},
		{"weigh tiny.toml --strain H1", "--strain H1, want CODE=FILE"},
		{"weigh tiny.toml --strain =x", "want CODE=FILE"},
		{"weigh tiny.toml --strain L1=x.hdf5", "no site L1, want one of H1"},
		{"weigh tiny.toml --strain H1=gone.hdf5", "gone.hdf5"},
		{"weigh tiny.toml --strain H1=tiny.toml", "unknown kind of file"},
		{"weigh tiny.toml --out tiny.toml", "want a directory"},
		{"check", "want an event file"},
		{"check --demo", "--demo wants a value"},
		{"modes", "--spin"},
		{"modes --spin", "--spin wants a value"},
		{"modes --spin fast", `--spin = "fast", want a number`},
		{"modes --spin 0.1,0.2", `--spin = "0.1,0.2", want a number`},
		{"modes --spin 2", "spin = 2, want 0 to 0.998"},
		{"modes --spin nan", "spin = NaN"},
		{"modes --spin -0.1", "spin = -0.1"},
		{"modes --spin 0.5 --l 9", "l = 9"},
		{"modes --spin 0.5 --m 3", "m = 3"},
		{"modes --spin 0.5 --n -1", "n = -1"},
		{"modes --spin 0.5 --l two", `--l = "two", want a whole number`},
		{"modes --spin 0.5 --mass 0", "--mass"},
		{"modes --spin 0.5 --mass inf", "--mass"},
		{"modes --spin 0.5 0.6", "no argument, found 0.6"},
	} {
		t.Run(tc.args, func(t *testing.T) {
			status, stdout, stderr := knell(t, strings.Fields(tc.args)...)
			if status != statusUsage || stdout != "" {
				t.Errorf("status %d, standard output %q; want %d and nothing", status, stdout, statusUsage)
			}
			line, rest, _ := strings.Cut(stderr, "\n")
			if rest != "" || !strings.HasPrefix(line, "knell: ") || !strings.Contains(line, tc.want) || strings.Contains(line, "strconv") {
				t.Errorf("standard error %q, want one line with %q", stderr, tc.want)
			}
		})
	}
}

func TestHelp(t *testing.T) {
	for _, args := range [][]string{nil, {"--help"}, {"-h"}, {"weigh", "--help"}, {"check", "-h"}, {"modes", "--help"}, {"barrier", "--help"}, {"echo", "-h"}} {
		status, stdout, stderr := knell(t, args...)
		if status != statusDone || stderr != "" || !strings.Contains(stdout, "USAGE") {
			t.Errorf("knell %v: status %d, standard error %q, standard output\n%s", args, status, stderr, stdout)
		}
		if len(args) < 2 {
			for _, command := range []string{"weigh", "check", "modes", "barrier", "echo"} {
				if !strings.Contains(stdout, "   "+command+" ") {
					t.Errorf("knell %v does not list %s", args, command)
				}
			}
		}
	}
	if status, stdout, _ := knell(t, "--version"); status != statusDone || !strings.Contains(stdout, version) {
		t.Errorf("--version: status %d, %q", status, stdout)
	}
}

func TestModes(t *testing.T) {
	type document struct {
		Modes []struct {
			L, M, N       int
			Spin          float64
			Omega         [2]float64
			Separation    [2]float64
			FrequencyHz   *float64 `json:"frequency_hz"`
			DampingTimeS  *float64 `json:"damping_time_s"`
			UnknownFields any      `json:"-"`
		}
	}
	near := func(got, want, tolerance float64) bool { return math.Abs(got-want) <= tolerance }

	status, stdout, stderr := knell(t, "modes", "--spin", "0", "--json")
	if status != statusDone || stderr != "" {
		t.Fatalf("status %d, standard error %q", status, stderr)
	}
	var d document
	parse(t, stdout, &d)
	// Proc. R. Soc. A 402, 285 (1985); the digits are arXiv:1908.09389's. The
	// separation constant is l(l+1) - 2.
	if m := d.Modes[0]; len(d.Modes) != 1 || m.L != 2 || m.M != 2 || m.N != 0 || m.Spin != 0 || m.FrequencyHz != nil || m.DampingTimeS != nil ||
		!near(m.Omega[0], 0.37367168, 5e-9) || !near(m.Omega[1], -0.08896232, 5e-9) ||
		!near(m.Separation[0], 4, 1e-9) || !near(m.Separation[1], 0, 1e-9) {
		t.Errorf("got %+v", d)
	}
	if strings.Contains(stdout, "frequency_hz") {
		t.Errorf("frequency without a mass:\n%s", stdout)
	}

	// A remnant of 68 solar masses and spin 0.68: computed independently by
	// continued fractions with G Msun/c^3 = 4.925490947e-6 s, to the digits given.
	_, stdout, _ = knell(t, "modes", "--spin", "0.68", "--mass", "68", "--json")
	d = document{}
	parse(t, stdout, &d)
	if m := d.Modes[0]; m.FrequencyHz == nil || m.DampingTimeS == nil || !near(*m.FrequencyHz, 248.985, 5e-4) || !near(*m.DampingTimeS, 4.1090e-3, 5e-8) {
		t.Errorf("got\n%s\nwant 248.985 Hz and 4.1090 ms", stdout)
	}
	status, stdout, _ = knell(t, "modes", "--spin", "0.68", "--mass", "68")
	if lines := strings.Split(strings.TrimSpace(stdout), "\n"); status != statusDone || len(lines) != 3 ||
		!strings.Contains(lines[2], "248.98") || !strings.Contains(lines[2], "4.10") || !strings.Contains(lines[0], "frequency (Hz)") {
		t.Errorf("got table\n%s", stdout)
	}

	// Several spins and overtones, every one once.
	_, stdout, _ = knell(t, "modes", "--json", "--l", "3", "--m", "-2", "--n", "0", "--n", "1", "--spin", "0.1", "--spin=0.9")
	d = document{}
	parse(t, stdout, &d)
	if len(d.Modes) != 4 || d.Modes[1].N != 1 || d.Modes[2].Spin != 0.9 || d.Modes[3].L != 3 || d.Modes[3].M != -2 {
		t.Errorf("got %+v", d)
	}
}

func TestDemoList(t *testing.T) {
	for _, command := range []string{"weigh", "check"} {
		status, stdout, stderr := knell(t, command, "--demo", "list")
		if status != statusDone || stderr != "" || strings.Count(stdout, "\n") != len(configs.DemoNames()) {
			t.Errorf("%s: status %d, standard error %q, standard output\n%s", command, status, stderr, stdout)
		}
		_, list, _ := knell(t, command, "--demo", "list", "--json")
		var d struct {
			Demos []struct{ Name, Title string }
		}
		parse(t, list, &d)
		for i, name := range configs.DemoNames() {
			if !strings.Contains(stdout, name) || d.Demos[i].Name != name || d.Demos[i].Title == "" {
				t.Errorf("%s: %s is not listed", command, name)
			}
		}
	}
}

func TestCheck(t *testing.T) {
	for _, name := range configs.DemoNames() {
		status, stdout, stderr := knell(t, "check", "--demo", name)
		if status != statusDone || stderr != "" || !strings.Contains(stdout, "sound") || !strings.Contains(stdout, "mass") {
			t.Errorf("%s: status %d, standard error %q, standard output\n%s", name, status, stderr, stdout)
		}
		status, stdout, stderr = knell(t, "check", "--json", "--demo", name)
		var d struct {
			Event      string
			Sound      bool
			Sites      []struct{ Code string }
			Hypotheses []struct {
				Name, Model string
				Dimensions  int
				Priors      []struct{ Parameter, Prior string }
			}
			Notes []string
		}
		parse(t, stdout, &d)
		if status != statusDone || stderr != "" || !d.Sound || d.Event == "" || len(d.Sites) < 1 || len(d.Hypotheses) < 2 || d.Notes == nil {
			t.Errorf("%s: status %d, standard error %q, got %+v", name, status, stderr, d)
		}
		for _, h := range d.Hypotheses {
			if h.Name == "" || h.Dimensions < 1 || len(h.Priors) < h.Dimensions {
				t.Errorf("%s: got %+v", name, h)
			}
		}
	}
	t.Chdir(t.TempDir())
	writeEvent(t, "bad.toml", strings.Replace(tiny, "duration", "durration", 1))
	status, stdout, stderr := knell(t, "check", "bad.toml", "--json")
	if status != statusUsage || stdout != "" || !strings.Contains(stderr, "knell: bad.toml:") || !strings.Contains(stderr, "durration") {
		t.Errorf("status %d, standard output %q, standard error %q", status, stdout, stderr)
	}
}
