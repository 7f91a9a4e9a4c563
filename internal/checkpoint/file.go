package checkpoint

import (
	"bytes"
	"crypto/sha256"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"

	"knell/sampler"
)

const (
	magic  = "knell kept state file\n"
	layout = 1 // of the file; a change of it is a new number

	lengthAt = len(magic) + 4
	sumAt    = lengthAt + 8
	headerAt = sumAt + sha256.Size // where the state begins
)

// PendingSuffix follows the name of a file whose state is being written. The name is
// always the same, so what a killed process left is overwritten by the next Save.
const PendingSuffix = ".new"

// FileError is a file that holds no whole state.
type FileError struct {
	File, Got, Want string
}

func (e *FileError) Error() string {
	return fmt.Sprintf("checkpoint: %s: %s, want %s", e.File, e.Got, e.Want)
}

// File keeps one state at a path. It is for one goroutine of one process at a time,
// see Lock.
type File struct {
	path string
}

var _ sampler.Keeper = (*File)(nil)

// New returns the file at path, whose directory must exist when Save is called.
func New(path string) *File { return &File{path} }

// Path is where the state is kept.
func (f *File) Path() string { return f.path }

// Load returns the state last saved, nil if there is none. A file that is not whole,
// or not one of ours, is a *FileError; one that cannot be read, an *fs.PathError.
func (f *File) Load() ([]byte, error) {
	opened, err := os.Open(f.path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, nil
	}
	if err != nil {
		return nil, err
	}
	defer opened.Close()
	info, err := opened.Stat()
	if err != nil {
		return nil, err
	}
	bad := func(got, want string) ([]byte, error) { return nil, &FileError{f.path, got, want} }
	header := make([]byte, headerAt)
	n, err := io.ReadFull(opened, header)
	if !bytes.HasPrefix([]byte(magic), header[:min(n, len(magic))]) {
		return bad(fmt.Sprintf("begins with %.*q", len(magic), header[:min(n, len(magic))]), fmt.Sprintf("a file that begins with %q", magic))
	}
	if err == io.EOF || err == io.ErrUnexpectedEOF {
		return bad(fmt.Sprintf("%d bytes", n), fmt.Sprintf("at least %d", headerAt))
	}
	if err != nil {
		return nil, err
	}
	if v := binary.BigEndian.Uint32(header[len(magic):]); v != layout {
		return bad(fmt.Sprintf("layout %d", v), fmt.Sprintf("layout %d, which this version of the program reads", layout))
	}
	// Held against the file's size before anything of that length is made.
	length := binary.BigEndian.Uint64(header[lengthAt:])
	if held := info.Size() - int64(headerAt); held < 0 || uint64(held) != length {
		return bad(fmt.Sprintf("%d bytes of state", max(held, 0)), fmt.Sprintf("the %d that its header tells", length))
	}
	state := make([]byte, length)
	if _, err := io.ReadFull(opened, state); err != nil {
		return nil, fmt.Errorf("checkpoint: %s: %w", f.path, err)
	}
	if sum := checksum(header, state); !bytes.Equal(sum[:], header[sumAt:]) {
		return bad(fmt.Sprintf("checksum %x", sum[:4]), fmt.Sprintf("%x, as its header tells", header[sumAt:sumAt+4]))
	}
	return state, nil
}

// checksum is that of a header up to its checksum, and of the state.
func checksum(header, state []byte) (sum [sha256.Size]byte) {
	h := sha256.New()
	h.Write(header[:sumAt])
	h.Write(state)
	h.Sum(sum[:0])
	return sum
}

// Save replaces the state. Whenever it ends, or is ended, the file holds a whole state,
// the earlier one after an error. It costs one write of the state's length and two
// flushes of the disk.
func (f *File) Save(state []byte) (err error) {
	header := make([]byte, 0, headerAt)
	header = append(header, magic...)
	header = binary.BigEndian.AppendUint32(header, layout)
	header = binary.BigEndian.AppendUint64(header, uint64(len(state)))
	sum := checksum(header, state)
	header = append(header, sum[:]...)

	pending := f.path + PendingSuffix
	opened, err := os.OpenFile(pending, os.O_CREATE|os.O_TRUNC|os.O_WRONLY, 0o666)
	if err != nil {
		return err
	}
	defer func() {
		if pending != "" {
			// A part of a state is of no use and may hold the disk's last room.
			err = errors.Join(err, os.Remove(pending))
		}
	}()
	_, err = opened.Write(header)
	if err == nil {
		_, err = opened.Write(state)
	}
	if err == nil {
		err = opened.Sync()
	}
	if err = errors.Join(err, opened.Close()); err != nil {
		return err
	}
	if err := os.Rename(pending, f.path); err != nil {
		return err
	}
	pending = ""
	if err := syncDirectory(filepath.Dir(f.path)); err != nil {
		// The new state has its name; only a loss of power could still bring back
		// the old one.
		return fmt.Errorf("checkpoint: %s is written but its name may not outlive a loss of power: %w", f.path, err)
	}
	return nil
}

// Remove takes away the state and what an interrupted Save left of one.
func (f *File) Remove() error {
	var list []error
	for _, path := range []string{f.path, f.path + PendingSuffix} {
		if err := os.Remove(path); err != nil && !errors.Is(err, fs.ErrNotExist) {
			list = append(list, err)
		}
	}
	return errors.Join(list...)
}

// syncDirectory flushes a directory, so that a new name in it outlives a loss of power.
func syncDirectory(name string) error {
	if runtime.GOOS == "windows" {
		return nil // Which flushes no directories.
	}
	d, err := os.Open(name)
	if err != nil {
		return err
	}
	return errors.Join(d.Sync(), d.Close())
}
