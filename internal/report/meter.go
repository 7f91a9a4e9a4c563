package report

import (
	"fmt"
	"io"
	"math"
	"sync"
	"time"
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
	now func() time.Time

	mu     sync.Mutex
	label  string
	began  time.Time // when the label began
	status StatusLine
}

// NewMeter returns a meter on out, most often os.Stderr. It rewrites one line when out
// is a terminal and TERM is not "dumb".
func NewMeter(out io.Writer) *Meter {
	return &Meter{now: time.Now, status: NewStatusLine(out)}
}

// Update shows progress, or does nothing if the last line is too fresh. Errors of the
// output are dropped: progress must not end a run.
func (m *Meter) Update(p Progress) {
	m.mu.Lock()
	defer m.mu.Unlock()
	now := m.now()
	if p.Label != m.label || m.began.IsZero() {
		m.label, m.began, m.status.last = p.Label, now, time.Time{}
	}
	if !m.status.Due(now) {
		return
	}
	m.status.Show(now, progressLine(p, now.Sub(m.began)))
}

// Note writes a line that stays, such as a warning, without tearing the progress.
func (m *Meter) Note(text string) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.status.Clear()
	fmt.Fprintln(m.status.out, text)
	m.status.last = time.Time{}
}

// Done takes the progress away from a terminal. A later Update starts again.
func (m *Meter) Done() {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.status.Clear()
	m.label, m.began, m.status.last = "", time.Time{}, time.Time{}
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
	line += ", " + thousands(float64(p.Calls)) + " calls, " + Clock(elapsed) + " gone"
	if p.Fraction > 0 && p.Fraction <= 1 {
		left := time.Duration(float64(elapsed) * (1 - p.Fraction) / p.Fraction)
		line += ", about " + Clock(left) + " left"
	}
	return line
}
