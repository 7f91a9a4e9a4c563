package report

import (
	"errors"
	"os"
	"path/filepath"
)

// file is one file to write.
type file struct {
	name string
	data []byte
}

// writeStaged writes files into a directory in two steps: all under names of their
// own, flushed to the disk, then each renamed to its name in the order given. An
// error in the first step leaves the directory as it was; a crash in the second
// leaves each file either old or new, never part of one.
//
// os.Rename replaces a file on every system we build for, so this one road serves
// them all; renameio's pending files do not build on windows.
func writeStaged(dir string, files []file) (err error) {
	staged := make([]string, 0, len(files))
	defer func() {
		for _, path := range staged {
			err = errors.Join(err, os.Remove(path))
		}
	}()
	for _, f := range files {
		path, err := stage(dir, f)
		if path != "" {
			staged = append(staged, path)
		}
		if err != nil {
			return err
		}
	}
	for _, f := range files {
		if err := os.Rename(staged[0], filepath.Join(dir, f.name)); err != nil {
			return err
		}
		staged = staged[1:]
	}
	return nil
}

// stage writes one file under a name of its own and returns that name, also beside
// an error if the name exists by then.
func stage(dir string, f file) (path string, err error) {
	pending, err := os.CreateTemp(dir, "."+f.name+"-*")
	if err != nil {
		return "", err
	}
	defer func() { err = errors.Join(err, pending.Close()) }()
	path = pending.Name()
	if _, err := pending.Write(f.data); err != nil {
		return path, err
	}
	// CreateTemp makes files for the owner alone; a result is for anyone who may read
	// the directory.
	if err := pending.Chmod(0o644); err != nil {
		return path, err
	}
	return path, pending.Sync()
}
