package trials

import (
	"bytes"
	"strings"
	"testing"
	"time"

	"knell/internal/report"
)

func TestMeterEstimatesTimeLeft(t *testing.T) {
	cases := []Case{{Choice: Choice{"a", 2}}, {Choice: Choice{"b", 4}}}
	var out bytes.Buffer
	m := NewMeter(&out, cases, 4, 2)
	now := time.Unix(0, 0)
	m.now = func() time.Time { return now }
	m.began = now
	if _, ok := m.left(now); ok {
		t.Error("a time left before anything is known")
	}
	m.begin(0, 0)
	m.begin(1, 0)
	now = now.Add(10 * time.Second)
	m.update(0, 0.5)
	m.update(1, 0.5)
	// 20 s per run of a, 80 s per run of b, by the square of the dimension: 3 runs'
	// worth of a and 4 of b on two workers.
	if left, ok := m.left(now); !ok || left != 190*time.Second {
		t.Errorf("%v left, want 190 s", left)
	}
	now = now.Add(10 * time.Second)
	m.end(0, true)
	// One ended, one half done by its own word, two not begun.
	if left, _ := m.left(now); left != time.Duration((2.5*20+4*80)/2*float64(time.Second)) {
		t.Errorf("%v left, want 185 s", left)
	}
	now = now.Add(10 * time.Second)
	m.update(1, 0.9)
	if last := out.String(); !strings.Contains(last, "a/2: 1 of 4 runs; in all 1 of 8, 30 s gone, about 3:01 left") {
		t.Errorf("lines:\n%s", last)
	}
}

func TestMeterIsQuietBetweenLines(t *testing.T) {
	cases := []Case{{Choice: Choice{"a", 2}}}
	var out bytes.Buffer
	m := NewMeter(&out, cases, 4, 1)
	now := time.Unix(0, 0)
	m.now = func() time.Time { return now }
	m.begin(0, 0)
	for i := range 1000 {
		now = now.Add(50 * time.Millisecond)
		m.update(0, float64(i)/1000)
	}
	// 50 s at one line per 10 s.
	if n := strings.Count(out.String(), "\n"); n < 5 || n > 6 {
		t.Errorf("%d lines in 50 s, want 5 or 6:\n%s", n, out.String())
	}
}

func TestClock(t *testing.T) {
	for d, want := range map[time.Duration]string{9 * time.Second: "9 s", 125 * time.Second: "2:05", 10925 * time.Second: "3:02:05"} {
		if got := report.Clock(d); got != want {
			t.Errorf("clock(%v) = %q, want %q", d, got, want)
		}
	}
}
