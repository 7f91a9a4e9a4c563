package hdf5

import (
	"errors"
	"fmt"
)

// ErrNotFound is wrapped by the error for a group, dataset or attribute that
// the file does not have.
var ErrNotFound = errors.New("not in the file")

// Error says what is wrong with a file and where.
type Error struct {
	File   string // name as given to Open or New
	Offset int64  // byte offset of the structure or value at fault
	What   string // the structure or value
	Got    string // what was found
	Want   string // what would be accepted
	Err    error  // cause, or nil
}

func (e *Error) Error() string {
	return fmt.Sprintf("%s: offset %d: %s: got %s, want %s", e.File, e.Offset, e.What, e.Got, e.Want)
}

func (e *Error) Unwrap() error { return e.Err }

// fail makes an error about the bytes at offset.
func (f *File) fail(offset int64, what, got, want string) *Error {
	return &Error{File: f.name, Offset: offset, What: what, Got: got, Want: want}
}
