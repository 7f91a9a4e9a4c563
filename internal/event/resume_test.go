package event

import (
	"context"
	"reflect"
	"strings"
	"testing"
	"time"

	"knell/sampler"
)

// TestGoesOn breaks a weighing off in its second hypothesis, again before it has begun,
// and then lets it end: the result is that of a run without a break.
func TestGoesOn(t *testing.T) {
	want, wantPosteriors := weigh(t, brief, 2)

	drawers := map[string]*drawer{"horizon": {}, "surface": {}}
	options := Options{
		Version: "test", Workers: 2, KeepEvery: time.Microsecond,
		Keeper:  func(h string) sampler.Keeper { return drawers[h] },
		NotKept: func(h string, err error) { t.Errorf("the state of %s is not kept: %v", h, err) },
	}
	ctx, cancel := context.WithCancel(context.Background())
	defer cancel()
	options.Progress = func(p Progress) {
		if p.Index == 1 && p.Calls > 700 {
			cancel()
		}
	}
	w, _, err := mustLoad(t, brief).Weigh(ctx, options)
	if err != nil || !w.Partial || len(w.Hypotheses) != 2 || drawers["surface"].state == nil {
		t.Fatalf("%v, partial %t, %d hypotheses", err, w.Partial, len(w.Hypotheses))
	}
	calls := w.Hypotheses[1].Calls

	// The context is cancelled already: what is kept is the result.
	heard := map[string]int64{}
	options.Resumed = func(h string, calls int64) { heard[h] = calls }
	w, posteriors, err := mustLoad(t, brief).Weigh(ctx, options)
	if err != nil || !w.Partial || len(w.Hypotheses) != 2 || len(posteriors) != 2 || w.Hypotheses[1].Calls != calls {
		t.Fatalf("%v, partial %t, %+v", err, w.Partial, w.Hypotheses)
	}
	if heard["horizon"] < 1000 || heard["surface"] < 1 || heard["surface"] > calls {
		t.Errorf("goes on from %v, %d calls reached", heard, calls)
	}

	// The finished hypothesis is not sampled again.
	sampled := map[string]bool{}
	options.Progress = func(p Progress) { sampled[p.Hypothesis] = true }
	w, posteriors, err = mustLoad(t, brief).Weigh(context.Background(), options)
	if err != nil {
		t.Fatal(err)
	}
	if sampled["horizon"] || !sampled["surface"] {
		t.Errorf("sampled %v, want surface alone", sampled)
	}
	for i := range w.Hypotheses {
		if !(w.Hypotheses[i].Seconds > 0) {
			t.Errorf("took %v s", w.Hypotheses[i].Seconds)
		}
		w.Hypotheses[i].Seconds = 0
	}
	if !reflect.DeepEqual(w, want) || !reflect.DeepEqual(posteriors, wantPosteriors) {
		t.Errorf("got\n%+v\nwant\n%+v", w, want)
	}
}

// TestInterruptedAfterSampling: a result that lacks the further routes to its evidence
// only because of an interruption says so.
func TestInterruptedAfterSampling(t *testing.T) {
	first, second := strings.Index(tiny, "[[hypothesis]]   # second"), strings.Index(tiny, "[prior]")
	text := tiny[:first] + tiny[second:strings.Index(tiny, "reflectivity = {")]
	c := mustLoad(t, text).Config
	c.Sampler.LivePoints, c.Sampler.EvidenceError = 50, 10
	p, err := Load(c)
	if err != nil {
		t.Fatal(err)
	}
	d := &drawer{}
	options := Options{Version: "test", Keeper: func(string) sampler.Keeper { return d }}
	whole, _, err := p.Weigh(context.Background(), options)
	if err != nil || whole.Partial || len(whole.Hypotheses) != 1 || len(whole.Hypotheses[0].Routes) == 0 {
		t.Fatalf("%v, %+v", err, whole)
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	w, _, err := p.Weigh(ctx, options)
	if err != nil || !w.Partial || len(w.Hypotheses) != 1 || w.Hypotheses[0].Partial || len(w.Hypotheses[0].Routes) != 0 ||
		!strings.Contains(strings.Join(w.Cautions, "\n"), "further routes") {
		t.Errorf("%v, %+v", err, w)
	}
}
