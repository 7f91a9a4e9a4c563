package report

import (
	"fmt"
	"io"
	"math"
	"os"
	"strings"
	"sync"
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

// Progress is how far one part of a command is.
type Progress struct {
	Label       string  // such as the hypothesis's name
	LogEvidence float64 // so far, over noise, in nats; NaN if there is none yet
	Error       float64 // its error; NaN if unknown
	Calls       int64   // likelihood calls so far
	// Fraction is the share done, 0 to 1, from which the time left is estimated;
	// NaN if unknown.
	Fraction float64
}

// Meter shows progress: on a terminal one line rewritten in place, elsewhere a plain
// line now and then. It uses no colours and no control codes but the carriage
// return, so NO_COLOR asks nothing of it. Safe for concurrent use.
type Meter struct {
	out      io.Writer
	now      func() time.Time
	terminal bool
	width    func() int

	mu    sync.Mutex
	label string
	began time.Time // when the label began
	last  time.Time // when the last line was shown
	shown int       // characters standing on the terminal's line
}

// NewMeter returns a meter on out, most often os.Stderr. It rewrites one line when out
// is a terminal and TERM is not "dumb".
func NewMeter(out io.Writer) *Meter {
	m := &Meter{out: out, now: time.Now, width: func() int { return plainWidth }}
	if f, ok := out.(*os.File); ok && term.IsTerminal(int(f.Fd())) && os.Getenv("TERM") != "dumb" {
		m.terminal = true
		m.width = func() int {
			if columns, _, err := term.GetSize(int(f.Fd())); err == nil && columns > 0 {
				return columns
			}
			return plainWidth
		}
	}
	return m
}

// Update shows progress, or does nothing if the last line is too fresh. Errors of the
// output are dropped: progress must not end a run.
func (m *Meter) Update(p Progress) {
	m.mu.Lock()
	defer m.mu.Unlock()
	now := m.now()
	if p.Label != m.label || m.began.IsZero() {
		m.label, m.began, m.last = p.Label, now, time.Time{}
	}
	every := plainEvery
	if m.terminal {
		every = terminalEvery
	}
	if !m.last.IsZero() && now.Sub(m.last) < every {
		return
	}
	m.last = now
	m.show(progressLine(p, now.Sub(m.began)))
}

// Note writes a line that stays, such as a warning, without tearing the progress.
func (m *Meter) Note(text string) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.clear()
	fmt.Fprintln(m.out, text)
	m.last = time.Time{}
}

// Done takes the progress away from a terminal. A later Update starts again.
func (m *Meter) Done() {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.clear()
	m.label, m.began, m.last = "", time.Time{}, time.Time{}
}

// show puts a line on the output. On a terminal it is cut to the width, because a
// wrapped line cannot be rewritten.
func (m *Meter) show(line string) {
	if !m.terminal {
		fmt.Fprintln(m.out, line)
		return
	}
	if limit := m.width() - 1; utf8.RuneCountInString(line) > limit {
		line = string([]rune(line)[:max(limit, 0)])
	}
	length := utf8.RuneCountInString(line)
	// Spaces over the rest of a longer line before it, instead of a control code.
	fmt.Fprint(m.out, "\r"+line+strings.Repeat(" ", max(m.shown-length, 0)))
	m.shown = length
}

func (m *Meter) clear() {
	if m.terminal && m.shown > 0 {
		fmt.Fprint(m.out, "\r"+strings.Repeat(" ", m.shown)+"\r")
		m.shown = 0
	}
}

// progressLine says a progress in one line.
func progressLine(p Progress, elapsed time.Duration) string {
	line := p.Label + ": "
	switch {
	case math.IsNaN(p.LogEvidence) || math.IsInf(p.LogEvidence, 0):
		line += "no evidence yet"
	case math.IsNaN(p.Error):
		line += fmt.Sprintf("ln evidence over noise %.2f so far", p.LogEvidence)
	default:
		line += fmt.Sprintf("ln evidence over noise %.2f ± %.2f so far", p.LogEvidence, p.Error)
	}
	line += ", " + thousands(float64(p.Calls)) + " calls, " + clock(elapsed) + " gone"
	if p.Fraction > 0 && p.Fraction <= 1 {
		left := time.Duration(float64(elapsed) * (1 - p.Fraction) / p.Fraction)
		line += ", about " + clock(left) + " left"
	}
	return line
}

// clock shows a duration to the second as 9 s, 2:05 or 3:02:05.
func clock(d time.Duration) string {
	s := int64(d.Round(time.Second) / time.Second)
	switch {
	case s < 60:
		return fmt.Sprintf("%d s", s)
	case s < 3600:
		return fmt.Sprintf("%d:%02d", s/60, s%60)
	}
	return fmt.Sprintf("%d:%02d:%02d", s/3600, s/60%60, s%60)
}
