package checkpoint

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// whole is a file as the package comment lays it out, put together here without the
// package's code.
func whole(state string) []byte {
	text := []byte("knell kept state file\n\x00\x00\x00\x01")
	text = binary.BigEndian.AppendUint64(text, uint64(len(state)))
	h := sha256.New()
	h.Write(text)
	h.Write([]byte(state))
	return append(h.Sum(text), state...)
}

func write(t *testing.T, path string, text []byte) {
	t.Helper()
	if err := os.WriteFile(path, text, 0o666); err != nil {
		t.Fatal(err)
	}
}

// names lists a directory.
func names(t *testing.T, dir string) (list []string) {
	t.Helper()
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		list = append(list, e.Name())
	}
	return list
}

func TestSaveAndLoad(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	if state, err := f.Load(); state != nil || err != nil {
		t.Errorf("without a file: got %q, %v, want nil and no error", state, err)
	}
	for _, state := range []string{"first", "", "a longer state\x00 with a zero", "short"} {
		if err := f.Save([]byte(state)); err != nil {
			t.Fatal(err)
		}
		got, err := f.Load()
		if err != nil || got == nil || string(got) != state {
			t.Errorf("got %q, %v, want %q", got, err, state)
		}
		if text, _ := os.ReadFile(f.Path()); !bytes.Equal(text, whole(state)) {
			t.Errorf("the file holds %q, want %q", text, whole(state))
		}
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a.state"}) {
		t.Errorf("the directory holds %q", got)
	}
	if err := f.Remove(); err != nil {
		t.Error(err)
	}
	if err := f.Remove(); err != nil {
		t.Errorf("removing nothing: %v", err)
	}
	if got := names(t, dir); len(got) != 0 {
		t.Errorf("after Remove the directory holds %q", got)
	}
}

func TestLoadReadsWhatTheLayoutSays(t *testing.T) {
	f := New(filepath.Join(t.TempDir(), "a.state"))
	write(t, f.Path(), whole("seven"))
	if got, err := f.Load(); err != nil || string(got) != "seven" {
		t.Errorf("got %q, %v", got, err)
	}
}

// refused says that a file is refused with an error that names it, what was found and
// what is wanted.
func refused(t *testing.T, why string, text []byte, want ...string) {
	t.Helper()
	f := New(filepath.Join(t.TempDir(), "a.state"))
	write(t, f.Path(), text)
	state, err := f.Load()
	var e *FileError
	if state != nil || !errors.As(err, &e) {
		t.Errorf("%s: got %q, %v, want a *FileError", why, state, err)
		return
	}
	if e.File != f.Path() || e.Got == "" || e.Want == "" || !strings.Contains(err.Error(), f.Path()) {
		t.Errorf("%s: %v does not name the file, what was found or what is wanted", why, err)
	}
	for _, w := range want {
		if !strings.Contains(err.Error(), w) {
			t.Errorf("%s: %v does not contain %q", why, err, w)
		}
	}
}

func TestTruncated(t *testing.T) {
	text := whole("a state of some bytes")
	for n := range text {
		want := "at least 66"
		if n >= 66 {
			want = "the 21 that its header tells"
		}
		refused(t, "cut", text[:n], want)
	}
	refused(t, "longer", append(text[:len(text):len(text)], 0), "22 bytes of state", "the 21")
}

func TestEveryBitFlipped(t *testing.T) {
	text := whole("state")
	for i := range text {
		for bit := range 8 {
			flipped := slices.Clone(text)
			flipped[i] ^= 1 << bit
			want := "checksum"
			switch {
			case i < 22:
				want = "begins with"
			case i < 26:
				want = "layout"
			case i < 34:
				want = "bytes of state"
			}
			refused(t, "flipped", flipped, want)
		}
	}
}

func TestForeign(t *testing.T) {
	refused(t, "text", []byte("title = \"an event file\"\n"), `"title = `, `"knell kept state file\n"`)
	refused(t, "short text", []byte("hello"), `"hello"`)
	refused(t, "other layout", bytes.Replace(whole("x"), []byte("\n\x00\x00\x00\x01"), []byte("\n\x00\x00\x00\x02"), 1), "layout 2", "layout 1")
	// A length that no memory holds is told from the file's size, not tried.
	huge := whole("x")
	binary.BigEndian.PutUint64(huge[26:], 1<<62)
	refused(t, "huge", huge, "1 bytes of state", "4611686018427387904")
}

func TestUnreadable(t *testing.T) {
	f := New(t.TempDir())
	if state, err := f.Load(); state != nil || err == nil || !strings.Contains(err.Error(), f.Path()) {
		t.Errorf("a directory: got %q, %v", state, err)
	}
}

// TestSaveOverLitter: what an interrupted Save left does not stay.
func TestSaveOverLitter(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	if err := f.Save([]byte("old")); err != nil {
		t.Fatal(err)
	}
	write(t, f.Path()+".new", bytes.Repeat([]byte("half a state "), 100))
	if got, err := f.Load(); err != nil || string(got) != "old" {
		t.Errorf("beside litter: got %q, %v", got, err)
	}
	if err := f.Save([]byte("new")); err != nil {
		t.Fatal(err)
	}
	if got, err := f.Load(); err != nil || string(got) != "new" {
		t.Errorf("got %q, %v", got, err)
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a.state"}) {
		t.Errorf("the directory holds %q", got)
	}
	write(t, f.Path()+".new", nil)
	if err := f.Remove(); err != nil || len(names(t, dir)) != 0 {
		t.Errorf("Remove leaves %q, %v", names(t, dir), err)
	}
}

func TestDirectoryGone(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "gone")
	f := New(filepath.Join(dir, "a.state"))
	err := f.Save([]byte("x"))
	if !errors.Is(err, fs.ErrNotExist) || !strings.Contains(err.Error(), f.Path()) {
		t.Errorf("got %v", err)
	}
	if _, err := os.Stat(dir); err == nil {
		t.Error("Save made the directory")
	}
}

// TestRenameFails: a directory that stands where the file must go.
func TestRenameFails(t *testing.T) {
	dir := t.TempDir()
	f := New(filepath.Join(dir, "a.state"))
	if err := os.MkdirAll(filepath.Join(f.Path(), "kept"), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := f.Save([]byte("x")); err == nil {
		t.Error("no error")
	}
	if got := names(t, dir); !slices.Equal(got, []string{"a.state"}) {
		t.Errorf("the directory holds %q", got)
	}
}

func FuzzLoad(f *testing.F) {
	f.Add(whole("a state"))
	f.Add(whole(""))
	f.Add(bytes.Replace(whole("a state"), []byte("a s"), []byte("a t"), 1))
	f.Add([]byte{})
	f.Add([]byte("knell kept state file\n\x00\x00\x00\x01\xff\xff\xff\xff\xff\xff\xff\xff"))
	f.Fuzz(func(t *testing.T, text []byte) {
		kept := New(filepath.Join(t.TempDir(), "a.state"))
		write(t, kept.Path(), text)
		state, err := kept.Load()
		if err != nil {
			if state != nil {
				t.Errorf("a state beside the error %v", err)
			}
			return
		}
		// Only one file holds a given state.
		if !bytes.Equal(text, whole(string(state))) {
			t.Errorf("%q was taken for the state %q", text, state)
		}
	})
}
