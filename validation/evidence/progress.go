package main

import (
	"fmt"
	"io"
	"sync"
	"time"

	"knell/internal/report"
)

// meter tells how far the runs are. Safe for concurrent use.
type meter struct {
	now func() time.Time

	mu     sync.Mutex
	status report.StatusLine
	cases  []problemCase
	seeds  int
	ended  []int     // runs per case
	spent  []float64 // seconds of those
	active []activity
	began  time.Time
}

// activity is what a worker does.
type activity struct {
	running  bool
	of       int // case
	began    time.Time
	fraction float64
}

func newMeter(out io.Writer, cases []problemCase, o options) *meter {
	m := &meter{
		status: report.NewStatusLine(out), now: time.Now, cases: cases, seeds: o.seeds,
		ended: make([]int, len(cases)), spent: make([]float64, len(cases)), active: make([]activity, o.workers),
	}
	m.began = m.now()
	return m
}

// begin notes that a worker takes a run of a case.
func (m *meter) begin(worker, of int) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.active[worker] = activity{running: true, of: of, began: m.now()}
}

// update notes how far a worker's run is.
func (m *meter) update(worker int, fraction float64) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.active[worker].fraction = fraction
	m.show(m.active[worker].of, false)
}

// end notes that a worker's run is over.
func (m *meter) end(worker int, r oneRun) {
	m.mu.Lock()
	defer m.mu.Unlock()
	a := &m.active[worker]
	a.running = false
	if r.finished {
		m.ended[a.of]++
		m.spent[a.of] += r.seconds
		m.show(a.of, m.ended[a.of] == m.seeds)
	}
}

// done takes the line away from a terminal.
func (m *meter) done() {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.status.Clear()
}

// show prints the state of a case if the last line is old enough, or at once.
func (m *meter) show(of int, once bool) {
	now := m.now()
	if once || m.status.Due(now) {
		m.status.Show(now, m.line(of, now))
	}
}

// line says how far case number at is, and the whole.
func (m *meter) line(at int, now time.Time) string {
	total := 0
	for _, n := range m.ended {
		total += n
	}
	c := m.cases[at]
	text := fmt.Sprintf("%s/%d: %d of %d runs; in all %d of %d, %s gone", c.name, c.dim, m.ended[at], m.seeds,
		total, m.seeds*len(m.cases), report.Clock(now.Sub(m.began)))
	if left, ok := m.left(now); ok {
		text += ", about " + report.Clock(left) + " left"
	}
	return text
}

// left estimates the time left. A case that has finished runs needs their mean
// for each more, one that only has begun some what those seem to take; the others
// are guessed to need a time that grows as the square of the dimension, on
// the scale of those that are known.
func (m *meter) left(now time.Time) (time.Duration, bool) {
	each := make([]float64, len(m.cases)) // seconds per run
	gone := make([]float64, len(m.cases)) // runs' worth of work under way
	var seconds, squares float64
	for i, c := range m.cases {
		if m.ended[i] > 0 {
			each[i] = m.spent[i] / float64(m.ended[i])
		}
		for _, a := range m.active {
			if !a.running || a.of != i {
				continue
			}
			gone[i] += a.fraction
			if m.ended[i] == 0 && a.fraction > 0.02 {
				each[i] = max(each[i], now.Sub(a.began).Seconds()/a.fraction)
			}
		}
		if each[i] > 0 {
			seconds += each[i]
			squares += float64(c.dim * c.dim)
		}
	}
	if seconds == 0 {
		return 0, false
	}
	var left float64
	for i, c := range m.cases {
		if each[i] == 0 {
			each[i] = seconds / squares * float64(c.dim*c.dim)
		}
		left += each[i] * max(0, float64(m.seeds-m.ended[i])-gone[i])
	}
	return time.Duration(left / float64(len(m.active)) * float64(time.Second)), true
}
