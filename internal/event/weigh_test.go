package event

import (
	"context"
	"errors"
	"reflect"
	"slices"
	"strings"
	"testing"

	"knell/internal/report"
	"knell/models"
)

// brief is tiny with noise and so few calls that the runs end at that limit: for
// tests of what happens around the sampling.
var brief = strings.NewReplacer("quiet = true", "quiet = false", "max_calls      = 0", "max_calls = 1500").Replace(tiny)

func weigh(t *testing.T, text string, workers int) (*report.Weighing, []report.Posterior) {
	t.Helper()
	w, posteriors, err := mustLoad(t, text).Weigh(context.Background(), Options{Version: "test", Workers: workers})
	if err != nil {
		t.Fatal(err)
	}
	for i := range w.Hypotheses {
		if w.Hypotheses[i].Seconds < 0 {
			t.Errorf("took %v s", w.Hypotheses[i].Seconds)
		}
		w.Hypotheses[i].Seconds = 0
	}
	return w, posteriors
}

// TestSeeds: a result depends on the file and the seed alone.
func TestSeeds(t *testing.T) {
	one, onePosteriors := weigh(t, brief, 1)
	three, threePosteriors := weigh(t, brief, 3)
	if !reflect.DeepEqual(one, three) || !reflect.DeepEqual(onePosteriors, threePosteriors) {
		t.Errorf("one worker gives\n%+v\nthree give\n%+v", one, three)
	}
	other, _ := weigh(t, strings.Replace(brief, "seed  = 7", "seed = 8", 1), 2)
	for i, h := range one.Hypotheses {
		if o := other.Hypotheses[i]; o.LogEvidence == h.LogEvidence {
			t.Errorf("%s: seeds 7 and 8 both give %v", h.Name, h.LogEvidence)
		}
	}
	// The sampler's seed leaves the synthetic noise alone, and the other way round.
	if one.LogEvidenceNoise != other.LogEvidenceNoise {
		t.Errorf("noise evidence %v and %v: the seed changed the noise", one.LogEvidenceNoise, other.LogEvidenceNoise)
	}
	noisy, _ := weigh(t, strings.Replace(brief, "seed = 4", "seed = 5", 1), 2)
	if one.LogEvidenceNoise == noisy.LogEvidenceNoise {
		t.Error("another seed of the noise gives the same noise")
	}

	// Alone, or in another order, a hypothesis keeps its result.
	first, second := strings.Index(brief, "[[hypothesis]]\n"), strings.Index(brief, "[[hypothesis]]   # second")
	end := strings.Index(brief, "[prior]")
	alone, alonePosteriors := weigh(t, brief[:first]+brief[second:end]+strings.ReplaceAll(brief[end:], "spin  ", "spin"), 2)
	if !reflect.DeepEqual(alone.Hypotheses[0], one.Hypotheses[1]) || !reflect.DeepEqual(alonePosteriors[0], onePosteriors[1]) {
		t.Errorf("alone\n%+v\nbeside another\n%+v", alone.Hypotheses[0], one.Hypotheses[1])
	}
	turned, _ := weigh(t, brief[:first]+brief[second:end]+brief[first:second]+brief[end:], 2)
	if !reflect.DeepEqual(turned.Hypotheses[0], one.Hypotheses[1]) || !reflect.DeepEqual(turned.Hypotheses[1], one.Hypotheses[0]) {
		t.Error("the order of hypotheses changes their results")
	}
	if turned.Ratios[0].For != "horizon" || turned.Ratios[0].LogBayesFactor != -one.Ratios[0].LogBayesFactor {
		t.Errorf("got ratio %+v, want the reverse of %+v", turned.Ratios[0], one.Ratios[0])
	}
}

// TestWeigh runs the ringdown to its end on a loud signal.
func TestWeigh(t *testing.T) {
	first, second := strings.Index(tiny, "[[hypothesis]]   # second"), strings.Index(tiny, "[prior]")
	text := tiny[:first] + tiny[second:strings.Index(tiny, "reflectivity = {")]
	p := mustLoad(t, text)
	var heard []Progress
	w, posteriors, err := p.Weigh(context.Background(), Options{Version: "test", Progress: func(q Progress) { heard = append(heard, q) }})
	if err != nil {
		t.Fatal(err)
	}
	if w.Partial || len(w.Ratios) != 0 || w.Event != "Tiny" || w.Seed != 7 || w.Version != "test" || len(w.Sites) != 1 {
		t.Errorf("got %+v", w)
	}
	h := w.Hypotheses[0]
	if h.Partial || h.Status != "converged" || h.Dimensions != 4 || h.LogEvidenceError > 1 {
		t.Errorf("got %+v", h)
	}
	// The evidence lies below the peak by about the information.
	if d := float64(h.MaxLogLikelihood - h.LogEvidenceOver); d < 2 || d > 30 {
		t.Errorf("ln evidence %v under a peak of %v", h.LogEvidenceOver, h.MaxLogLikelihood)
	}
	if d := h.LogEvidence - h.LogEvidenceOver - w.LogEvidenceNoise; d > 1e-6 || d < -1e-6 {
		t.Errorf("absolute less relative evidence is off by %v", d)
	}
	q := posteriors[0]
	want := []string{"mass", "spin", "start_time", "amplitude_220", "phase_220", "frequency_220", "damping_time_220", "log_likelihood_over_noise", "log_likelihood"}
	if !slices.Equal(q.Columns, want) || len(q.Units) != len(want) || len(q.Values) != len(want) {
		t.Fatalf("got columns %v, want %v", q.Columns, want)
	}
	// The injected values lie within the central 99.9 % of the samples, whose
	// signal-to-noise ratio is 13.
	for i, v := range injected {
		if i == 2 {
			continue
		}
		column := slices.Clone(q.Values[i])
		slices.Sort(column)
		if n := len(column); n < 100 || column[n/2000] > v || column[n-1-n/2000] < v {
			t.Errorf("%s: %d samples from %g to %g, want around %g", want[i], n, column[0], column[len(column)-1], v)
		}
	}
	if len(heard) == 0 || heard[0].Hypothesis != "horizon" || heard[0].Count != 1 || heard[0].Index != 0 {
		t.Errorf("heard %d reports of progress", len(heard))
	}
}

// TestCancelled: an interruption is a result, not an error, and says so.
func TestCancelled(t *testing.T) {
	t.Run("before", func(t *testing.T) {
		ctx, cancel := context.WithCancel(context.Background())
		cancel()
		w, posteriors, err := mustLoad(t, tiny).Weigh(ctx, Options{})
		if err != nil {
			t.Fatal(err)
		}
		text := strings.Join(w.Cautions, "\n")
		if !w.Partial || len(w.Hypotheses) != len(posteriors) || !strings.Contains(text, "horizon") || !strings.Contains(text, "surface") {
			t.Errorf("got partial %v, %d hypotheses, cautions %q", w.Partial, len(w.Hypotheses), w.Cautions)
		}
	})
	t.Run("amid the second", func(t *testing.T) {
		ctx, cancel := context.WithCancel(context.Background())
		w, posteriors, err := mustLoad(t, brief).Weigh(ctx, Options{Progress: func(p Progress) {
			if p.Index == 1 && p.Calls > 500 {
				cancel()
			}
		}})
		if err != nil {
			t.Fatal(err)
		}
		if !w.Partial || len(w.Hypotheses) != 2 || len(posteriors) != 2 {
			t.Fatalf("got partial %v, %d hypotheses, %d posteriors", w.Partial, len(w.Hypotheses), len(posteriors))
		}
		h := w.Hypotheses[1]
		if !h.Partial || h.Status != "interrupted" || !strings.Contains(h.Verdict, "interrupted") || h.Calls >= 1500 {
			t.Errorf("got %+v", h)
		}
		var b strings.Builder
		if err := w.WriteJSON(&b); err != nil || !strings.Contains(b.String(), `"partial": true`) {
			t.Errorf("document does not say that it is partial (%v)", err)
		}
		b.Reset()
		if err := report.Table(&b, w); err != nil || !strings.Contains(strings.ToLower(b.String()), "partial") {
			t.Errorf("table does not say that the result is partial (%v):\n%s", err, b.String())
		}
	})
}

// What was weighed before a hypothesis fails is not lost.
func TestWeighKeepsWhatItHas(t *testing.T) {
	c := mustLoad(t, twoSites).Config
	second := c.Hypotheses[0]
	second.Name = "broken"
	c.Hypotheses = append(c.Hypotheses[:1], second)
	c.Sampler.LivePoints, c.Sampler.MaxCalls, c.Sampler.EvidenceError = 100, 400, 10
	p, err := Load(c)
	if err != nil {
		t.Fatal(err)
	}
	p.hypotheses[1].model = failing{p.hypotheses[1].model}
	w, posteriors, err := p.Weigh(context.Background(), Options{Workers: 1})
	if err == nil || !strings.Contains(err.Error(), "broken") {
		t.Errorf("error %v, want one that names the hypothesis", err)
	}
	if w == nil || len(w.Hypotheses) != 1 || len(posteriors) != 1 || !w.Partial {
		t.Errorf("the first hypothesis is lost: %+v", w)
	}
}

// failing is a model that cannot be computed.
type failing struct{ models.Model }

func (f failing) Clone() models.Model { return f }

func (failing) Fill([]float64, *models.Polarizations) error { return errors.New("no such remnant") }
