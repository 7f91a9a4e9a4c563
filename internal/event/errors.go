package event

import (
	"fmt"
	"strings"
)

// InputError is anything wrong with what the user gave: the event file, or a
// file that it points to. Commands end with status 2 on it.
type InputError struct {
	File string // the event file; "" when the fault lies elsewhere
	Line int    // 0 when no single line is at fault
	Key  string // dotted, with the index of an array's entry: site[1].noise
	Got  string
	Want string
	Err  error // the cause, for a file that cannot be read
}

func (e *InputError) Error() string {
	var b strings.Builder
	if e.File != "" {
		b.WriteString(e.File)
		if e.Line > 0 {
			fmt.Fprintf(&b, ":%d", e.Line)
		}
		b.WriteString(": ")
	}
	switch {
	case e.Key != "" && e.Got != "":
		fmt.Fprintf(&b, "%s = %s", e.Key, e.Got)
	case e.Key != "":
		b.WriteString(e.Key)
	default:
		b.WriteString(e.Got)
	}
	if e.Err != nil {
		fmt.Fprintf(&b, ": %v", e.Err)
	}
	if e.Want != "" {
		fmt.Fprintf(&b, ", want %s", e.Want)
	}
	return b.String()
}

// Unwrap gives the cause.
func (e *InputError) Unwrap() error { return e.Err }
