package trials

import (
	"fmt"
	"io"
	"sync"
	"time"

	"knell/internal/report"
)

// Meter tells how far the runs are, as a line of progress. Safe for concurrent use.
type Meter struct {
	now func() time.Time

	mu     sync.Mutex
	status report.StatusLine
	cases  []Case
	runs   int       // per case
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

// NewMeter returns a meter for so many runs of each case on so many workers. Its line
// goes to out.
func NewMeter(out io.Writer, cases []Case, runs, workers int) *Meter {
	m := &Meter{
		status: report.NewStatusLine(out), now: time.Now, cases: cases, runs: runs,
		ended: make([]int, len(cases)), spent: make([]float64, len(cases)), active: make([]activity, workers),
	}
	m.began = m.now()
	return m
}

func (m *Meter) workers() int { return len(m.active) }

// begin notes that a worker takes a run of a case.
func (m *Meter) begin(worker, of int) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.active[worker] = activity{running: true, of: of, began: m.now()}
}

// update notes how far a worker's run is.
func (m *Meter) update(worker int, fraction float64) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.active[worker].fraction = fraction
	m.show(m.active[worker].of, false)
}

// end notes that a worker's run is over.
func (m *Meter) end(worker int, finished bool) {
	m.mu.Lock()
	defer m.mu.Unlock()
	a := &m.active[worker]
	a.running = false
	if finished {
		m.ended[a.of]++
		m.spent[a.of] += m.now().Sub(a.began).Seconds()
		m.show(a.of, m.ended[a.of] == m.runs)
	}
}

// Above prints something else on the terminal: the line is taken away first.
func (m *Meter) Above(print func()) {
	m.mu.Lock()
	defer m.mu.Unlock()
	m.status.Clear()
	print()
}

// Done takes the line away from a terminal.
func (m *Meter) Done() { m.Above(func() {}) }

// show prints the state of a case if the last line is old enough, or at once.
func (m *Meter) show(of int, once bool) {
	now := m.now()
	if once || m.status.Due(now) {
		m.status.Show(now, m.line(of, now))
	}
}

// line says how far case number at is, and the whole.
func (m *Meter) line(at int, now time.Time) string {
	total := 0
	for _, n := range m.ended {
		total += n
	}
	c := m.cases[at]
	text := fmt.Sprintf("%s/%d: %d of %d runs; in all %d of %d, %s gone", c.Name, c.Dim, m.ended[at], m.runs,
		total, m.runs*len(m.cases), report.Clock(now.Sub(m.began)))
	if left, ok := m.left(now); ok {
		text += fmt.Sprintf(", about %s left, until %s", report.Clock(left), now.Add(left).Format("15:04"))
	}
	return text
}

// left estimates the time left. A case that has finished runs needs their mean
// for each more, one that only has begun some what those seem to take; the others
// are guessed to need a time that grows as the square of the dimension, on
// the scale of those that are known.
func (m *Meter) left(now time.Time) (time.Duration, bool) {
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
			squares += float64(c.Dim * c.Dim)
		}
	}
	if seconds == 0 {
		return 0, false
	}
	var left float64
	for i, c := range m.cases {
		if each[i] == 0 {
			each[i] = seconds / squares * float64(c.Dim*c.Dim)
		}
		left += each[i] * max(0, float64(m.runs-m.ended[i])-gone[i])
	}
	return time.Duration(left / float64(len(m.active)) * float64(time.Second)), true
}
