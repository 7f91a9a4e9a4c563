package report

import (
	"bytes"
	"math"
	"strings"
	"sync"
	"testing"
	"time"
)

// fakeClock is a clock that moves when told.
type fakeClock struct{ at time.Time }

func (c *fakeClock) now() time.Time { return c.at }

func newTestMeter(terminal bool) (*Meter, *bytes.Buffer, *fakeClock) {
	var out bytes.Buffer
	clock := &fakeClock{time.Date(2026, 1, 1, 0, 0, 0, 0, time.UTC)}
	m := NewMeter(&out)
	m.now, m.status.terminal, m.status.width = clock.now, terminal, func() int { return 80 }
	return m, &out, clock
}

func TestMeterPlain(t *testing.T) {
	m, out, clock := newTestMeter(false)
	for i := range 301 {
		m.Update(Progress{"horizon", 12.5, 0.25, int64(1000 * i), float64(i) / 600})
		clock.at = clock.at.Add(100 * time.Millisecond)
	}
	m.Note("a warning")
	m.Done()
	// 30.1 s: lines at 0, 10, 20 and 30 s, then the note.
	want := "horizon: ln evidence over noise 12.50 ± 0.25 so far, 0 calls, 0 s gone\n" +
		"horizon: ln evidence over noise 12.50 ± 0.25 so far, 100,000 calls, 10 s gone, about 50 s left\n" +
		"horizon: ln evidence over noise 12.50 ± 0.25 so far, 200,000 calls, 20 s gone, about 40 s left\n" +
		"horizon: ln evidence over noise 12.50 ± 0.25 so far, 300,000 calls, 30 s gone, about 30 s left\n" +
		"a warning\n"
	if got := out.String(); got != want {
		t.Errorf("got:\n%swant:\n%s", got, want)
	}
}

func TestMeterNewLabelShowsAtOnce(t *testing.T) {
	m, out, _ := newTestMeter(false)
	m.Update(Progress{"horizon", 1, 1, 1, 0.5})
	m.Update(Progress{"surface", math.NaN(), math.NaN(), 0, math.NaN()})
	if got := out.String(); !strings.HasSuffix(got, "surface: no evidence yet, 0 calls, 0 s gone\n") {
		t.Errorf("got %q", got)
	}
}

func TestMeterTerminal(t *testing.T) {
	m, out, clock := newTestMeter(true)
	m.status.width = func() int { return 60 }
	m.Update(Progress{"a long name", 123456.5, 0.25, 123456789, 0.5})
	m.Update(Progress{"a long name", 1, 0.25, 1, 0.5}) // too soon
	clock.at = clock.at.Add(time.Second)
	m.Update(Progress{"s", math.NaN(), 0, 1, math.NaN()})
	m.Done()
	lines := strings.Split(out.String(), "\r")
	if len(lines) != 5 || lines[0] != "" || lines[4] != "" {
		t.Fatalf("want two lines and a wipe, got %q", lines)
	}
	if n := len([]rune(lines[1])); n != 59 {
		t.Errorf("first line is %d wide, want 59", n)
	}
	// The second covers the first; the wipe needs to cover the second alone.
	if !strings.HasPrefix(lines[2], "s: no evidence yet") || len([]rune(lines[2])) != 59 {
		t.Errorf("second line %q", lines[2])
	}
	if strings.TrimSpace(lines[3]) != "" || len(lines[3]) != len(strings.TrimRight(lines[2], " ")) {
		t.Errorf("wipe %q", lines[3])
	}
	if strings.ContainsAny(out.String(), "\n\x1b") {
		t.Errorf("a newline or an escape in %q", out.String())
	}
}

func TestMeterConcurrent(t *testing.T) {
	m, _, _ := newTestMeter(true)
	var wait sync.WaitGroup
	for range 4 {
		wait.Go(func() {
			for i := range 100 {
				m.Update(Progress{Label: "x", Calls: int64(i)})
			}
			m.Note("y")
		})
	}
	wait.Wait()
	m.Done()
}

func TestClock(t *testing.T) {
	for d, want := range map[time.Duration]string{
		0: "0 s", 59400 * time.Millisecond: "59 s", 59600 * time.Millisecond: "1:00",
		125 * time.Second: "2:05", 3*time.Hour + 2*time.Minute + 5*time.Second: "3:02:05",
	} {
		if got := Clock(d); got != want {
			t.Errorf("Clock(%v) = %q, want %q", d, got, want)
		}
	}
}
