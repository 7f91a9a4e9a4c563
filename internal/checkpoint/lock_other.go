//go:build !unix || solaris || aix

package checkpoint

import (
	"errors"
	"os"
)

func lock(*os.File) error { return nil }

// unlinkAndClose closes first: an open file cannot be removed here.
func unlinkAndClose(f *os.File, path string) error {
	return errors.Join(f.Close(), os.Remove(path))
}
