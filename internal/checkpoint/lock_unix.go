//go:build unix && !solaris && !aix

package checkpoint

import (
	"errors"
	"os"
	"syscall"
)

// lock claims an open file, or returns errBusy.
func lock(f *os.File) error {
	err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
	switch {
	case errors.Is(err, syscall.EWOULDBLOCK):
		return errBusy
	case errors.Is(err, syscall.ENOTSUP), errors.Is(err, syscall.ENOSYS), errors.Is(err, syscall.ENOLCK):
		// A file system that knows no locks: two processes are then the user's care.
		return nil
	}
	return err
}

// unlinkAndClose removes the file while it is still claimed: later it might be another's.
func unlinkAndClose(f *os.File, path string) error {
	return errors.Join(os.Remove(path), f.Close())
}
