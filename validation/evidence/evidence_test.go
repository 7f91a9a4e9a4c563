package main

import (
	"bytes"
	"context"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"os"
	"os/exec"
	"regexp"
	"runtime"
	"strings"
	"testing"
	"time"

	"knell/validation/trials"
)

// asCommand makes the test binary the command itself.
const asCommand = "KNELL_EVIDENCE_AS_COMMAND"

func TestMain(m *testing.M) {
	if os.Getenv(asCommand) != "" {
		main()
	}
	os.Exit(m.Run())
}

// The short version of the table: cheap problems of every kind of difficulty, few
// seeds. Each must pass.
func TestShortTable(t *testing.T) {
	var out bytes.Buffer
	args := "--problems gaussian,shells,eggbox,half-plateau,mostly-zero,tiers,hypercube,two-modes,ridge --dims 2,3 --seeds 12 --live 150 --seed 5"
	status := run(context.Background(), strings.Fields(args), &out, io.Discard)
	t.Logf("\n%s", out.String())
	if status != trials.Passed {
		t.Errorf("status %d, want %d", status, trials.Passed)
	}
}

// A truth that is off by two errors of a run must be seen.
func TestWrongTruthFails(t *testing.T) {
	o, err := parse(strings.Fields("--problems gaussian --dims 2 --seeds 8 --live 100"), io.Discard)
	if err != nil {
		t.Fatal(err)
	}
	cases, err := trials.All(context.Background(), o.chosen)
	if err != nil {
		t.Fatal(err)
	}
	cases[0].Truth += 0.4
	var rows []row
	measure(context.Background(), cases, o, trials.NewMeter(io.Discard, cases, o.seeds, o.workers), func(r row) { rows = append(rows, r) })
	if rows[0].Passed || !strings.Contains(rows[0].Faults[0], "mean z") {
		t.Errorf("passed %t, faults %q; want mean z", rows[0].Passed, rows[0].Faults)
	}
}

var secondsField = regexp.MustCompile(`"seconds": [0-9.e-]+`)

func TestSameTableForAnyNumberOfWorkers(t *testing.T) {
	var want string
	for _, workers := range []int{1, 2, 5} {
		var out bytes.Buffer
		args := fmt.Sprintf("--problems gaussian,mostly-zero,tiers --dims 2 --seeds 6 --live 64 --json --workers %d", workers)
		run(context.Background(), strings.Fields(args), &out, io.Discard)
		got := secondsField.ReplaceAllString(out.String(), `"seconds": 0`)
		if want == "" {
			want = got
		}
		if got != want || len(got) < 500 {
			t.Errorf("%d workers:\n%s\none worker:\n%s", workers, got, want)
		}
	}
}

func TestDocumentHasItsFields(t *testing.T) {
	var out bytes.Buffer
	run(context.Background(), strings.Fields("--problems gaussian,eggbox --dims 2 --seeds 6 --live 64 --json"), &out, io.Discard)
	var d struct {
		Problems []map[string]any `json:"problems"`
	}
	if err := json.Unmarshal(out.Bytes(), &d); err != nil {
		t.Fatal(err)
	}
	if len(d.Problems) != 2 {
		t.Fatalf("%d problems, want 2", len(d.Problems))
	}
	for i, p := range d.Problems {
		for _, field := range []string{"dim", "seeds", "truth", "mean_z", "std_z", "calls", "ideal_ratio", "rank_p"} {
			if _, ok := p[field].(float64); !ok {
				t.Errorf("field %s of problem %d is %v, want a number", field, i, p[field])
			}
		}
	}
	p := d.Problems[0]
	// ln Z = -2 ln 2: a normalised density on a box of side 2.
	if p["name"] != "gaussian" || p["dim"] != 2.0 || p["seeds"] != 6.0 || math.Abs(p["truth"].(float64)+2*math.Ln2) > 1e-12 {
		t.Errorf("the first problem is %v", p)
	}
	if p["ideal_ratio_target"] != 3.0 || p["shrinkage_mean"] == nil {
		t.Errorf("target %v, shrinkage %v; want 3 and a number", p["ideal_ratio_target"], p["shrinkage_mean"])
	}
	// No volume of the eggbox is known, and it has no target.
	q := d.Problems[1]
	if _, has := q["ideal_ratio_target"]; has || q["shrinkage_mean"] != nil {
		t.Errorf("target %v, shrinkage %v; want none and null", q["ideal_ratio_target"], q["shrinkage_mean"])
	}
}

// cancelling cancels a context once a text was written to it.
type cancelling struct {
	text   string
	cancel func()
	seen   bytes.Buffer
}

func (c *cancelling) Write(b []byte) (int, error) {
	c.seen.Write(b)
	if strings.Contains(c.seen.String(), c.text) {
		c.cancel()
	}
	return len(b), nil
}

func TestInterruptPrintsWhatIsDone(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	before := runtime.NumGoroutine()
	var out bytes.Buffer
	errs := &cancelling{text: "gaussian/2: 4 of 4 runs", cancel: cancel}
	status := run(ctx, strings.Fields("--problems gaussian,ridge --dims 2,8 --seeds 4 --live 64 --json --workers 2"), &out, errs)
	if status != trials.Interrupted {
		t.Errorf("status %d, want %d", status, trials.Interrupted)
	}
	var d document
	if err := json.Unmarshal(out.Bytes(), &d); err != nil {
		t.Fatal(err)
	}
	if !d.Interrupted || len(d.Problems) != 4 || d.Problems[0].Seeds != 4 || d.Problems[3].Seeds != 0 {
		t.Errorf("document %+v, want it interrupted with 4 runs of the first problem and none of the last", d)
	}
	for range 100 {
		if runtime.NumGoroutine() <= before {
			return
		}
		time.Sleep(10 * time.Millisecond)
	}
	t.Errorf("%d goroutines are left, %d before", runtime.NumGoroutine(), before)
}

// The signal itself, on a process of its own.
func TestSignalEndsCleanly(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("no interrupt can be sent to another process")
	}
	cmd := exec.Command(os.Args[0], strings.Fields("--problems gaussian --dims 2,32 --seeds 3 --live 200 --workers 1")...)
	cmd.Env = append(os.Environ(), asCommand+"=1")
	var out bytes.Buffer
	cmd.Stdout = &out
	cmd.Stderr = &cancelling{text: "gaussian/2: 3 of 3 runs", cancel: func() { _ = cmd.Process.Signal(os.Interrupt) }}
	err := cmd.Run()
	if cmd.ProcessState.ExitCode() != trials.Interrupted {
		t.Errorf("ended with %v, want status %d", err, trials.Interrupted)
	}
	for _, s := range []string{"INTERRUPTED", "gaussian    2", "runs to judge by: 0"} {
		if !strings.Contains(out.String(), s) {
			t.Errorf("stdout has no %q:\n%s", s, out.String())
		}
	}
}

// A row is there as soon as its runs are: what it says can end the rest.
func TestRowsPrintAsTheyComplete(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	out := &cancelling{text: "gaussian    2     4   -1.3863", cancel: cancel}
	status := run(ctx, strings.Fields("--problems gaussian --dims 2,16 --seeds 4 --live 100 --workers 2"), out, io.Discard)
	if status != trials.Interrupted || !strings.Contains(out.seen.String(), "INTERRUPTED") {
		t.Errorf("status %d, want %d\n%s", status, trials.Interrupted, out.seen.String())
	}
	if !strings.Contains(out.seen.String(), "gaussian   16     0  -11.0904") {
		t.Errorf("the row of 2 dimensions came after runs in 16:\n%s", out.seen.String())
	}
}

// Grown runs reach the share of a plain run's error, for more calls.
func TestGrownRuns(t *testing.T) {
	var docs [2]document
	for i, grow := range []string{"1", "0.6"} {
		var out bytes.Buffer
		run(context.Background(), strings.Fields("--problems gaussian --dims 2 --seeds 4 --live 100 --json --grow "+grow), &out, io.Discard)
		if err := json.Unmarshal(out.Bytes(), &docs[i]); err != nil {
			t.Fatal(err)
		}
	}
	full, part := docs[0].Problems[0], docs[1].Problems[0]
	if math.Abs(part.Wanted/full.Wanted-0.6) > 1e-12 || docs[1].Grow != 0.6 {
		t.Errorf("wanted errors %g and %g, want the second 0.6 times the first", full.Wanted, part.Wanted)
	}
	if float64(part.Error) > part.Wanted || part.Calls < 1.5*full.Calls {
		t.Errorf("error %g for %g calls, want %g at most, for more than the %g calls of a larger error", part.Error, part.Calls, part.Wanted, full.Calls)
	}
}
