package main

import (
	"bytes"
	"context"
	"encoding/json"
	"flag"
	"fmt"
	"maps"
	"os"
	"os/exec"
	"os/signal"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"

	"knell/internal/checkpoint"
	"knell/internal/random"
)

// The environment variables have this test's own process, started anew, be the program,
// and let no file of its grow beyond so many bytes.
const (
	asProgram = "KNELL_TEST_AS_PROGRAM"
	fileLimit = "KNELL_TEST_FILE_LIMIT"
)

// limitFiles applies fileLimit, where the system can.
var limitFiles func(bytes string) error

func TestMain(m *testing.M) {
	if os.Getenv(asProgram) == "" {
		os.Exit(m.Run())
	}
	if limit := os.Getenv(fileLimit); limit != "" {
		if err := limitFiles(limit); err != nil {
			panic(err)
		}
	}
	ctx, stop := signal.NotifyContext(often(context.Background()), os.Interrupt, syscall.SIGTERM)
	defer stop()
	os.Exit(run(ctx, append([]string{"knell"}, os.Args[1:]...), os.Stdout, os.Stderr))
}

// often lets a run keep its state as often as its share of the time allows.
func often(ctx context.Context) context.Context {
	return context.WithValue(ctx, keepEvery{}, time.Millisecond)
}

// program is the program as a process of its own, in the working folder.
func program(args ...string) (c *exec.Cmd, stderr *bytes.Buffer) {
	c = exec.Command(os.Args[0], args...)
	c.Env = append(os.Environ(), asProgram+"=yes")
	stderr = new(bytes.Buffer)
	c.Stderr = stderr
	return c, stderr
}

// lasting is an event that takes a second or two, in which the runs of both hypotheses
// are long enough to be broken off. The first ends by itself and is then weighed by
// further routes, the second at the limit of calls.
var lasting = strings.Replace(tiny, "max_calls      = 1500", "max_calls = 16000", 1)

// written is the content of a result directory, with evidence.json's clocks taken out.
func written(t *testing.T, directory string) map[string]string {
	t.Helper()
	entries, err := os.ReadDir(directory)
	if err != nil {
		t.Fatal(err)
	}
	files := map[string]string{}
	for _, e := range entries {
		if e.IsDir() {
			files[e.Name()] = "a folder"
			continue
		}
		files[e.Name()] = readFile(t, directory, e.Name())
	}
	var document map[string]any
	d := json.NewDecoder(strings.NewReader(files["evidence.json"]))
	d.UseNumber()
	if err := d.Decode(&document); err != nil {
		t.Fatalf("%s: %v", directory, err)
	}
	for _, h := range document["hypotheses"].([]any) {
		h := h.(map[string]any)
		if _, ok := h["seconds"]; !ok {
			t.Errorf("%s: no seconds", directory)
		}
		delete(h, "seconds")
	}
	text, err := json.MarshalIndent(document, "", " ")
	if err != nil {
		t.Fatal(err)
	}
	files["evidence.json"] = string(text)
	return files
}

// sameFiles says where two result directories differ.
func sameFiles(t *testing.T, got, want string) {
	t.Helper()
	a, b := written(t, got), written(t, want)
	if !slices.Equal(slices.Sorted(maps.Keys(a)), slices.Sorted(maps.Keys(b))) {
		t.Errorf("%s holds %v, %s %v", got, slices.Sorted(maps.Keys(a)), want, slices.Sorted(maps.Keys(b)))
	}
	for name := range b {
		if a[name] != b[name] {
			text := "binary"
			if name == "evidence.json" {
				text = a[name] + "\nwant\n" + b[name]
			}
			t.Errorf("%s of %s is not that of a run without a break: %s", name, got, text)
		}
	}
}

// killings is how often the program is killed; more with -args -killings 30.
var killings = flag.Int("killings", 6, "how often TestKilledAndGoneOn kills")

// TestKilledAndGoneOn kills the program at random moments and goes on with it, until
// it ends by itself.
func TestKilledAndGoneOn(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "event.toml", lasting)
	began := time.Now()
	whole, stderr := program("weigh", "event.toml", "--out", "whole")
	if err := whole.Run(); err != nil {
		t.Fatalf("%v: %s", err, stderr)
	}
	took := time.Since(began)
	if !strings.Contains(readFile(t, "whole", "evidence.json"), `"bridge"`) {
		t.Error("the first hypothesis did not end by itself: lasting wants a higher limit of calls")
	}

	rng := random.New(20, "moments to kill at")
	kills, resumed := 0, 0
	for round := 0; kills < *killings; round++ {
		out := fmt.Sprintf("broken-%d", round)
		// After so many, a round is left to end.
		for most := kills + 6; ; {
			c, stderr := program("weigh", "event.toml", "--out", out)
			if err := c.Start(); err != nil {
				t.Fatal(err)
			}
			if kills < min(most, *killings) {
				time.AfterFunc(time.Duration((0.1+0.3*rng.Float64())*float64(took)), func() { _ = c.Process.Kill() })
			}
			err := c.Wait()
			if strings.Contains(stderr.String(), "goes on from") {
				resumed++
			}
			if err == nil {
				break
			}
			kills++
			if c.ProcessState.Exited() {
				t.Fatalf("%v: %s", err, stderr)
			}
			if _, err := os.Stat(filepath.Join(out, "evidence.json")); err == nil {
				t.Error("a killed run left a result")
			}
		}
		sameFiles(t, out, "whole")
		if t.Failed() {
			break
		}
	}
	if kills == 0 || resumed == 0 {
		t.Fatalf("killed %d times, gone on with %d times: nothing was tested", kills, resumed)
	}
	t.Logf("killed %d times, gone on with %d times", kills, resumed)
}

// interrupt runs a command line in this process and interrupts it once it has kept a
// state of a hypothesis.
func interrupt(t *testing.T, out, hypothesis string, args ...string) (stderr string) {
	t.Helper()
	ctx, cancel := context.WithCancel(often(context.Background()))
	defer cancel()
	go func() {
		for ctx.Err() == nil {
			if _, err := os.Stat(filepath.Join(out, "checkpoint", hypothesis+".state")); err == nil {
				cancel()
			}
			time.Sleep(time.Millisecond)
		}
	}()
	var stdout, errs bytes.Buffer
	status := run(ctx, append([]string{"knell", "weigh"}, args...), &stdout, &errs)
	if status != statusInterrupted {
		t.Fatalf("status %d, standard error %q", status, errs.String())
	}
	return errs.String()
}

// TestInterruptedAndGoneOn goes on with an interrupted run, by the line that it prints.
func TestInterruptedAndGoneOn(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "event.toml", lasting)
	if status, _, stderr := knell(t, "weigh", "event.toml", "--quiet", "--out", "whole"); status != statusDone {
		t.Fatalf("status %d, standard error %q", status, stderr)
	}
	stderr := interrupt(t, "broken", "horizon", "event.toml", "--out", "broken", "--workers", "2")
	const mark = "go on with: knell "
	_, line, found := strings.Cut(stderr, mark)
	line, _, _ = strings.Cut(line, "\n")
	if !found || line != "weigh --workers 2 --out broken event.toml" {
		t.Fatalf("does not say how to go on: %q", stderr)
	}
	var e evidence
	parse(t, readFile(t, "broken", "evidence.json"), &e)
	if !e.Partial || len(e.Hypotheses) < 1 {
		t.Errorf("the partial result: %+v", e)
	}
	// Amid the second; the first is kept whole.
	if stderr := interrupt(t, "broken", "surface", "event.toml", "--out", "broken"); !strings.Contains(stderr, " likelihood calls of horizon\n") {
		t.Errorf("does not say from where it goes on: %q", stderr)
	}
	parse(t, readFile(t, "broken", "evidence.json"), &e)
	if !e.Partial || len(e.Hypotheses) != 2 {
		t.Errorf("the second partial result: %+v", e)
	}
	status, _, stderr := knell(t, strings.Fields(line)...)
	if status != statusDone || !strings.Contains(stderr, "calls of horizon\n") || !strings.Contains(stderr, "calls of surface\n") {
		t.Errorf("status %d, standard error %q", status, stderr)
	}
	sameFiles(t, "broken", "whole")
	// Now it is whole, and needs --replace.
	if status, _, stderr := knell(t, "weigh", "event.toml", "--out", "broken"); status != statusUsage || !strings.Contains(stderr, "--replace") {
		t.Errorf("status %d, standard error %q", status, stderr)
	}
}

// TestForeignStates: what does not belong to the weighing is refused and stays, until
// --replace takes it away.
func TestForeignStates(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "event.toml", lasting)
	interrupt(t, "out", "horizon", "event.toml", "--out", "out")
	state := filepath.Join("out", "checkpoint", "horizon.state")
	kept, result := readFile(t, state), readFile(t, "out", "evidence.json")
	refused := func(why string, want []string, args ...string) {
		t.Helper()
		before := readFile(t, state)
		status, stdout, stderr := knell(t, append([]string{"weigh", "--quiet", "--out", "out"}, args...)...)
		if status != statusUsage || stdout != "" || strings.Count(stderr, "\n") != 1 {
			t.Errorf("%s: status %d, standard output %q, standard error %q", why, status, stdout, stderr)
		}
		for _, w := range append(want, "horizon", "another --out", "--replace") {
			if !strings.Contains(stderr, w) {
				t.Errorf("%s: %q lacks %q", why, stderr, w)
			}
		}
		if readFile(t, state) != before || readFile(t, "out", "evidence.json") != result {
			t.Errorf("%s: a refused run changed what it found", why)
		}
	}
	refused("another seed", []string{"another event file or other options"}, "event.toml", "--seed", "8")
	writeEvent(t, "other.toml", strings.Replace(lasting, "low = 40.0", "low = 41.0", 1))
	refused("another prior", []string{"another event file or other options"}, "other.toml")

	damaged := []byte(kept)
	damaged[len(damaged)/2] ^= 1
	writeEvent(t, state, string(damaged))
	refused("one bit flipped", []string{state, "checksum"}, "event.toml")
	writeEvent(t, state, kept[:len(kept)/2])
	refused("cut off", []string{state, "bytes"}, "event.toml")
	writeEvent(t, state, "title = \"something else\"\n")
	refused("another file", []string{state, "begins with"}, "event.toml")

	writeEvent(t, filepath.Join("out", "checkpoint", "formerly.state.new"), "litter")
	status, _, stderr := knell(t, "weigh", "event.toml", "--out", "out", "--replace")
	if status != statusDone || strings.Contains(stderr, "goes on from") {
		t.Errorf("--replace: status %d, standard error %q", status, stderr)
	}
	if _, err := os.Stat(filepath.Join("out", "checkpoint")); err == nil {
		t.Error("a complete result still has its checkpoints")
	}
}

// TestBusyDirectory: two processes do not weigh into one directory.
func TestBusyDirectory(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "tiny.toml", tiny)
	folder := filepath.Join("out", "checkpoint")
	if err := os.MkdirAll(folder, 0o777); err != nil {
		t.Fatal(err)
	}
	unlock, err := checkpoint.Lock(folder)
	if err != nil {
		t.Fatal(err)
	}
	if second, err := checkpoint.Lock(folder); err == nil {
		if err := second(); err != nil {
			t.Error(err)
		}
		t.Skip("no locks here")
	}
	status, stdout, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", "out")
	if status != statusUsage || stdout != "" || !strings.Contains(stderr, "another process weighs into out") {
		t.Errorf("status %d, standard output %q, standard error %q", status, stdout, stderr)
	}
	if err := unlock(); err != nil {
		t.Error(err)
	}
	if status, _, stderr := knell(t, "weigh", "tiny.toml", "--quiet", "--out", "out"); status != statusDone {
		t.Errorf("status %d, standard error %q", status, stderr)
	}
	if _, err := os.Stat(folder); err == nil {
		t.Error("a complete result still has its folder of checkpoints")
	}
}

// TestStatesCannotBeKept: a run whose states cannot be written says so once and goes on.
func TestStatesCannotBeKept(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "event.toml", lasting)
	errs := &cancelling{mark: "horizon (1 of 2)", cancel: func() {
		if err := os.RemoveAll(filepath.Join("out", "checkpoint")); err != nil {
			t.Error(err)
		}
	}}
	var out bytes.Buffer
	if status := run(often(context.Background()), []string{"knell", "weigh", "event.toml", "--out", "out"}, &out, errs); status != statusDone {
		t.Fatalf("status %d, standard error %q", status, errs.text.String())
	}
	if n := strings.Count(errs.text.String(), "horizon.state"); n != 1 {
		t.Errorf("%d warnings on standard error: %q", n, errs.text.String())
	}
	if !strings.Contains(readFile(t, "out", "evidence.json"), "horizon.state") {
		t.Error("no warning in the result")
	}
}
