package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"

	"knell/internal/report"
)

// resultsFolder holds the result directories that no --out names.
const resultsFolder = "weighed"

// claimDirectory makes the directory for a result. Without a name it is a new one
// called after the event; a named one must not hold a result unless replace is
// set, or unless states of an unfinished weighing lie beside it: that is then gone on
// with, and what it had reached is what stands there. Nothing already computed is
// overwritten unasked.
func claimDirectory(name, slug string, replace bool) (string, error) {
	if name != "" {
		if _, err := os.Stat(filepath.Join(name, report.EvidenceFile)); err == nil && !replace && !holdsStates(name) {
			return "", &usageError{fmt.Sprintf("--out %s holds a result, want an empty or new directory, or --replace", name)}
		}
		if err := os.MkdirAll(name, 0o777); err != nil {
			return "", &usageError{fmt.Sprintf("--out: %v, want a directory that can be written", err)}
		}
		return name, writable(name)
	}
	if err := os.MkdirAll(resultsFolder, 0o777); err != nil {
		return "", &usageError{fmt.Sprintf("%v, want --out DIRECTORY that can be written", err)}
	}
	for n := 1; ; n++ {
		directory := filepath.Join(resultsFolder, slug)
		if n > 1 {
			directory = fmt.Sprintf("%s-%d", directory, n)
		}
		err := os.Mkdir(directory, 0o777)
		if err == nil {
			return directory, nil
		}
		if !errors.Is(err, fs.ErrExist) {
			return "", &usageError{fmt.Sprintf("%v, want --out DIRECTORY that can be written", err)}
		}
	}
}

// writable tries the directory with a file.
func writable(directory string) error {
	f, err := os.CreateTemp(directory, ".claim-*")
	if err != nil {
		return &usageError{fmt.Sprintf("--out: %v, want a directory that can be written", err)}
	}
	f.Close()
	return os.Remove(f.Name())
}
