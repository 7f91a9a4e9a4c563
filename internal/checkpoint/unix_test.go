//go:build unix

package checkpoint

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"os/exec"
	"os/signal"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
)

// The environment variables tell this test's own process, started anew, what to do.
const (
	childTask = "CHECKPOINT_TEST_TASK"
	childPath = "CHECKPOINT_TEST_PATH"
)

func TestMain(m *testing.M) {
	switch os.Getenv(childTask) {
	case "":
		os.Exit(m.Run())
	case "full":
		os.Exit(saveOnFullDisk(os.Getenv(childPath)))
	case "unwritable":
		os.Exit(saveUnwritable(os.Getenv(childPath)))
	case "save":
		saveForEver(os.Getenv(childPath))
	case "lock":
		_, err := Lock(os.Getenv(childPath))
		fmt.Println(err)
		os.Exit(0)
	}
	os.Exit(9)
}

func child(t *testing.T, task, path string) *exec.Cmd {
	t.Helper()
	c := exec.Command(os.Args[0])
	c.Env = append(os.Environ(), childTask+"="+task, childPath+"="+path)
	return c
}

// room is the size no file of the child may pass.
const room = 4096

// saveOnFullDisk saves more than there is room for.
func saveOnFullDisk(path string) int {
	signal.Ignore(syscall.SIGXFSZ)
	if err := syscall.Setrlimit(syscall.RLIMIT_FSIZE, &syscall.Rlimit{Cur: room, Max: room}); err != nil {
		fmt.Println(err)
		return 1
	}
	f := New(path)
	err := f.Save(bytes.Repeat([]byte("x"), 2*room))
	if !errors.Is(err, syscall.EFBIG) {
		fmt.Println("saved too much:", err)
		return 2
	}
	if err := f.Save([]byte("small")); err != nil {
		fmt.Println("saved a little:", err)
		return 3
	}
	err = f.Save(bytes.Repeat([]byte("y"), 2*room))
	if !errors.Is(err, syscall.EFBIG) || !strings.Contains(err.Error(), path) {
		fmt.Println("saved too much again:", err)
		return 4
	}
	return 0
}

// TestDiskFull: the state before stands, and no part of the new one.
func TestDiskFull(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	if err := f.Save([]byte("old")); err != nil {
		t.Fatal(err)
	}
	if out, err := child(t, "full", f.Path()).CombinedOutput(); err != nil {
		t.Fatalf("%v: %s", err, out)
	}
	if got, err := f.Load(); err != nil || string(got) != "small" {
		t.Errorf("got %q, %v, want what there was room for", got, err)
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a.state"}) {
		t.Errorf("the directory holds %q", got)
	}
}

// saveForEver saves states of one repeated byte, each its own.
func saveForEver(path string) {
	f := New(path)
	for i := 0; ; i++ {
		if err := f.Save(bytes.Repeat([]byte{byte(i)}, 1<<16)); err != nil {
			fmt.Println(err)
			os.Exit(1)
		}
		if i == 3 {
			fmt.Println("saved")
		}
	}
}

// TestKilled: whenever the process is killed, a whole state is there.
func TestKilled(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	for range 10 {
		c := child(t, "save", f.Path())
		out, err := c.StdoutPipe()
		if err != nil {
			t.Fatal(err)
		}
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		// Its first word comes after a few states; from there on every moment
		// lies in the middle of a Save.
		if _, err := out.Read(make([]byte, 6)); err != nil {
			t.Error(err)
		}
		if err := c.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		_ = c.Wait() // Killed, as it should be.
		state, err := f.Load()
		if err != nil || len(state) != 1<<16 || len(bytes.Trim(state, string(state[:1]))) != 0 {
			t.Fatalf("%d bytes of state, %v", len(state), err)
		}
	}
	if err := f.Save(nil); err != nil {
		t.Fatal(err)
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a.state"}) {
		t.Errorf("the directory holds %q", got)
	}
}

// saveUnwritable saves where it may not; root, who may write anywhere, becomes nobody.
func saveUnwritable(path string) int {
	if os.Geteuid() == 0 {
		if err := syscall.Setuid(65534); err != nil {
			fmt.Println(err)
			return 1
		}
	}
	f := New(path)
	if err := f.Save([]byte("new")); !errors.Is(err, os.ErrPermission) || !strings.Contains(err.Error(), path) {
		fmt.Println("saved where it must not:", err)
		return 2
	}
	return 0
}

func TestUnwritable(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	if err := f.Save([]byte("old")); err != nil {
		t.Fatal(err)
	}
	if err := os.Chmod(dir, 0o555); err != nil {
		t.Fatal(err)
	}
	defer os.Chmod(dir, 0o777)
	if out, err := child(t, "unwritable", f.Path()).CombinedOutput(); err != nil {
		t.Errorf("%v: %s", err, out)
	}
	if got, err := f.Load(); err != nil || string(got) != "old" {
		t.Errorf("got %q, %v", got, err)
	}
}

func TestLock(t *testing.T) {
	dir := t.TempDir()
	other := func() string {
		t.Helper()
		out, err := child(t, "lock", dir).CombinedOutput()
		if err != nil {
			t.Fatalf("%v: %s", err, out)
		}
		return strings.TrimSpace(string(out))
	}
	// Another process took the lock and ended without giving it back.
	if got := other(); got != "<nil>" {
		t.Fatalf("another process: %s", got)
	}
	unlock, err := Lock(dir)
	if err != nil {
		t.Fatal(err)
	}
	want := (&BusyError{dir}).Error()
	if got := other(); got != want {
		t.Errorf("another process while it is locked: %s, want %s", got, want)
	}
	if err := unlock(); err != nil {
		t.Error(err)
	}
	if got := names(t, dir); len(got) != 0 {
		t.Errorf("the lock leaves %q", got)
	}
	if got := other(); got != "<nil>" {
		t.Errorf("another process afterwards: %s", got)
	}
}
