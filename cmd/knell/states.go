package main

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"knell/internal/checkpoint"
	"knell/internal/event"
	"knell/sampler"
)

const (
	// statesFolder lies in a result directory while the weighing is under way.
	statesFolder = "checkpoint"
	stateSuffix  = ".state"
)

// states are the kept states of one weighing, claimed for this process.
type states struct {
	folder string
	unlock func() error
}

// holdsStates reports whether a result directory holds states to go on from.
func holdsStates(directory string) bool {
	entries, err := os.ReadDir(filepath.Join(directory, statesFolder))
	return err == nil && slices.ContainsFunc(entries, func(e fs.DirEntry) bool { return strings.HasSuffix(e.Name(), stateSuffix) })
}

// claimStates makes the folder of states in a result directory; anew takes away what
// an earlier weighing left there.
func claimStates(directory string, anew bool) (*states, error) {
	s := &states{folder: filepath.Join(directory, statesFolder)}
	if err := os.MkdirAll(s.folder, 0o777); err != nil {
		return nil, &usageError{fmt.Sprintf("--out: %v, want a directory that can be written", err)}
	}
	var err error
	s.unlock, err = checkpoint.Lock(s.folder)
	if busy := new(checkpoint.BusyError); errors.As(err, &busy) {
		return nil, &usageError{fmt.Sprintf("another process weighs into %s at this moment, want another --out", directory)}
	}
	if err != nil {
		return nil, &usageError{fmt.Sprintf("--out: %v, want a directory that can be written", err)}
	}
	if anew {
		if err := s.discard(); err != nil {
			return nil, errors.Join(err, s.release())
		}
	}
	return s, nil
}

// keeper is the place of one hypothesis's state. Names of hypotheses are names of files.
func (s *states) keeper(hypothesis string) sampler.Keeper {
	return checkpoint.New(filepath.Join(s.folder, hypothesis+stateSuffix))
}

// discard takes all states away, those of hypotheses that the event no longer has as
// well.
func (s *states) discard() error {
	entries, err := os.ReadDir(s.folder)
	if errors.Is(err, fs.ErrNotExist) {
		return nil
	}
	for _, e := range entries {
		if name, ok := strings.CutSuffix(strings.TrimSuffix(e.Name(), checkpoint.PendingSuffix), stateSuffix); ok {
			err = errors.Join(err, checkpoint.New(filepath.Join(s.folder, name+stateSuffix)).Remove())
		}
	}
	return err
}

// release lets other processes in and takes the folder away if it is empty.
func (s *states) release() error {
	err := s.unlock()
	if errors.Is(err, fs.ErrNotExist) {
		err = nil
	}
	// What is not empty stays, and is meant to.
	_ = os.Remove(s.folder)
	return err
}

// refusal turns an error about a kept state into what is wrong with
// the command line and what to do; nil for other errors and none.
func refusal(err error) error {
	var state *event.StateError
	var resume *sampler.ResumeError
	if errors.As(err, &state) || errors.As(err, &resume) {
		return &usageError{fmt.Sprintf("%v; want the weighing that it is of, another --out, or --replace to begin anew", err)}
	}
	return nil
}
