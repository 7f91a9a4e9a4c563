package checkpoint

import (
	"errors"
	"fmt"
	"os"
	"path/filepath"
)

// LockFile is the name of the file that Lock makes in a directory.
const LockFile = "lock"

// BusyError is a directory in which another process works.
type BusyError struct {
	Directory string
}

func (e *BusyError) Error() string {
	return fmt.Sprintf("checkpoint: another process works in %s", e.Directory)
}

// Lock claims a directory for this process; another one that does so gets a *BusyError
// until unlock is called or the process ends, in whatever way. unlock takes the lock's
// file away.
//
// It is advice among processes that call Lock, on one machine, and on windows it
// claims nothing.
func Lock(directory string) (unlock func() error, err error) {
	path := filepath.Join(directory, LockFile)
	for {
		f, err := os.OpenFile(path, os.O_CREATE|os.O_RDWR, 0o666)
		if err != nil {
			return nil, err
		}
		if err := lock(f); err != nil {
			err = errors.Join(err, f.Close())
			if errors.Is(err, errBusy) {
				return nil, &BusyError{directory}
			}
			return nil, err
		}
		if stands(f, path) {
			return func() error { return unlinkAndClose(f, path) }, nil
		}
		// Its holder took it away between our opening and our claim.
		if err := f.Close(); err != nil {
			return nil, err
		}
	}
}

// stands reports whether an open file is the one at a path.
func stands(f *os.File, path string) bool {
	a, err := f.Stat()
	if err != nil {
		return false
	}
	b, err := os.Stat(path)
	return err == nil && os.SameFile(a, b)
}

var errBusy = errors.New("locked by another process")
