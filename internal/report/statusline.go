package report

import (
	"fmt"
	"io"
	"os"
	"strings"
	"time"
	"unicode/utf8"

	"golang.org/x/term"
)

const (
	// terminalEvery is how often a terminal's line is rewritten at most.
	terminalEvery = 100 * time.Millisecond
	// plainEvery is how often a line is added where lines stay.
	plainEvery = 10 * time.Second
	// plainWidth stands for the width of a terminal that does not tell it.
	plainWidth = 80
)

// StatusLine is one line of progress, rewritten in place on a terminal and added
// now and then elsewhere. It is not safe for concurrent use; errors of the output
// are dropped, because progress must not end a run.
type StatusLine struct {
	out      io.Writer
	terminal bool
	width    func() int
	last     time.Time // when the last line was shown
	shown    int       // characters standing on the terminal's line
}

// NewStatusLine returns a line on out, most often os.Stderr. It is rewritten when out
// is a terminal and TERM is not "dumb".
func NewStatusLine(out io.Writer) StatusLine {
	l := StatusLine{out: out, width: func() int { return plainWidth }}
	if f, ok := out.(*os.File); ok && term.IsTerminal(int(f.Fd())) && os.Getenv("TERM") != "dumb" {
		l.terminal = true
		l.width = func() int {
			if columns, _, err := term.GetSize(int(f.Fd())); err == nil && columns > 0 {
				return columns
			}
			return plainWidth
		}
	}
	return l
}

// Due says whether the last line is old enough for another.
func (l *StatusLine) Due(now time.Time) bool {
	every := plainEvery
	if l.terminal {
		every = terminalEvery
	}
	return l.last.IsZero() || now.Sub(l.last) >= every
}

// Show puts a line on the output, at the time now. On a terminal it is cut to the width, because a
// wrapped line cannot be rewritten.
func (l *StatusLine) Show(now time.Time, line string) {
	l.last = now
	if !l.terminal {
		fmt.Fprintln(l.out, line)
		return
	}
	if limit := l.width() - 1; utf8.RuneCountInString(line) > limit {
		line = string([]rune(line)[:max(limit, 0)])
	}
	length := utf8.RuneCountInString(line)
	// Spaces over the rest of a longer line before it, instead of a control code.
	fmt.Fprint(l.out, "\r"+line+strings.Repeat(" ", max(l.shown-length, 0)))
	l.shown = length
}

// Clear takes the line away from a terminal.
func (l *StatusLine) Clear() {
	if l.terminal && l.shown > 0 {
		fmt.Fprint(l.out, "\r"+strings.Repeat(" ", l.shown)+"\r")
		l.shown = 0
	}
}

// Clock shows a duration to the second as 9 s, 2:05 or 3:02:05.
func Clock(d time.Duration) string {
	s := int64(d.Round(time.Second) / time.Second)
	switch {
	case s < 60:
		return fmt.Sprintf("%d s", s)
	case s < 3600:
		return fmt.Sprintf("%d:%02d", s/60, s%60)
	}
	return fmt.Sprintf("%d:%02d:%02d", s/3600, s/60%60, s%60)
}
