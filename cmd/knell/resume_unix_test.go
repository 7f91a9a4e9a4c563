//go:build unix

package main

import (
	"os"
	"os/signal"
	"path/filepath"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"
)

func init() {
	limitFiles = func(bytes string) error {
		n, err := strconv.ParseUint(bytes, 10, 63)
		if err != nil {
			return err
		}
		signal.Ignore(syscall.SIGXFSZ)
		return syscall.Setrlimit(syscall.RLIMIT_FSIZE, &syscall.Rlimit{Cur: n, Max: n})
	}
}

// TestDiskFullAndSignalled: a run whose disk is full goes on, fails only in writing its
// result, and is gone on with from the last state that there was room for; so is one
// that a signal ends.
func TestDiskFullAndSignalled(t *testing.T) {
	t.Chdir(t.TempDir())
	writeEvent(t, "event.toml", lasting)
	whole, stderr := program("weigh", "event.toml", "--out", "whole")
	if err := whole.Run(); err != nil {
		t.Fatalf("%v: %s", err, stderr)
	}

	// The states grow beyond the limit amid the first hypothesis; the files of the
	// result do as well.
	full, stderr := program("weigh", "event.toml", "--out", "out")
	full.Env = append(full.Env, fileLimit+"=40000")
	err := full.Run()
	if full.ProcessState.ExitCode() != statusFailed {
		t.Fatalf("%v: %s", err, stderr)
	}
	if n := strings.Count(stderr.String(), "warning: the state of"); n != 1 {
		t.Errorf("%d warnings of states that cannot be kept: %s", n, stderr)
	}
	state := filepath.Join("out", "checkpoint", "horizon.state")
	if info, err := os.Stat(state); err != nil || info.Size() > 40000 {
		t.Fatalf("the state that there was room for: %v, %v", info, err)
	}
	files, err := filepath.Glob(filepath.Join("out", "*"))
	if err != nil || len(files) != 1 {
		t.Errorf("beside the states stand %q, %v", files, err)
	}

	for _, name := range []os.Signal{syscall.SIGINT, syscall.SIGTERM} {
		c, stderr := program("weigh", "event.toml", "--out", "out")
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		// Once it has kept a state of its own.
		before, _ := os.Stat(state)
		for deadline := time.Now().Add(time.Minute); time.Now().Before(deadline); time.Sleep(time.Millisecond) {
			if now, err := os.Stat(state); err == nil && now.ModTime() != before.ModTime() {
				break
			}
		}
		if err := c.Process.Signal(name); err != nil {
			t.Fatal(err)
		}
		err := c.Wait()
		text := stderr.String()
		if c.ProcessState.ExitCode() != statusInterrupted || !strings.Contains(text, "goes on from") || !strings.Contains(text, "go on with: knell weigh --out out event.toml\n") {
			t.Errorf("%v: %v: %s", name, err, text)
		}
	}
	status, _, text := knell(t, "weigh", "event.toml", "--out", "out")
	if status != statusDone || !strings.Contains(text, "goes on from") {
		t.Fatalf("status %d, standard error %q", status, text)
	}
	sameFiles(t, "out", "whole")
}
